"""Steps of a reversible block in gates: the bits after all steps, as functions of the bits before.

Textbook forms, independent of how blocks are built. A product with a constant is a chain of products with
1 + 2**k or 1 - 2**k, which every odd number has modulo 2**bits.
"""

from __future__ import annotations

from collections.abc import Sequence

from revsynth.spec.expression import Expression
from revsynth.spec.model import Spec, Word
from revsynth.spec.step_bits import Place
from revsynth.spec.steps import Step, parse_steps
from revsynth.verification.translation.gates import FALSE, TRUE, Bit, Gates, choose
from revsynth.verification.translation.lists import Items, Value
from revsynth.verification.translation.numbers import Arithmetic, Number, constant
from revsynth.verification.translation.walk import Walk


def stepped_bits(spec: Spec, texts: Sequence[str], gates: Gates, inputs: Sequence[Bit]) -> list[Bit]:
    """The bits of the combined index after the steps, bit 0 first."""
    state = _State(spec, gates, inputs)
    for step in parse_steps(spec, texts):
        state.carry_out(step)
    return state.bits


def word_values(words: Sequence[Word], inputs: Sequence[Bit]) -> dict[str, Value]:
    """The words as numbers of bits, arrays as lists of such."""
    found: dict[str, Value] = {}
    place = 0
    for word in words:
        numbers: list[Value] = []
        for _ in word.elements():
            bits = tuple(inputs[place : place + word.bits])
            numbers.append(bits if word.signed else (*bits, FALSE))
            place += word.bits
        found[word.name] = numbers[0] if word.count is None else Items.of(numbers)
    return found


class _State:
    """The bits after the steps so far."""

    def __init__(self, spec: Spec, gates: Gates, inputs: Sequence[Bit]) -> None:
        self.spec = spec
        self.gates = gates
        self.numbers = Arithmetic(gates)
        self.bits = list(inputs)

    def carry_out(self, step: Step) -> None:
        condition = TRUE
        if step.condition is not None:
            condition = self.numbers.nonzero(self._value(step.condition))
        before = self._pattern(step.target)
        if step.other is not None:
            other = self._pattern(step.other)
            self._write(step.target, condition, other)
            self._write(step.other, condition, before)
        else:
            self._write(step.target, condition, self._changed(step, before))

    def _changed(self, step: Step, old: list[Bit]) -> list[Bit]:
        size = len(old)
        if step.kind == "rotate":
            return self._rotated(step, old)
        if step.kind == "multiply":
            return self._multiplied(old, step.amount)
        if step.kind == "invert":
            return [bit ^ 1 for bit in old]
        if step.kind == "negate":
            return self._low(self.numbers.negate(_unsigned(old)), size)
        if step.kind == "shift":
            return self._each_differs(old, _shifted(old, step.amount))
        assert step.operand is not None
        operand = self._low(self._value(step.operand), size)
        if step.kind == "xor":
            return self._each_differs(old, operand)
        return self._sum(old, operand, step.kind == "subtract")

    def _sum(self, old: list[Bit], operand: list[Bit], subtract: bool) -> list[Bit]:
        one, other = _unsigned(old), _unsigned(operand)
        found = self.numbers.subtract(one, other) if subtract else self.numbers.add(one, other)
        return self._low(found, len(old))

    def _each_differs(self, old: list[Bit], other: list[Bit]) -> list[Bit]:
        return [self.gates.differ(x, y) for x, y in zip(old, other, strict=True)]

    def _rotated(self, step: Step, old: list[Bit]) -> list[Bit]:
        """Bit 0 moves to bit k: for every bit of k around by its weight, modulo the width."""
        size = len(old)
        amount = constant(step.amount) if step.operand is None else self._value(step.operand)
        for place, bit in enumerate(amount):
            weight = -(1 << place) if place == len(amount) - 1 else 1 << place
            moved = [old[(target - weight) % size] for target in range(size)]
            old = [choose(self.gates, bit, after, before) for after, before in zip(moved, old, strict=True)]
        return old

    def _multiplied(self, old: list[Bit], factor: int) -> list[Bit]:
        negative, sign, shifts = factor_chain(factor, len(old))
        if negative:
            old = self._low(self.numbers.negate(_unsigned(old)), len(old))
        for shift in shifts:
            old = self._sum(old, _shifted(old, shift), sign < 0)
        return old

    def _value(self, expression: Expression) -> Number:
        words = word_values(self.spec.inputs, self.bits)
        return Walk(expression, self.gates, words).result()

    def _low(self, number: Number, size: int) -> list[Bit]:
        return list(self.numbers.extended(number, size)[:size])

    def _pattern(self, place: Place) -> list[Bit]:
        return self.bits[place.first : place.first + place.bits]

    def _write(self, place: Place, condition: Bit, new: Sequence[Bit]) -> None:
        old = self._pattern(place)
        self.bits[place.first : place.first + place.bits] = [
            choose(self.gates, condition, after, before) for after, before in zip(new, old, strict=True)
        ]


def _unsigned(bits: Sequence[Bit]) -> Number:
    return (*bits, FALSE)


def _shifted(bits: Sequence[Bit], amount: int) -> list[Bit]:
    """bits << amount (>> -amount), zeros coming in."""
    size = len(bits)
    places = range(-amount, size - amount)
    return [bits[place] if 0 <= place < size else FALSE for place in places]


def factor_chain(factor: int, bits: int) -> tuple[bool, int, list[int]]:
    """(whether to negate, the sign t, shifts k) with factor = (+-1) * product of 1 + t * 2**k, mod 2**bits.

    Dividing by 1 + t * 2**k where bit k is the lowest one above bit 0 clears it, so shifts ascend and each
    comes once. Of both signs, and of negating or not, the chain with the least work is taken.
    """
    modulus = 1 << bits
    best: tuple[int, bool, int, list[int]] | None = None
    for negative in (False, True):
        for sign in (1, -1):
            rest = (-factor if negative else factor) % modulus
            shifts: list[int] = []
            for shift in range(1, bits):
                if rest >> shift & 1:
                    term = 1 + sign * (1 << shift)
                    if abs(term) == 1:
                        break
                    shifts.append(shift)
                    rest = rest * pow(term, -1, modulus) % modulus
            if rest == 1 or bits == 1:
                work = sum(max(bits - shift - 1, 0) for shift in shifts) + (bits - 2 if negative else 0)
                if best is None or work < best[0]:
                    best = (work, negative, sign, shifts)
    assert best is not None
    return best[1:]
