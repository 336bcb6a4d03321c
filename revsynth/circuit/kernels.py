"""The compiled form of the depth pass; numba is imported when it is first asked for."""

from __future__ import annotations

from collections.abc import Callable
from functools import cache
from typing import Any

from revsynth.circuit.cost import longest_chain


@cache
def compiled_longest() -> Callable[..., Any]:
    """`cost.longest_chain` compiled, for arrays of the types that `cost.measure` makes."""
    from numba import njit

    compiled: Callable[..., Any] = njit(cache=True)(longest_chain)
    return compiled
