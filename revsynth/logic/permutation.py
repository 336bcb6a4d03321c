"""Facts about a permutation of 0 ... 2^n - 1 given as an array of images."""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

COMPILED_FROM = 1 << 18
"""Longer permutations are walked by a compiled loop."""


@dataclass(frozen=True)
class CycleStructure:
    """How many cycles of each length, ascending (length, count); fixed points are cycles of length 1."""

    cycles: tuple[tuple[int, int], ...]

    @property
    def fixed_points(self) -> int:
        """Elements that stay where they are."""
        return dict(self.cycles).get(1, 0)

    @property
    def odd(self) -> bool:
        """Whether it is a product of an odd number of swaps of two elements (common practice)."""
        return sum((length - 1) * count for length, count in self.cycles) % 2 == 1

    @property
    def order(self) -> int:
        """How many repetitions give the identity: the least common multiple of the lengths."""
        return math.lcm(*(length for length, _ in self.cycles))


def is_permutation(images: NDArray[np.int64]) -> bool:
    """Whether every number below the length occurs once."""
    size = len(images)
    if size == 0 or images.min() < 0 or images.max() >= size:
        return False
    seen = np.zeros(size, dtype=bool)
    seen[images] = True
    return bool(seen.all())


def cycle_structure(images: NDArray[np.int64]) -> CycleStructure:
    """The cycles of a permutation; raises ValueError where it is none. O(2^n)."""
    if not is_permutation(images):
        raise ValueError("the images are not a permutation: each number below the length must occur once")
    if len(images) >= COMPILED_FROM:
        from revsynth.logic.kernels import cycle_lengths

        lengths = cycle_lengths(np.ascontiguousarray(images, dtype=np.int64))
        found, counts = np.unique(lengths, return_counts=True)
        return CycleStructure(tuple(zip(found.tolist(), counts.tolist(), strict=True)))
    return CycleStructure(_walk(images.tolist()))


def _walk(images: list[int]) -> tuple[tuple[int, int], ...]:
    counts: dict[int, int] = {}
    seen = bytearray(len(images))
    for start in range(len(images)):
        if seen[start]:
            continue
        length, at = 0, start
        while not seen[at]:
            seen[at] = 1
            at = images[at]
            length += 1
        counts[length] = counts.get(length, 0) + 1
    return tuple(sorted(counts.items()))
