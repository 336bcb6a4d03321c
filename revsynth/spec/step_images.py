"""Steps carried out on all inputs at once: the image of every input."""

from __future__ import annotations

from typing import Any

import numpy as np
from numpy.typing import NDArray

from revsynth.errors import ExpressionError
from revsynth.spec.expression import Expression
from revsynth.spec.over_domain import OverDomain
from revsynth.spec.step_bits import Place
from revsynth.spec.step_reference import run_steps
from revsynth.spec.steps import Step, parse_steps
from revsynth.spec.vector import evaluate_with_warnings

_LANES = NDArray[np.int64]


def stepped_images(texts: tuple[str, ...], over: OverDomain) -> tuple[NDArray[np.int32], NDArray[np.bool_]]:
    """Images by combined index, and where they are fixed (inside the domain), both of shape (2**n,).

    Raises SpecError for what is no step, ExpressionError naming an input of the domain at which a step
    reaches an operation that is undefined. Takes time and memory proportional to 2**n a step.
    """
    steps = parse_steps(over.spec, texts)
    size = 1 << over.inputs
    inside = np.ones(size, dtype=bool) if over.needed is None else over.needed
    inputs = np.flatnonzero(inside)
    lanes = _Lanes(over, steps, inputs)
    for step in steps:
        lanes.carry_out(step)
    images = np.zeros(size, dtype=np.int32)
    images[inputs] = lanes.states
    return images, inside


class _Lanes:
    """What the steps so far have made of every input of the domain."""

    def __init__(self, over: OverDomain, steps: tuple[Step, ...], inputs: NDArray[np.int64]) -> None:
        self.over = over
        self.steps = steps
        self.inputs = inputs
        self.states: _LANES = inputs.astype(np.int64)

    def carry_out(self, step: Step) -> None:
        """One step, in the lanes in which its condition holds."""
        chosen: NDArray[Any] = np.arange(len(self.states))
        if step.condition is not None:
            holds = self._values(step, step.condition, self.states)
            chosen = np.flatnonzero(holds != 0)
        before = self.states[chosen]
        if step.other is not None:
            one, other = _patterns(before, step.target), _patterns(before, step.other)
            self.states[chosen] = _written(_written(before, step.target, other), step.other, one)
            return
        bits = step.target.bits
        operand: Any = step.amount
        if step.operand is not None:
            wide = self._values(step, step.operand, before)
            operand = (wide % bits if step.kind == "rotate" else wide & ((1 << bits) - 1)).astype(np.int64)
        changed = _changed(step, _patterns(before, step.target), operand)
        self.states[chosen] = _written(before, step.target, changed)

    def _values(self, step: Step, expression: Expression, states: _LANES) -> NDArray[Any]:
        """The values of an expression in these states, all different; int64 or object."""
        if not len(states):
            return np.zeros(0, dtype=np.int64)
        self.over.check_memory(expression, step.place)
        needed = np.zeros(1 << self.over.inputs, dtype=bool)
        needed[states] = True
        try:
            values, warnings = evaluate_with_warnings(expression, None if needed.all() else needed)
        except ExpressionError as error:
            at = self.inputs[np.flatnonzero(self.states == error.index)]
            if len(at):
                run_steps(self.over.spec, self.steps, int(at[0]))
            raise
        self.over.warnings.extend(warnings)
        found = values[states]
        return found.astype(np.int64) if found.dtype == np.bool_ else found


def _changed(step: Step, old: _LANES, operand: Any) -> _LANES:
    """New patterns, of which only the low bits count; patterns have up to 24 bits."""
    bits, new = step.target.bits, old
    if step.kind in ("add", "subtract"):
        new = old + operand if step.kind == "add" else old - operand
    elif step.kind == "xor":
        new = np.bitwise_xor(old, operand)
    elif step.kind == "shift" and abs(operand) < bits:
        new = old ^ (old << operand if operand > 0 else old >> -operand)
    elif step.kind in ("negate", "invert"):
        new = -old if step.kind == "negate" else ~old
    elif step.kind == "multiply":
        new = old * operand
    elif step.kind == "rotate":
        new = np.left_shift(old, operand) | np.right_shift(old, bits - operand)
    return new


def _patterns(states: _LANES, place: Place) -> _LANES:
    found: _LANES = states >> place.first & ((1 << place.bits) - 1)
    return found


def _written(states: _LANES, place: Place, patterns: _LANES) -> _LANES:
    mask = (1 << place.bits) - 1
    written: _LANES = states & ~(mask << place.first) | (patterns & mask) << place.first
    return written
