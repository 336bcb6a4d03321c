"""Gates hidden in clauses: sets of clauses that say what one variable is, given others.

Two ways to find them: windows of at most five variables, whose clauses together leave a variable at most one
value for all values of the others (AND, OR, XOR, selection, majority, equality, and any other function); and
a long clause with its two-literal clauses (wide AND and OR). A sum (XOR clause) defines any of its
variables.

For gates: Ostrowski, Grégoire, Mazure, Saïs, "Recovering and exploiting structural knowledge from CNF
formulas", CP 2002; for windows: Lang, Marquis, "On propositional definability", Artificial Intelligence 172,
2008 (both from memory).
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from functools import cache
from itertools import combinations
from typing import Literal, TypeAlias

from revsynth.logic.clauses.simplify import Clause, Conjunction

WINDOW = 5
"""Variables of a window."""
MOST_NEIGHBOURS = 24
"""Of three-literal clauses that share two variables so many are joined to windows, for each pair."""

Variables: TypeAlias = tuple[int, ...]


@dataclass(frozen=True)
class Gate:
    """Clauses over `variables` that define each variable of `outputs` by the others.

    kind: "window": `table` has bit p set where the clauses hold, variables[i] being bit i of p.
          "product": outputs[0] is the AND of `literals` (its complement is, where `inverted`).
          "sum": the exclusive sum of the variables is 1, or 0 where `inverted`.
    clauses: of windows and products, by number; those of a product hold once the definition does.
    """

    kind: Literal["window", "product", "sum"]
    variables: Variables
    outputs: Variables
    table: int = 0
    literals: tuple[int, ...] = ()
    inverted: bool = False
    clauses: tuple[int, ...] = ()

    def operands(self, output: int) -> Variables:
        """The variables that define one of the outputs."""
        return tuple(variable for variable in self.variables if variable != output)


def find_gates(found: Conjunction) -> list[Gate]:
    """All gates of a conjunction, small ones first; without windows of which smaller ones say as much."""
    numbers: dict[Variables, list[int]] = {}
    for number, clause in enumerate(found.clauses):
        numbers.setdefault(tuple(sorted(map(abs, clause))), []).append(number)
    sums = {entry: Gate("sum", entry[0], entry[0], inverted=not entry[1]) for entry in found.sums}
    gates: list[Gate] = []
    known: dict[int, list[frozenset[int]]] = {}
    for variables in sorted(_windows(numbers), key=lambda window: (len(window), window)):
        inside = _inside(variables, numbers)
        table = window_table(variables, [found.clauses[number] for number in inside])
        linear = implied_sums(variables, table)
        for entry in linear:
            sums.setdefault(entry, Gate("sum", entry[0], entry[0], inverted=not entry[1]))
        outputs = _outputs(variables, table, linear, known)
        if outputs or linear:
            gates.append(Gate("window", variables, outputs, table=table, clauses=inside))
        for output in outputs:
            known.setdefault(output, []).append(frozenset(variables) - {output})
    return [*gates, *_products(found.clauses), *sums.values()]


def _inside(variables: Variables, numbers: dict[Variables, list[int]]) -> tuple[int, ...]:
    """The clauses over a window's variables."""
    sizes = range(2, len(variables) + 1)
    parts = [part for size in sizes for part in combinations(variables, size)]
    return tuple(number for part in parts for number in numbers.get(part, ()))


def _outputs(
    variables: Variables,
    table: int,
    linear: Sequence[tuple[Variables, int]],
    known: dict[int, list[frozenset[int]]],
) -> Variables:
    """The variables that a window defines, but for those of its sums and of smaller windows."""
    by_sum = {variable for part, _ in linear for variable in part}
    found = []
    for place, variable in enumerate(variables):
        zero, one = cofactors(table, place, len(variables))
        others = frozenset(variables) - {variable}
        fewer = any(other <= others for other in known.get(variable, ()))
        if zero & one == 0 and variable not in by_sum and not fewer:
            found.append(variable)
    return tuple(found)


def _windows(numbers: dict[Variables, list[int]]) -> dict[Variables, None]:
    """Sets of variables that are worth a look: those of clauses, and of two threes that share two."""
    windows: dict[Variables, None] = {}
    thirds: dict[tuple[int, int], dict[int, None]] = {}
    for variables in numbers:
        if 2 <= len(variables) <= WINDOW:
            windows[variables] = None
        if len(variables) == 3:
            for pair in combinations(variables, 2):
                third = next(variable for variable in variables if variable not in pair)
                thirds.setdefault((pair[0], pair[1]), {})[third] = None
    for pair, others in thirds.items():
        for two in combinations(list(others)[:MOST_NEIGHBOURS], 2):
            windows[tuple(sorted((*pair, *two)))] = None
    return windows


def window_table(variables: Variables, clauses: Sequence[Clause]) -> int:
    """Bit p is 1 where all clauses hold, variables[i] being bit i of p."""
    size = 1 << len(variables)
    everything = (1 << size) - 1
    columns = {
        variable: everything // ((1 << (1 << place)) + 1) << (1 << place)
        for place, variable in enumerate(variables)
    }
    table = everything
    for clause in clauses:
        holds = 0
        for entry in clause:
            column = columns[abs(entry)]
            holds |= column if entry > 0 else everything ^ column
        table &= holds
    return table


def implied_sums(variables: Sequence[int], table: int) -> list[tuple[tuple[int, ...], int]]:
    """The sums that hold wherever a window's table is 1, as (variables, value); none where it never is."""
    size = len(variables)
    if not table or 2 * table.bit_count() > 1 << size:
        return []
    found = []
    for count in range(1, size + 1):
        for places in combinations(range(size), count):
            odd = odd_points(size, sum(1 << place for place in places))
            for value in (0, 1):
                if not table & (odd if value == 0 else ~odd):
                    found.append((tuple(variables[place] for place in places), value))
    return found


@cache
def odd_points(variables: int, mask: int) -> int:
    """Bit p is 1 where p has an odd number of ones within the mask."""
    return sum(1 << point for point in range(1 << variables) if (point & mask).bit_count() & 1)


def cofactors(table: int, place: int, variables: int) -> tuple[int, int]:
    """The table where variable `place` is 0, and where it is 1, over the other variables in their order."""
    half = 1 << place
    zero = one = shift = 0
    mask = (1 << half) - 1
    for begin in range(0, 1 << variables, 2 * half):
        zero |= (table >> begin & mask) << shift
        one |= (table >> (begin + half) & mask) << shift
        shift += half
    return zero, one


def _products(clauses: Sequence[Clause]) -> Iterator[Gate]:
    """ANDs and ORs too wide for a window: (x or not a or not b ...) with (not x or a), (not x or b), ..."""
    pairs = {clause: number for number, clause in enumerate(clauses) if len(clause) == 2}
    partners: dict[int, set[int]] = {}
    for one, other in pairs:
        partners.setdefault(one, set()).add(other)
        partners.setdefault(other, set()).add(one)
    for number, clause in enumerate(clauses):
        if len(clause) <= WINDOW:
            continue
        for head in clause:
            rest = [-entry for entry in clause if entry != head]
            near = partners.get(-head, set())
            if len(near) < len(rest) or not near.issuperset(rest):
                continue
            used = [pairs[min((-head, entry), (entry, -head))] for entry in rest]
            yield Gate(
                "product",
                tuple(sorted(map(abs, clause))),
                (abs(head),),
                literals=tuple(rest),
                inverted=head < 0,
                clauses=(number, *used),
            )
