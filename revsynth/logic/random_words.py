"""Reproducible random words for searches, the same on every platform and cheap to import."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray


class Random:
    """Reproducible random words (S. Vigna's splitmix64 sequence), the same on every platform."""

    def __init__(self, seed: int) -> None:
        self._state = np.uint64(seed & (1 << 64) - 1)

    def words(self, count: int) -> NDArray[np.uint64]:
        """`count` random 64-bit words."""
        steps = np.arange(1, count + 1, dtype=np.uint64) * np.uint64(0x9E3779B97F4A7C15)
        z = self._state + steps
        if count:
            self._state = z[-1]
        z = (z ^ (z >> np.uint64(30))) * np.uint64(0xBF58476D1CE4E5B9)
        z = (z ^ (z >> np.uint64(27))) * np.uint64(0x94D049BB133111EB)
        return z ^ (z >> np.uint64(31))

    def fractions(self, count: int) -> NDArray[np.float64]:
        """`count` numbers in (0, 1]."""
        return ((self.words(count) >> np.uint64(11)).astype(np.float64) + 1.0) / float(1 << 53)
