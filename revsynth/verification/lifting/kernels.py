"""Compiled loops over graphs."""

from __future__ import annotations

from functools import cache
from typing import Any


def fill(is_xor: Any, left: Any, right: Any, first: int, values: Any) -> None:
    """The rows of `values` (uint64) from `first` on, gate by gate; left and right are literals without
    complement."""
    words = values.shape[1]
    for gate in range(is_xor.shape[0]):
        a = left[gate] >> 1
        b = right[gate] >> 1
        place = gate + first
        if is_xor[gate]:
            for word in range(words):
                values[place, word] = values[a, word] ^ values[b, word]
        else:
            for word in range(words):
                values[place, word] = values[a, word] & values[b, word]


@cache
def compiled_fill() -> Any:
    """`fill`, compiled."""
    from numba import njit

    return njit(cache=True)(fill)
