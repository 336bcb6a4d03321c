"""Cubes coded in one word each, and the arithmetic of places in which codes differ.

Two bits an input (01 negated, 10 plain, 11 absent), above them the outputs the cube feeds. In this code the
third value of a place is the XOR of the other two, and the outputs count as one place with the same rule.
"""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
from numpy.typing import NDArray

from revsynth.logic.cubes import ExclusiveSum

Codes = NDArray[np.uint64]

MAX_CODE_BITS = 64
_LOW_BITS = 0x5555555555555555
_ONE = np.uint64(1)


def fits(inputs: int, outputs: int) -> bool:
    """Whether cubes of that many inputs and outputs can be coded in one word."""
    return 2 * inputs + outputs <= MAX_CODE_BITS


def encode(cubes: ExclusiveSum) -> Codes:
    """One code a cube; raises ValueError where 2 * inputs + outputs exceeds 64."""
    n = cubes.inputs
    if not fits(n, cubes.outputs):
        raise ValueError(f"{n} inputs and {cubes.outputs} outputs do not fit a 64-bit code")
    codes = cubes.feeds << np.uint64(2 * n) if n < 32 else np.zeros_like(cubes.feeds)
    for i in range(n):
        place = np.uint64(i)
        care = (cubes.care >> place) & np.uint64(1)
        value = (cubes.value >> place) & np.uint64(1)
        codes |= (np.uint64(3) ^ (care << (np.uint64(1) - value))) << np.uint64(2 * i)
    # absent 11; plain: 11 ^ 01 = 10; negated: 11 ^ 10 = 01
    return codes


def decode(codes: Codes, inputs: int, outputs: int) -> ExclusiveSum:
    """The inverse of `encode`."""
    care = np.zeros(len(codes), dtype=np.uint64)
    value = np.zeros(len(codes), dtype=np.uint64)
    for i in range(inputs):
        pair = (codes >> np.uint64(2 * i)) & np.uint64(3)
        care |= (pair != 3).astype(np.uint64) << np.uint64(i)
        value |= (pair == 2).astype(np.uint64) << np.uint64(i)
    return ExclusiveSum(inputs, outputs, care, value, codes >> np.uint64(2 * inputs))


class CodeSpace:
    """What codes over `inputs` inputs cost and where they differ. prices: by number of literals, 0 ... n."""

    def __init__(self, inputs: int, prices: Sequence[int]) -> None:
        self.inputs = inputs
        self._prices = np.asarray(prices, dtype=np.int64)
        self._low = np.uint64(_LOW_BITS & ((1 << 2 * inputs) - 1))
        self._shift = np.uint64(2 * inputs)

    def price(self, codes: Codes) -> NDArray[np.int64]:
        """The price of each code."""
        absent = np.bitwise_count(codes & (codes >> np.uint64(1)) & self._low)
        prices: NDArray[np.int64] = self._prices[self.inputs - absent.astype(np.int64)]
        return prices

    def places(self, x: Codes) -> Codes:
        """From a XOR of codes: ones at the low bits of differing places; bit 2n stands for the outputs."""
        outputs = (x >> self._shift != 0).astype(np.uint64) << self._shift
        places: Codes = ((x | (x >> _ONE)) & self._low) | outputs
        return places

    def whole(self, places: Codes) -> Codes:
        """All bits of the places whose low bits are set."""
        outputs = (np.uint64(0) - (places >> self._shift)) << self._shift
        return (places & self._low) * np.uint64(3) | outputs

    def third(self, a: Codes, b: Codes) -> Codes:
        """The code with the third value in the places in which a and b differ."""
        x = a ^ b
        whole = self.whole(self.places(x))
        return (a & ~whole) | (x & whole)
