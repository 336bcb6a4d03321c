"""The sheet that a block in place is written on: gates, which line holds which bit, and clean scratch lines.

A *value* is a constant (FALSE, TRUE below) or the literal of a line: `2 * line + 2`, or one more for its
complement, so that complementing is flipping the lowest bit for all of them.
"""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from heapq import heappop, heappush
from typing import TypeAlias

from revsynth.cascade.model import Cascade, Gate, Line
from revsynth.errors import BudgetError

Value: TypeAlias = int
Bit: TypeAlias = int

MOST_GATES = 4_000_000
"""Larger blocks are refused: they take some hundred bytes a gate."""

FALSE: Value = 0
TRUE: Value = 1


def value_of(line: Line, negative: bool = False) -> Value:
    """The value on a line, or its complement."""
    return 2 * line + 2 + negative


def line_of(value: Value) -> Line:
    """The line of a value that is no constant."""
    return (value >> 1) - 1


class Sheet:
    """Collects gates. Bits start on the lines of their numbers, scratch follows."""

    def __init__(self, bits: int) -> None:
        self.bits = bits
        self.gates: list[Gate] = []
        self.home: list[Line] = list(range(bits))
        self.lines = bits
        self._free: list[Line] = []

    def at(self, bit: Bit) -> Line:
        """The line that holds a bit now."""
        return self.home[bit]

    def lines_of(self, bits: Iterable[Bit]) -> list[Line]:
        """The lines of several bits."""
        return [self.home[bit] for bit in bits]

    def take(self, count: int = 1) -> list[Line]:
        """Clean scratch lines, the lowest first."""
        found: list[Line] = []
        for _ in range(count):
            if self._free:
                found.append(heappop(self._free))
            else:
                found.append(self.lines)
                self.lines += 1
        return found

    def give(self, lines: Iterable[Line]) -> None:
        """Lines that are clean again."""
        for line in lines:
            heappush(self._free, line)

    def flip(self, target: Line) -> None:
        """NOT."""
        self.gates.append(Gate(target))

    def xor(self, target: Line, value: Value) -> None:
        """target ^= value."""
        if value == TRUE:
            self.flip(target)
        elif value != FALSE:
            self.gates.append(Gate(target, (value - 2,)))

    def both(self, target: Line, one: Value, other: Value) -> None:
        """target ^= one AND other."""
        if one > other:
            one, other = other, one
        if one == FALSE or one ^ other == 1:
            return
        if one in (TRUE, other):
            self.xor(target, other)
        else:
            self.gates.append(Gate(target, (one - 2, other - 2)))

    def swap(self, one: Line, other: Line, under: Value = TRUE) -> None:
        """Two lines change places, where `under` is 1."""
        self.xor(one, value_of(other))
        self.both(other, value_of(one), under)
        self.xor(one, value_of(other))

    def place(self, cascade: Cascade, lines: Sequence[Line]) -> None:
        """A cascade, its line i on `lines[i]`."""
        for gate in cascade:
            controls = sorted(2 * lines[c >> 1] + (c & 1) for c in gate.controls)
            self.gates.append(Gate(lines[gate.target], tuple(controls)))

    def undo_from(self, start: int, end: int) -> None:
        """The gates from `start` to `end` once more, backwards."""
        self.gates.extend(self.gates[start:end][::-1])

    def check_size(self) -> None:
        """Raise BudgetError where the block is getting too large."""
        if len(self.gates) > MOST_GATES:
            raise BudgetError(f"the steps need more than {MOST_GATES:,} gates; narrower words need fewer")

    def bring_home(self) -> None:
        """Every bit back to the line of its number: swaps of what was only renamed."""
        for bit in range(self.bits):
            line = self.home[bit]
            if line != bit:
                other = self.home.index(bit)
                self.swap(line, bit)
                self.home[bit], self.home[other] = bit, line

    def cascade(self, positive: bool = False) -> Cascade:
        """Everything so far; `positive`: NOTs around controls in place of negative ones."""
        gates = self.gates if not positive else [one for gate in self.gates for one in _positive(gate)]
        return Cascade.from_gates(self.lines, gates)


def _positive(gate: Gate) -> list[Gate]:
    """The same gate with controls that wait for 1 only."""
    flips = [Gate(control >> 1) for control in gate.controls if control & 1]
    plain = Gate(gate.target, tuple(control & -2 for control in gate.controls))
    if flips and len(gate.controls) == 1:
        return [plain, Gate(gate.target)]
    return [*flips, plain, *flips]
