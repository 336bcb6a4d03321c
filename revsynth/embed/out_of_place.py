"""Embedding out of place: (x, y) to (x, y XOR f(x)) on inputs and outputs side by side."""

from __future__ import annotations

import numpy as np

from revsynth.embed.in_place import tables
from revsynth.embed.target import MAX_LINES, ReversibleTarget
from revsynth.logic.function import Function


def embed_xor(function: Function) -> ReversibleTarget:
    """The target of a `bit` block: inputs on lines 0 ... n-1, outputs on n ... n+m-1.

    Free values of f are taken as 0: f must be one and the same for every y. Raises ValueError above 20 lines.
    """
    values, _ = tables(function)
    lines = _checked_lines(function)
    state = np.arange(1 << lines, dtype=np.int64)
    image = state ^ (values[state & ((1 << function.inputs) - 1)] << function.inputs)
    return ReversibleTarget(lines, np.full(1 << lines, (1 << lines) - 1, dtype=np.int64), image)


def embed_fresh(function: Function) -> ReversibleTarget:
    """The target of a `fresh` block: only states with y = 0 matter; inputs stay, free values are free."""
    values, care = tables(function)
    lines = _checked_lines(function)
    index = np.arange(1 << function.inputs, dtype=np.int64)
    fixed = np.zeros(1 << lines, dtype=np.int64)
    image = np.zeros(1 << lines, dtype=np.int64)
    fixed[index] = (care << function.inputs) | ((1 << function.inputs) - 1)
    image[index] = (values << function.inputs) | index
    return ReversibleTarget(lines, fixed, image)


def _checked_lines(function: Function) -> int:
    lines = function.inputs + function.outputs
    if lines > MAX_LINES:
        raise ValueError(f"{lines} lines are too many for a table of all states: at most {MAX_LINES}")
    return lines
