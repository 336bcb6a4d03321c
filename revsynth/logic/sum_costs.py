"""What exclusive sums of many functions will cost, all estimated at once without making them.

A function is split input by input as in `decomposition`: f is f0 + x f2, or f1 + x' f2, or x' f0 + x f1, the
cheapest way part by part, down to parts of four inputs, whose cost is exact. Several choices of the four are
tried. The estimate is the price of a sum that exists: exact up to four inputs, and from then on mostly some
fifths above what rewriting finds.
"""

from __future__ import annotations

from collections.abc import Sequence
from itertools import combinations, pairwise
from typing import Any

import numpy as np
from numpy.typing import NDArray

from revsynth.logic.four_inputs import INPUTS as LEAF_INPUTS
from revsynth.logic.four_inputs import four_input_sums

Words = NDArray[np.uint16]
"""Tables of functions, shape (..., max(1, 2**(inputs - 4))): input number x in bit x % 16 of word x // 16.
Functions of fewer than four inputs are repeated as if they had four."""

_HIGH = (0xAAAA, 0xCCCC, 0xF0F0, 0xFF00)
_TOGETHER = 256
"""Functions that are looked at together, so that what is made of them stays in the cache."""
_ALL_LEAVES = 6
"""Up to so many inputs every choice of four inputs for the exact parts is tried."""


def to_words(bits: NDArray[Any]) -> Words:
    """Pack tables, shape (..., 2**inputs), values 0 and 1, input 0 first."""
    size = bits.shape[-1]
    if size < 16:
        bits = np.tile(bits, (1,) * (bits.ndim - 1) + (16 // size,))
    packed = np.packbits(bits, axis=-1, bitorder="little")
    return packed.view(np.dtype("<u2")).astype(np.uint16, copy=False)


def to_bits(words: Words, inputs: int) -> NDArray[np.uint8]:
    """The inverse of `to_words`, shape (..., 2**inputs)."""
    octets = np.ascontiguousarray(words.astype(np.dtype("<u2"))).view(np.uint8)
    return np.unpackbits(octets, axis=-1, bitorder="little")[..., : 1 << inputs]


class SumCosts:
    """Estimates for functions of `inputs` inputs where a cube of k literals costs prices[k].

    leaves: how many choices of the four inputs of the exact parts are tried, beyond six inputs.
    Raises ValueError where there are not inputs + 1 prices.
    """

    def __init__(self, inputs: int, prices: Sequence[int], *, leaves: int = 8) -> None:
        if len(prices) != inputs + 1:
            raise ValueError(f"{inputs + 1} prices are needed, not {len(prices)}")
        self.inputs = inputs
        width = max(inputs, LEAF_INPUTS)
        dear = max(prices)
        padded = (*prices, *[dear] * (width - inputs))
        levels = width - LEAF_INPUTS
        self._tables = [
            four_input_sums(tuple(padded[extra : extra + LEAF_INPUTS + 1])).cost.astype(np.int32)
            for extra in range(levels + 1)
        ]
        self._swaps = _leaf_choices(width, leaves)

    def __call__(self, functions: Words) -> NDArray[np.int32]:
        """The estimate for each function, shape of `functions` without its last axis."""
        shape = functions.shape[:-1]
        # The functions side by side in memory: all further steps are on long runs of them.
        flat = np.ascontiguousarray(functions.reshape(-1, functions.shape[-1]).T)
        best = np.empty(flat.shape[1], dtype=np.int32)
        for start in range(0, flat.shape[1], _TOGETHER):
            some = flat[:, start : start + _TOGETHER]
            found = self._split(some)
            for swaps in self._swaps:
                other = some
                for low, high in swaps:
                    other = _swapped(other, low, high)
                np.minimum(found, self._split(other), out=found)
            best[start : start + _TOGETHER] = found
        return best.reshape(shape)

    def _split(self, functions: Words) -> NDArray[np.int32]:
        """The estimate with inputs 0 ... 3 in the exact parts. functions: shape (words, count)."""
        levels = len(self._tables) - 1
        parts = functions.reshape(*(2,) * levels, -1)
        for axis in range(levels):
            zero, one = np.split(parts, 2, axis=axis)
            parts = np.concatenate([zero, one, zero ^ one], axis=axis)
        costs = [table.take(parts) for table in self._tables]
        for _ in range(levels):
            costs = [
                np.minimum(with_x[0] + with_x[1], np.minimum(without[0], without[1]) + with_x[2])
                for without, with_x in pairwise(costs)
            ]
        return costs[0]


def _leaf_choices(width: int, most: int) -> list[list[tuple[int, int]]]:
    """Swaps of a low input (0 ... 3) with a high one that bring other inputs into the exact parts."""
    found: list[list[tuple[int, int]]] = []
    for chosen in combinations(range(width), LEAF_INPUTS):
        incoming = [i for i in chosen if i >= LEAF_INPUTS]
        outgoing = [i for i in range(LEAF_INPUTS) if i not in chosen]
        if incoming:
            found.append(list(zip(outgoing, incoming, strict=True)))
    if width <= _ALL_LEAVES or len(found) <= most:
        return found
    step = len(found) / most
    return [found[int((index + 0.5) * step)] for index in range(most)]


def _swapped(functions: Words, low: int, high: int) -> Words:
    """The functions, shape (words, count), with inputs `low` < 4 and `high` >= 4 exchanged."""
    words, count = functions.shape
    block = 1 << (high - LEAF_INPUTS)
    pairs = functions.reshape(words // (2 * block), 2, block, count)
    mask, shift = np.uint16(_HIGH[low]), np.uint16(1 << low)
    zero, one = pairs[:, 0], pairs[:, 1]
    swapped = np.empty_like(pairs)
    swapped[:, 0] = (zero & ~mask) | ((one & ~mask) << shift)
    swapped[:, 1] = (one & mask) | ((zero & mask) >> shift)
    return swapped.reshape(words, count)
