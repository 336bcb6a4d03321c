"""Steps carried out on one input, with Python's own integers."""

from __future__ import annotations

from collections.abc import Sequence

from revsynth.errors import ExpressionError
from revsynth.spec.expression import Expression
from revsynth.spec.layout import decode, describe
from revsynth.spec.model import Spec
from revsynth.spec.reference import evaluate
from revsynth.spec.step_bits import Place
from revsynth.spec.steps import Step


def run_steps(spec: Spec, steps: Sequence[Step], index: int) -> int:
    """The combined index of what the steps make of an input.

    Raises ExpressionError naming the input where a step reaches an operation that is undefined.
    """
    state = index
    for step in steps:
        try:
            state = _carried_out(spec, step, state)
        except ExpressionError as error:
            if step.number == 1:
                raise
            before = f"{error.reason}; the steps before make this of {describe(spec.inputs, index)}"
            raise ExpressionError(before, source=error.source, place=error.place) from None
    return state


def _carried_out(spec: Spec, step: Step, state: int) -> int:
    def value(expression: Expression) -> int:
        return int(evaluate(expression, decode(spec.inputs, state)))

    if step.condition is not None and not value(step.condition):
        return state
    if step.other is not None:
        one, other = _pattern(state, step.target), _pattern(state, step.other)
        return _written(_written(state, step.target, other), step.other, one)
    operand = step.amount if step.operand is None else value(step.operand)
    return _written(state, step.target, _changed(step, _pattern(state, step.target), operand))


def _changed(step: Step, old: int, operand: int) -> int:
    """The new pattern, of which only the low bits count."""
    bits = step.target.bits
    if step.kind == "add":
        return old + operand
    if step.kind == "subtract":
        return old - operand
    if step.kind == "xor":
        return old ^ operand
    if step.kind == "shift":
        if abs(operand) >= bits:
            return old
        return old ^ (old << operand if operand > 0 else old >> -operand)
    if step.kind == "negate":
        return -old
    if step.kind == "invert":
        return ~old
    if step.kind == "multiply":
        return old * operand
    around = operand % bits
    return old << around | old >> (bits - around)


def _pattern(state: int, place: Place) -> int:
    return state >> place.first & ((1 << place.bits) - 1)


def _written(state: int, place: Place, pattern: int) -> int:
    mask = (1 << place.bits) - 1
    return state & ~(mask << place.first) | (pattern & mask) << place.first
