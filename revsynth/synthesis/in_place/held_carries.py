"""Addition in place with every carry on a clean line of its own: one AND a bit, erased on the way back.

Source: Gidney, "Halving the cost of quantum addition", Quantum 2, 2018; there with the carries erased by
measurement, which the lowering does where it is asked to. A constant addend takes fewer ANDs, and a summand
may share lines with the target below, so that x += x << k works as well.
"""

from __future__ import annotations

from collections import Counter
from collections.abc import Callable, Sequence
from dataclasses import dataclass

from revsynth.cascade.model import Line
from revsynth.synthesis.in_place.sheet import FALSE, TRUE, Sheet, Value, line_of, value_of

Release = Callable[[int], None]


def add_held(
    sheet: Sheet,
    target: Sequence[Line],
    addend: Sequence[Value],
    subtract: bool = False,
    release: Release | None = None,
    read: Sequence[Line] = (),
) -> None:
    """The number on `target` (bit 0 first) plus, or minus, the addend, modulo 2**len(target).

    addend: a value a bit. It may stand on lines of the target, each at a higher place than its own.
    release: called with each place from the top down when the addend's bit there is not needed any more; it
    may read the lines `read`, which at lower places of the target hold what they held at first.
    """
    _Ripple(sheet, target, addend, subtract, read).run(len(target) - 1, None, release)


def xor_carry(
    sheet: Sheet, onto: Line, target: Sequence[Line], addend: Sequence[Value], subtract: bool = False
) -> None:
    """onto ^= the carry out of target + addend, or the borrow of target - addend; nothing else changes."""

    def use(carry: Value) -> None:
        sheet.xor(onto, carry)

    _Ripple(sheet, target, addend, subtract).run(len(target), use, None)


@dataclass(frozen=True)
class _Stage:
    """One place whose carry out is on a line of its own.

    carry: what was XORed to both operands first, FALSE for nothing; left: whether it stays there until the
    way back, which it cannot where a line of them is read elsewhere too.
    """

    line: Line
    one: Value
    other: Value
    carry: Value = FALSE
    left: bool = False


class _Ripple:
    def __init__(
        self,
        sheet: Sheet,
        target: Sequence[Line],
        addend: Sequence[Value],
        subtract: bool,
        read: Sequence[Line] = (),
    ) -> None:
        self.sheet = sheet
        self.target = list(target)
        self.addend = list(addend)
        # A difference is the complement of the complement plus the subtrahend: no gate, only other literals.
        self.old = [value_of(line, subtract) for line in target]
        used = Counter(line_of(value) for value in addend if value > TRUE)
        self.shared = {line for line, times in used.items() if times > 1 or line in set(target)}
        self.shared.update(read)
        self.carries: list[Value] = [FALSE]
        self.stages: list[_Stage | None] = []

    def run(self, carried: int, use: Callable[[Value], None] | None, release: Release | None) -> None:
        """Carries for the first `carried` places, then what is made of the last one, and all the way back.

        With `use` the target is left as it was, otherwise it becomes the sum.
        """
        for place in range(carried):
            self._forward(place)
        if use is not None:
            use(self.carries[carried])
        else:
            self._sum(carried)
            if release is not None:
                release(carried)
        for place in range(carried - 1, -1, -1):
            self._backward(place)
            if use is None:
                self._sum(place)
                if release is not None:
                    release(place)

    def _forward(self, place: int) -> None:
        """The carry out of a place: the majority of both bits and the carry in."""
        one, other, carry = self.old[place], self.addend[place], self.carries[place]
        stage: _Stage | None = None
        if other == carry:
            found = carry
        elif other ^ carry == 1:
            found = one
        elif other <= TRUE or carry <= TRUE:
            constant = other if other <= TRUE else carry
            varying = carry if other <= TRUE else other
            stage = self._and(one ^ constant, varying ^ constant)
            found = value_of(stage.line, bool(constant))
        else:
            stage = self._tied(one, other, carry)
            found = value_of(stage.line, bool(carry & 1))
        self.stages.append(stage)
        self.carries.append(found)

    def _and(self, one: Value, other: Value) -> _Stage:
        (line,) = self.sheet.take()
        self.sheet.both(line, one, other)
        return _Stage(line, one, other)

    def _tied(self, one: Value, other: Value, carry: Value) -> _Stage:
        """carry ^ (one ^ carry) & (other ^ carry), the carry's own complement left to the value."""
        (line,) = self.sheet.take()
        flip = carry & 1
        left = not {line_of(one), line_of(other)} & self.shared
        stage = _Stage(line, one ^ flip, other ^ flip, carry & -2, left)
        self._tie(stage)
        self.sheet.both(line, stage.one, stage.other)
        self.sheet.xor(line, stage.carry)
        if not left:
            self._tie(stage)
        return stage

    def _tie(self, stage: _Stage) -> None:
        """XOR the carry to both operands, or take it away again."""
        self.sheet.xor(line_of(stage.one), stage.carry)
        self.sheet.xor(line_of(stage.other), stage.carry)

    def _backward(self, place: int) -> None:
        stage = self.stages[place]
        if stage is None:
            return
        if stage.carry != FALSE:
            if not stage.left:
                self._tie(stage)
            self.sheet.xor(stage.line, stage.carry)
        self.sheet.both(stage.line, stage.one, stage.other)
        if stage.carry != FALSE:
            self._tie(stage)
        self.sheet.give([stage.line])

    def _sum(self, place: int) -> None:
        for value in (self.addend[place], self.carries[place]):
            self.sheet.xor(self.target[place], value)
