"""The cheapest exclusive sums of all functions of four inputs, and of any one of five, for any prices.

A function is its 16-bit truth table, input 0 the least significant bit. There are 81 cubes on four inputs,
and an exclusive sum uses each of them at most once, so one pass over the cubes as over the items of a
knapsack settles all 65,536 functions. With a price of 1 a cube: at most 6 cubes, 3.66 on average, as in T.
Sasao and P. Besslich, "On the complexity of mod-2 sum PLA's", IEEE Trans. Computers 39(2), 1990.
"""

from __future__ import annotations

from functools import lru_cache
from itertools import product

import numpy as np
from numpy.typing import NDArray

INPUTS = 4


def _cube_column(care: int, value: int) -> int:
    return sum(1 << x for x in range(16) if x & care == value)


def _all_cubes() -> tuple[tuple[int, int, int], ...]:
    cubes = []
    for codes in product((2, 0, 1), repeat=INPUTS):
        care = sum(1 << i for i, code in enumerate(codes) if code < 2)
        value = sum(1 << i for i, code in enumerate(codes) if code == 1)
        cubes.append((care, value, _cube_column(care, value)))
    return tuple(cubes)


CUBES = _all_cubes()
"""The 81 cubes as (care, value, truth table)."""
_COLUMNS = np.array([column for _, _, column in CUBES], dtype=np.uint16)


class FourInputSums:
    """Costs of all functions of four inputs, where a cube of k literals costs prices[k].

    cost: int64, shape (65536,), by truth table.
    """

    def __init__(self, prices: tuple[int, ...]) -> None:
        if len(prices) != INPUTS + 1 or not 0 < min(prices) <= max(prices) < 1 << 24:
            raise ValueError(f"five prices from 1 to {(1 << 24) - 1} are needed, not {prices}")
        self._weights = np.array([prices[care.bit_count()] for care, _, _ in CUBES], dtype=np.int64)
        index = np.arange(1 << 16, dtype=np.uint16)
        cost = np.full(1 << 16, 1 << 30, dtype=np.int32)
        cost[0] = 0
        for column, weight in zip(_COLUMNS, self._weights.tolist(), strict=True):
            np.minimum(cost, cost[index ^ column] + np.int32(weight), out=cost)
        self.cost: NDArray[np.int64] = cost.astype(np.int64)
        self._found: dict[int, tuple[tuple[int, int], ...]] = {}

    def cubes(self, function: int) -> tuple[tuple[int, int], ...]:
        """A cheapest exclusive sum as (care, value) pairs; the first cubes in the order of CUBES win ties."""
        known = self._found.get(function)
        if known is not None:
            return known
        found: list[tuple[int, int]] = []
        left = function
        while left:
            rest = self.cost[_COLUMNS ^ np.uint16(left)] + self._weights
            choice = int(np.flatnonzero(rest == self.cost[left])[0])
            found.append(CUBES[choice][:2])
            left ^= CUBES[choice][2]
        self._found[function] = tuple(found)
        return self._found[function]


@lru_cache(maxsize=16)
def four_input_sums(prices: tuple[int, ...]) -> FourInputSums:
    """The table for these prices, made once a process (about 10 ms)."""
    return FourInputSums(prices)


def five_input_cubes(function: int, prices: tuple[int, ...]) -> tuple[tuple[int, int], ...]:
    """A cheapest exclusive sum of a function of five inputs, a 32-bit truth table, as (care, value) pairs.

    prices: of cubes of 0 ... 5 literals. The cubes without the fifth input add up to some g; those with it
    negated or plain then add up to f0 + g and f1 + g (f0, f1: the halves of f), so trying every g is exact.
    """
    without, with_it = four_input_sums(prices[:5]), four_input_sums(prices[1:6])
    every = np.arange(1 << 16, dtype=np.uint16)
    low, high = np.uint16(function & 0xFFFF), np.uint16(function >> 16)
    cost = without.cost + with_it.cost[every ^ low] + with_it.cost[every ^ high]
    rest = int(cost.argmin())
    fifth = 1 << INPUTS
    return (
        *without.cubes(rest),
        *((care | fifth, value) for care, value in with_it.cubes(rest ^ int(low))),
        *((care | fifth, value | fifth) for care, value in with_it.cubes(rest ^ int(high))),
    )
