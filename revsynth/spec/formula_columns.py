"""The column of a formula: its postfix steps run on packed columns, a block of inputs at a time."""

from __future__ import annotations

from collections.abc import Sequence
from typing import TypeAlias

import numpy as np
from numpy.typing import NDArray

from revsynth.logic.truth_table import ALL_ONES, Column, last_word_mask, variable, words_for
from revsynth.spec.formula import Formula, Step

_STACK_BYTES = 1 << 25
_BLOCK_INPUTS = 18

_Value: TypeAlias = "NDArray[np.uint64] | np.uint64"
"""The values at the inputs of a block, packed; one word where they are all the same."""


def evaluate_formula(formula: Formula) -> Column:
    """The column of a formula over all 2**inputs inputs.

    Works in blocks of inputs, smaller where the formula needs many values at once: memory stays near
    32 MB besides the result whatever the formula.
    """
    inside = min(formula.inputs, _BLOCK_INPUTS)
    depth = _deepest(formula.steps)
    while inside > 6 and depth * words_for(inside) * 8 > _STACK_BYTES:
        inside -= 1
    block = words_for(inside)
    result = np.empty(words_for(formula.inputs), dtype=np.uint64)
    used = {step.argument for step in formula.steps if step.name == "bit"}
    columns: dict[int, _Value] = {index: variable(inside, index) for index in sorted(used) if index < inside}
    for number in range(1 << (formula.inputs - inside)):
        for index in used:
            if index >= inside:
                columns[index] = ALL_ONES if number >> (index - inside) & 1 else np.uint64(0)
        result[number * block : (number + 1) * block] = _run(formula.steps, columns)
    return result & last_word_mask(formula.inputs)


def _deepest(steps: Sequence[Step]) -> int:
    """The most values that lie on the stack at once."""
    here = deepest = 0
    for step in steps:
        here += 1 if step.name in ("bit", "const") else 1 - step.argument
        deepest = max(deepest, here)
    return deepest


def _run(steps: Sequence[Step], columns: dict[int, _Value]) -> _Value:
    stack: list[_Value] = []
    for step in steps:
        if step.name == "bit":
            stack.append(columns[step.argument])
        elif step.name == "const":
            stack.append(ALL_ONES if step.argument else np.uint64(0))
        else:
            operands = stack[len(stack) - step.argument :]
            del stack[len(stack) - step.argument :]
            stack.append(_apply(step.name, operands))
    return stack[0]


def _apply(name: str, values: list[_Value]) -> _Value:
    first = values[0]
    if name in ("~", "not", "Not"):
        return ~first
    if name == "ITE":
        return (first & values[1]) | (~first & values[2])
    if name == "=>":
        return ~first | values[1]
    if name in ("==", "<=>"):
        return ~(first ^ values[1])
    if name == "Majority":
        return _more_than_half(values)
    if name in ("OneHot", "OneHot0"):
        return _one_hot(values, at_most=name == "OneHot0")
    result = first
    for value in values[1:]:
        if name in ("&", "and", "And"):
            result = result & value
        elif name in ("|", "or", "Or"):
            result = result | value
        else:
            result = result ^ value
    return result


def _one_hot(values: list[_Value], *, at_most: bool) -> _Value:
    once: _Value = np.uint64(0)
    twice: _Value = np.uint64(0)
    for value in values:
        twice = twice | (once & value)
        once = once | value
    return ~twice if at_most else once & ~twice


def _more_than_half(values: list[_Value]) -> _Value:
    """Count bit-sliced, then compare with half the number of values."""
    counter: list[_Value] = [np.uint64(0)] * len(values).bit_length()
    for value in values:
        carry = value
        for index, digit in enumerate(counter):
            counter[index], carry = digit ^ carry, digit & carry
    half = len(values) // 2
    more: _Value = np.uint64(0)
    equal: _Value = ALL_ONES
    for index in reversed(range(len(counter))):
        if half >> index & 1:
            equal = equal & counter[index]
        else:
            more = more | (equal & counter[index])
            equal = equal & ~counter[index]
    return more
