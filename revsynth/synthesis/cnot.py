"""CNOT circuits with few gates for linear maps, and CNOT plans that add linear forms to other lines.

A map on n lines is a list of n integers: bit i of rows[j] says whether line i is XORed into line j.
Sources: Gaussian elimination (common practice); greedy elimination from both sides by the weight of the
matrix and of its inverse: de Brugiere, Baboulin, Valiron, Martiel, Allouche, "Gaussian elimination versus
greedy methods for the synthesis of linear reversible circuits", ACM Trans. Quantum Computing 2(3), 2021.
"""

from __future__ import annotations

from collections.abc import Sequence
from typing import TypeAlias

Cnot: TypeAlias = tuple[int, int]
"""(control line, target line)."""


def cnot_circuit(rows: Sequence[int]) -> list[Cnot]:
    """CNOTs, first one first, that compute the invertible map; the shortest of several eliminations.

    Raises ValueError where the map is not invertible.
    """
    lines = len(rows)
    backwards = inverse_rows(rows)
    found = [_greedy(rows, backwards)]
    found.append(eliminate(rows))
    found.append([(control, target) for control, target in reversed(eliminate(backwards))])
    flipped = eliminate(transposed(rows, lines))
    found.append([(target, control) for control, target in reversed(flipped)])
    return min(found, key=len)


def eliminate(rows: Sequence[int]) -> list[Cnot]:
    """Gaussian elimination to the identity without row swaps; raises ValueError if not invertible."""
    work = list(rows)
    lines = len(work)
    steps: list[Cnot] = []
    for column in range(lines):
        bit = 1 << column
        if not work[column] & bit:
            donors = [row for row in range(column + 1, lines) if work[row] & bit]
            if not donors:
                raise ValueError("the linear map is not invertible")
            _add(work, steps, min(donors, key=lambda row: (work[row] ^ work[column]).bit_count()), column)
        for row in range(column + 1, lines):
            if work[row] & bit:
                _add(work, steps, column, row)
    for column in reversed(range(lines)):
        for row in range(column):
            if work[row] & (1 << column):
                _add(work, steps, column, row)
    return steps[::-1]


def _add(work: list[int], steps: list[Cnot], source: int, row: int) -> None:
    work[row] ^= work[source]
    steps.append((source, row))


def transposed(rows: Sequence[int], width: int) -> list[int]:
    """The transposed matrix, as `width` rows."""
    return [sum(((row >> column) & 1) << index for index, row in enumerate(rows)) for column in range(width)]


def inverse_rows(rows: Sequence[int]) -> list[int]:
    """The inverse map; raises ValueError where there is none."""
    work = [1 << line for line in range(len(rows))]
    for control, target in reversed(eliminate(rows)):
        work[target] ^= work[control]
    return work


def _greedy(rows: Sequence[int], backwards: Sequence[int]) -> list[Cnot]:
    """Row and column operations that lighten the matrix and its inverse most; lines swapped at the end."""
    lines = len(rows)
    row, column = list(rows), transposed(rows, lines)
    inverse_row, inverse_column = list(backwards), transposed(backwards, lines)
    front: list[Cnot] = []
    back: list[Cnot] = []
    while sum(one.bit_count() for one in row) > lines:
        best = (0, 0, 0, 0)
        for source in range(lines):
            for other in range(lines):
                if source == other:
                    continue
                gain_row = _gain(row, source, other) + _gain(inverse_column, other, source)
                gain_column = _gain(column, source, other) + _gain(inverse_row, other, source)
                best = min(best, (gain_row, 0, source, other), (gain_column, 1, source, other))
        if best[0] >= 0:
            break
        _, by_column, source, other = best
        if by_column:
            column[other] ^= column[source]
            inverse_row[source] ^= inverse_row[other]
            row, inverse_column = transposed(column, lines), transposed(inverse_row, lines)
            front.append((other, source))
        else:
            row[other] ^= row[source]
            inverse_column[source] ^= inverse_column[other]
            column, inverse_row = transposed(row, lines), transposed(inverse_column, lines)
            back.append((source, other))
    return front + _swap_or_eliminate(row) + back[::-1]


def _gain(vectors: list[int], source: int, other: int) -> int:
    return (vectors[other] ^ vectors[source]).bit_count() - vectors[other].bit_count()


def _swap_or_eliminate(rows: list[int]) -> list[Cnot]:
    """A wire permutation by swaps of three CNOTs, one less than each cycle is long; else elimination."""
    if any(row.bit_count() != 1 for row in rows):
        return eliminate(rows)
    source_of = [row.bit_length() - 1 for row in rows]
    steps: list[Cnot] = []
    for line in range(len(source_of)):
        other = source_of[line]
        if other != line:
            steps += [(line, other), (other, line), (line, other)]
            source_of[source_of.index(line)] = other
            source_of[line] = line
    return steps


def place_nots(steps: Sequence[Cnot], constant: int) -> tuple[int, int]:
    """Where NOTs cost least: (position, mask), NOTs on the lines of `mask` before gate `position`.

    `constant`: the lines to invert after all gates. Ties go to the end of the circuit.
    """
    best = (constant.bit_count(), len(steps), constant)
    mask = constant
    for position in reversed(range(len(steps))):
        control, target = steps[position]
        mask ^= ((mask >> control) & 1) << target
        if mask.bit_count() < best[0]:
            best = (mask.bit_count(), position, mask)
    return best[1], best[2]


def addition_tree(forms: Sequence[int], *, fresh: bool) -> list[tuple[int, int | None, int]]:
    """How to add each form to its own output line: [(output, parent output or None, what is left to add)].

    An output may be taken from a parent that is finished before it: one CNOT where outputs start in 0
    (`fresh`), two otherwise (the parent's old value is cancelled first). A minimum spanning tree (Prim, Bell
    System Technical Journal 36, 1957), parents first.
    """
    link = 1 if fresh else 2
    plan: list[tuple[int, int | None, int]] = []
    best: dict[int, tuple[int, int, int | None]] = {
        output: (form.bit_count(), -1, None) for output, form in enumerate(forms)
    }
    while best:
        output = min(best, key=lambda one: (best[one][0], best[one][1], one))
        parent = best.pop(output)[2]
        plan.append((output, parent, forms[output] if parent is None else forms[output] ^ forms[parent]))
        for other in best:
            through = (link + (forms[other] ^ forms[output]).bit_count(), output, output)
            best[other] = min(best[other], through, key=lambda one: (one[0], one[1]))
    return plan
