"""Settling output bits that are free beside fixed ones, so that no output value occurs too often."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from revsynth.embed.in_place import tables
from revsynth.embed.multiplicity import most_frequent, shared_out
from revsynth.logic.function import Function
from revsynth.logic.truth_table import pack, pack_values


def wholly_fixed(function: Function, most: int) -> Function:
    """The function with the free bits of half-free values settled; values that are wholly free stay so.

    No value is given to more than `most` inputs. `most` must be at least what `output_multiplicity` gives;
    ValueError where it is too small. Free bits become 0 where that does it.
    """
    if np.array_equal(
        np.bitwise_or.reduce(function.care, axis=0), np.bitwise_and.reduce(function.care, axis=0)
    ):
        return function
    values, care = tables(function)
    full = (1 << function.outputs) - 1
    cared = care != 0
    if np.any(cared & (care != full)) and most_frequent(values[cared], function.outputs) > most:
        values = _spread(values, care, full, most)
    fixed = pack(cared.astype(np.uint8))
    rows = np.broadcast_to(fixed, function.values.shape).copy()
    return Function(
        function.inputs, function.outputs, pack_values(values, function.outputs) & rows, rows, function.domain
    )


def _spread(values: NDArray[np.int64], care: NDArray[np.int64], full: int, most: int) -> NDArray[np.int64]:
    """Values with every group of equal half-free ones shared out over their completions."""
    values = values.copy()
    cared = np.flatnonzero(care)
    pairs, owner = np.unique(np.stack([care[cared], values[cared]]), axis=1, return_inverse=True)
    counts = np.bincount(owner.ravel(), minlength=pairs.shape[1])
    order = np.argsort(owner.ravel(), kind="stable")
    ends = np.cumsum(counts)
    groups = [
        (int(count), full & ~int(mask), int(value))
        for mask, value, count in zip(pairs[0], pairs[1], counts, strict=True)
    ]
    for (count, _, _), end, shares in zip(groups, ends, shared_out(groups, most), strict=True):
        rows = cared[order[end - count : end]]
        values[rows] = np.repeat(list(shares), list(shares.values()))
    return values
