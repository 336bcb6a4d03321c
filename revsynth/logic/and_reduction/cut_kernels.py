"""The functions of `cut_steps`, compiled; used through `cut_mapping` alone.

The source is shared, so that small networks run it as plain Python without waiting for numba.
"""

from __future__ import annotations

from types import FunctionType, SimpleNamespace
from typing import Any

from numba import njit

from revsynth.logic.and_reduction import cut_steps

STEPS = (
    "anf_of",
    "ones_of",
    "more_than",
    "ands_of_four",
    "depends",
    "moved",
    "merge",
    "spread",
    "shrink",
    "five_key",
    "price_of",
    "contains",
    "store",
    "copy_cut",
    "insert",
    "supports",
    "cuts_of_gate",
    "enumerate_cuts",
    "choose_by_flow",
    "count_uses",
    "blend",
    "take",
    "release",
    "recover_area",
)
"""Callees before callers."""


def _compile() -> SimpleNamespace:
    """Compiled copies of the functions, whose globals hold compiled copies in turn."""
    space: dict[str, Any] = {name: value for name, value in vars(cut_steps).items() if not callable(value)}
    space["__name__"] = __name__
    for name in STEPS:
        copy = FunctionType(getattr(cut_steps, name).__code__, space, name)
        space[name] = njit(cache=True)(copy)
    return SimpleNamespace(**{name: space[name] for name in STEPS})


COMPILED = _compile()
"""The same names as in `cut_steps`."""
