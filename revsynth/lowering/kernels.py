"""The compiled form of the pass that cancels neighbours; numba is imported when it is first asked for."""

from __future__ import annotations

from collections.abc import Callable
from functools import cache
from typing import Any

from revsynth.lowering.cancel import sweep


@cache
def compiled_sweep() -> Callable[..., Any]:
    """`cancel.sweep` compiled, for arrays of the types that `cancel_neighbours` makes."""
    from numba import njit

    compiled: Callable[..., Any] = njit(cache=True)(sweep)
    return compiled
