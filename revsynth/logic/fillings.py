"""Filling in the free values of small predicates so that they take the fewest ANDs."""

from __future__ import annotations

from typing import NamedTuple

import numpy as np

from revsynth.logic.affine_classes import MOST_INPUTS, and_counts
from revsynth.logic.function import Function

MOST_FREE = 16
"""All fillings are looked at: 65,536 take some hundredths of a second."""


class Filling(NamedTuple):
    """A complete table (bit x is the value at input x) and the fewest ANDs that it takes."""

    table: int
    ands: int


def free_inputs(function: Function, row: int = 0) -> list[int]:
    """The inputs at which an output bit is free; of at most 6 inputs."""
    care = int(function.care[row][0])
    return [x for x in range(1 << function.inputs) if not care >> x & 1]


def unfillable(function: Function) -> str | None:
    """Why `fewest_ands` cannot serve a function, None where it can."""
    if function.outputs != 1:
        return f"the fewest ANDs are known for one output bit, not {function.outputs}"
    if function.inputs > MOST_INPUTS:
        return f"the fewest ANDs are known up to {MOST_INPUTS} inputs, not {function.inputs}"
    free = len(free_inputs(function))
    if free > MOST_FREE:
        return f"{free} free inputs are too many to fill in in every way: at most {MOST_FREE}"
    return None


def fewest_ands(function: Function) -> Filling:
    """The first filling with the fewest ANDs, proved over all; ValueError where `unfillable` has a reason."""
    reason = unfillable(function)
    if reason is not None:
        raise ValueError(reason)
    tables = np.array([int(function.values[0][0])], dtype=np.uint32)
    for x in free_inputs(function):
        tables = np.concatenate([tables, tables | np.uint32(1 << x)])
    counts = and_counts(function.inputs, tables)
    best = int(np.argmin(counts))
    return Filling(int(tables[best]), int(counts[best]))
