"""From a condition or a classical subroutine to a verified reversible circuit.

The names below are loaded when they are first used, so that importing the package costs nothing.
"""

from __future__ import annotations

from importlib import import_module
from typing import TYPE_CHECKING, Any

from revsynth.errors import BudgetError, RevsynthError, UndecidedError

if TYPE_CHECKING:
    from revsynth.api import (
        Build,
        Verdict,
        build,
        cost,
        draw,
        inspect,
        outputs,
        permutation,
        predicate,
        read_spec,
        truth_table,
        verify,
    )

__version__ = "0.1.0"

__all__ = [
    "BudgetError",
    "Build",
    "RevsynthError",
    "UndecidedError",
    "Verdict",
    "build",
    "cost",
    "draw",
    "inspect",
    "outputs",
    "permutation",
    "predicate",
    "read_spec",
    "truth_table",
    "verify",
]


def __getattr__(name: str) -> Any:
    if name in __all__:
        return getattr(import_module("revsynth.api"), name)
    raise AttributeError(f"module 'revsynth' has no attribute {name!r}")


def __dir__() -> list[str]:
    return sorted({*globals(), *__all__})
