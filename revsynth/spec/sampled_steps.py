"""Steps carried out at many chosen inputs at once: bits as packed columns, expressions in exact integers.

Column i holds bit i of the combined index, 64 inputs a word. Sums ripple from bit to bit, a word at a time.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from typing import Any

import numpy as np
from numpy.typing import NDArray

from revsynth.spec.expression import Expression
from revsynth.spec.model import Spec
from revsynth.spec.step_bits import Place
from revsynth.spec.steps import Step, parse_steps

Words = NDArray[np.uint64]
Masks = NDArray[np.bool_]
Evaluate = Callable[[Expression, Words, Masks], NDArray[Any]]
"""The values of an expression where the words' bits are these columns and the mask holds; any elsewhere."""

_EVERY = np.uint64(0xFFFF_FFFF_FFFF_FFFF)


class SampledSteps:
    """The steps of one spec."""

    def __init__(self, spec: Spec, texts: Sequence[str], evaluate: Evaluate) -> None:
        self.steps = parse_steps(spec, texts)
        self._evaluate = evaluate

    @property
    def expressions(self) -> list[Expression]:
        """All that is evaluated."""
        pairs = [(step.condition, step.operand) for step in self.steps]
        return [one for pair in pairs for one in pair if one is not None]

    @property
    def cost(self) -> int:
        """About what the columns take an input, in units of 1/4 ns."""
        total = 0
        for step in self.steps:
            rounds = step.amount.bit_count() if step.kind == "multiply" else 1
            total += 2 * rounds * step.target.bits
        return total

    def columns(self, inputs: Words, inside: Masks) -> Words:
        """The columns after all steps; where `inside` does not hold they mean nothing."""
        state = inputs.copy()
        for step in self.steps:
            self._carry_out(step, state, inside)
        return state

    def _carry_out(self, step: Step, state: Words, inside: Masks) -> None:
        where, holds = np.full(state.shape[1], _EVERY), inside
        if step.condition is not None:
            holds = np.asarray(self._evaluate(step.condition, state, inside) != 0) & inside
            where = packed(holds[None, :])[0]
        before = _part(state, step.target)
        if step.other is not None:
            other = _part(state, step.other)
            _write(state, step.target, other, where)
            _write(state, step.other, before, where)
            return
        operand: NDArray[Any] | None = None
        if step.operand is not None:
            operand = self._evaluate(step.operand, state, holds)
        _write(state, step.target, _changed(step, before, operand), where)


def _changed(step: Step, old: Words, operand: NDArray[Any] | None) -> Words:
    size = len(old)
    if step.kind == "invert":
        return ~old
    if step.kind == "negate":
        return _sum(~old, np.zeros_like(old), _EVERY)
    if step.kind == "shift":
        return old ^ _shifted(old, step.amount)
    if step.kind == "multiply":
        total = np.zeros_like(old)
        for place in range(size):
            if step.amount >> place & 1:
                total = _sum(total, _shifted(old, place), np.uint64(0))
        return total
    if step.kind == "rotate":
        return _rotated(old, step.amount, operand)
    assert operand is not None
    other = low_columns(operand, size)
    if step.kind == "xor":
        return old ^ other
    if step.kind == "subtract":
        return _sum(old, ~other, _EVERY)
    return _sum(old, other, np.uint64(0))


def _sum(one: Words, other: Words, carry: np.uint64) -> Words:
    """The sum of two numbers and a carry in, the carry out dropped."""
    found = np.empty_like(one)
    carried: Words = np.full(one.shape[1], carry)
    for place in range(len(one)):
        half = one[place] ^ other[place]
        found[place] = half ^ carried
        carried = (one[place] & other[place]) | (half & carried)
    return found


def _shifted(old: Words, amount: int) -> Words:
    """old << amount, or old >> -amount; zeros come in."""
    found = np.zeros_like(old)
    if 0 <= amount < len(old):
        found[amount:] = old[: len(old) - amount]
    elif -len(old) < amount < 0:
        found[:amount] = old[-amount:]
    return found


def _rotated(old: Words, amount: int, operand: NDArray[Any] | None) -> Words:
    size = len(old)
    if size == 1:
        return old
    if operand is None:
        return np.roll(old, amount, axis=0)
    around = (operand % size).astype(np.int64)
    for place, by in enumerate(low_columns(around, (size - 1).bit_length())):
        moved = np.roll(old, 1 << place, axis=0)
        old = (moved & by) | (old & ~by)
    return old


def low_columns(numbers: NDArray[Any], bits: int) -> Words:
    """The low bits of numbers, two's complement, as packed columns."""
    if numbers.dtype == object:
        size = -(-bits // 8)
        mask = (1 << bits) - 1
        raw = b"".join((number & mask).to_bytes(size, "little") for number in numbers.tolist())
        octets = np.frombuffer(raw, dtype=np.uint8).reshape(len(numbers), size)
        return packed(np.unpackbits(octets, axis=1, bitorder="little")[:, :bits].T.astype(np.bool_))
    plain = numbers.astype(np.int64)
    return packed(np.array([plain >> min(place, 63) & 1 for place in range(bits)], dtype=np.bool_))


def packed(rows: Masks) -> Words:
    """Rows of Booleans, a multiple of 64 long, as packed words."""
    return np.ascontiguousarray(np.packbits(rows, axis=1, bitorder="little")).view("<u8").astype(np.uint64)


def _part(state: Words, place: Place) -> Words:
    return state[place.first : place.first + place.bits].copy()


def _write(state: Words, place: Place, new: Words, where: Words) -> None:
    old = state[place.first : place.first + place.bits]
    old ^= (old ^ new) & where
