"""Formulas, clauses, covers and netlists at many inputs: Python's big integers, one bit an input."""

from __future__ import annotations

from collections.abc import Callable, Iterable, Sequence
from functools import reduce
from operator import and_, or_, xor

import numpy as np
from numpy.typing import NDArray

from revsynth.spec.formula_reference import Node, read_again
from revsynth.spec.model import Clauses, Cover, Outputs, Permutation, Predicate, Spec, Word
from revsynth.spec.netlist import Netlist, NetlistGate

Words = NDArray[np.uint64]
Column = int
"""Bit i is the value at input i."""
Columns = tuple[list[Column], list[Column]]
"""By output bit: the values, and where they are free."""

_GATE_COST = 12
"""Of one operation at one input, in units of 1/4 ns, as in `sampled`; a whole number of them an operand."""


class Gatewise:
    """Evaluates a body gate by gate. cost: at one input, in the units of `sampled`."""

    def __init__(self, rule: Callable[[list[Column], Column], Columns], operations: int) -> None:
        self._rule = rule
        self.cost = max(operations * _GATE_COST // 64, 1)

    def columns(self, inputs: Words) -> tuple[Words, Words]:
        """Values and free places of the outputs, uint64 (outputs, words), for inputs (input bits, words)."""
        words = inputs.shape[1]
        raw = np.ascontiguousarray(inputs.astype("<u8"))
        variables = [int.from_bytes(row.tobytes(), "little") for row in raw]
        values, free = self._rule(variables, (1 << 64 * words) - 1)
        return _words(values, words), _words(free, words)


def gatewise(spec: Spec) -> Gatewise | None:
    """The evaluator of a spec's body; None where it is none of these."""
    body = spec.body
    if isinstance(body, Permutation):
        return None
    if body.netlist is not None:
        return _netlist(body.netlist)
    if body.cover is not None:
        return _cover(body.cover)
    if isinstance(body, Outputs):
        return None
    if body.clauses is not None:
        return _clauses(body.clauses)
    return None if body.formula is None else _formula(body, spec.inputs)


def _words(columns: Sequence[Column], words: int) -> Words:
    raw = b"".join(column.to_bytes(8 * words, "little") for column in columns)
    return np.frombuffer(raw, dtype="<u8").reshape(len(columns), words).astype(np.uint64)


def _netlist(netlist: Netlist) -> Gatewise:
    """Columns are forgotten behind their last reader."""
    first = netlist.inputs + 1
    last = {signal >> 1: len(netlist.gates) for signal in netlist.outputs}
    for place in range(len(netlist.gates) - 1, -1, -1):
        for signal in netlist.gates[place].operands:
            last.setdefault(signal >> 1, place)
    dying: dict[int, list[int]] = {}
    for number, place in last.items():
        dying.setdefault(place, []).append(number)

    def rule(inputs: list[Column], every: Column) -> Columns:
        values: dict[int, Column] = {0: 0} | dict(enumerate(inputs, 1))

        def column(signal: int) -> Column:
            return values[signal >> 1] ^ every if signal & 1 else values[signal >> 1]

        for place, gate in enumerate(netlist.gates):
            if first + place in last:
                values[first + place] = _gate(gate, [column(signal) for signal in gate.operands], every)
            for number in dying.get(place, ()):
                if number:
                    values.pop(number, None)
        return [column(signal) for signal in netlist.outputs], [0] * len(netlist.outputs)

    return Gatewise(rule, sum(1 + len(gate.operands) * max(len(gate.rows), 1) for gate in netlist.gates))


def _gate(gate: NetlistGate, operands: Sequence[Column], every: Column) -> Column:
    if gate.kind == "xor":
        return reduce(xor, operands, 0)
    if gate.kind == "and":
        return reduce(and_, operands, every)
    if gate.kind == "or":
        return reduce(or_, operands, 0)
    return reduce(or_, (_fits(row, operands, every) for row in gate.rows), 0)


def _fits(row: str, operands: Iterable[Column], every: Column) -> Column:
    """Where operands are as a row of 0, 1 and others (either) says."""
    found = every
    for said, operand in zip(row, operands, strict=True):
        if said == "1":
            found &= operand
        elif said == "0":
            found &= operand ^ every
    return found


def _cover(cover: Cover) -> Gatewise:
    """On and off outrank free; what no row says is free where 0 means off, and 0 elsewhere."""

    def rule(inputs: list[Column], every: Column) -> Columns:
        on, off, open_ = ([0] * cover.outputs for _ in range(3))
        for row, outputs in cover.rows:
            fits = _fits(row, inputs, every)
            for place, said in enumerate(outputs):
                for sign, rows in (("1", on), ("0", off), ("-", open_)):
                    if said == sign:
                        rows[place] |= fits
        free = []
        for one, zero, loose in zip(on, off, open_, strict=True):
            stated = one | zero if "r" in cover.kind else one
            left = every if "r" in cover.kind else loose if "d" in cover.kind else 0
            free.append(left & (every ^ stated))
        return on, free

    operations = sum(sum(said in "01" for said in row) + cover.outputs for row, _ in cover.rows)
    return Gatewise(rule, operations)


def _clauses(clauses: Clauses) -> Gatewise:
    def rule(inputs: list[Column], every: Column) -> Columns:
        def column(literal: int) -> Column:
            return inputs[literal - 1] if literal > 0 else inputs[-literal - 1] ^ every

        found = every
        for clause in clauses.clauses:
            found &= reduce(or_, map(column, clause), 0)
        for clause in clauses.xor_clauses:
            found &= reduce(xor, map(column, clause), 0)
        return [found], [0]

    return Gatewise(rule, sum(1 + len(c) for c in (*clauses.clauses, *clauses.xor_clauses)))


def _formula(body: Predicate, words: Sequence[Word]) -> Gatewise:
    nodes = read_again(body.formula or "", words)
    place: dict[tuple[str, int, int], int] = {}
    for word in words:
        for element in range(word.count or 1):
            for bit in range(word.bits):
                place[word.name, element, bit] = len(place)

    def rule(inputs: list[Column], every: Column) -> Columns:
        found: list[Column] = []
        for node in nodes:
            if node.kind == "constant":
                found.append(every * node.constant)
            elif node.kind == "bit":
                found.append(inputs[place[node.name, node.element or 0, node.bit]])
            else:
                found.append(_operation(node, [found[part] for part in node.parts], every))
        return [found[-1]], [0]

    return Gatewise(rule, sum(1 + _operations(node) for node in nodes))


def _operations(node: Node) -> int:
    parts = len(node.parts)
    return parts * parts.bit_length() if node.kind in ("Majority", "OneHot", "OneHot0") else parts


def _operation(node: Node, parts: list[Column], every: Column) -> Column:
    kind = node.kind
    if kind in ("~", "not", "Not"):
        return parts[0] ^ every
    if kind in ("&", "and", "And"):
        return reduce(and_, parts, every)
    if kind in ("|", "or", "Or"):
        return reduce(or_, parts, 0)
    if kind in ("^", "!=", "Xor"):
        return reduce(xor, parts, 0)
    if kind in ("==", "<=>"):
        return parts[0] ^ parts[1] ^ every
    if kind == "=>":
        return parts[0] ^ every | parts[1]
    if kind == "ITE":
        return parts[0] & parts[1] | (parts[0] ^ every) & parts[2]
    if kind == "Majority":
        return _more_than_half(parts, every)
    once = twice = 0
    for part in parts:
        twice |= once & part
        once |= part
    return (once if kind == "OneHot" else every) & (twice ^ every)


def _more_than_half(parts: Sequence[Column], every: Column) -> Column:
    """Counters bit by bit, compared with half the number of parts from the top."""
    digits: list[Column] = [0] * len(parts).bit_length()
    for part in parts:
        carry = part
        for place, digit in enumerate(digits):
            digits[place], carry = digit ^ carry, digit & carry
    half = len(parts) // 2
    above, same = 0, every
    for place in range(len(digits) - 1, -1, -1):
        if half >> place & 1:
            same &= digits[place]
        else:
            above |= same & digits[place]
            same &= digits[place] ^ every
    return above
