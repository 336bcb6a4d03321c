"""How the kernels of the compiled engine are compiled: cached on disk, and without counting references.

Counting references to two arrays that outlive every call would take more time than the work itself; so these
kernels must not make arrays. The first use on a machine compiles them, some ten seconds once.
"""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

from numba import njit


def kernel(function: Callable[..., Any]) -> Callable[..., Any]:
    """Compile a function at its first call; the global interpreter lock is not held while it runs."""
    options: dict[str, Any] = {"cache": True, "nogil": True, "_nrt": False}
    compiled: Callable[..., Any] = njit(**options)(function)
    return compiled
