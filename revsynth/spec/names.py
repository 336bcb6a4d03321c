"""Names: which functions expressions have, and what words, constants and loop variables may be called."""

from __future__ import annotations

import keyword
import re

from revsynth.errors import SpecError
from revsynth.spec.formula import FUNCTIONS as FORMULA_FUNCTIONS

FUNCTIONS: dict[str, tuple[int, int | None]] = {
    "abs": (1, 1),
    "all": (1, 1),
    "any": (1, 1),
    "distinct": (1, None),
    "len": (1, 1),
    "max": (1, None),
    "min": (1, None),
    "parity": (1, 1),
    "popcount": (1, 1),
    "pow": (2, 3),
    "range": (1, 3),
    "sum": (1, 2),
}
"""The functions of expressions: fewest and most arguments (None: no limit)."""

STEP_FUNCTIONS = ("rotate",)
TAKEN = frozenset((*FUNCTIONS, *FORMULA_FUNCTIONS, *STEP_FUNCTIONS))
"""Names that words, constants and loop variables may not have, besides Python's keywords."""

MAX_LENGTH = 64
"""Characters of a name; registers may get an element number and underscores on top."""
_NAME = re.compile(r"[A-Za-z][A-Za-z0-9_]*", re.ASCII)


def why_not_a_name(name: str) -> str | None:
    """Say in words why `name` cannot name a word, constant or loop variable; None where it can."""
    if not isinstance(name, str) or not _NAME.fullmatch(name):
        return "names are ASCII letters, digits and underscores, a letter first"
    if len(name) > MAX_LENGTH:
        return f"it has {len(name)} characters, and {MAX_LENGTH} are allowed"
    if keyword.iskeyword(name):
        return "it is a Python keyword; choose another name"
    if name in TAKEN:
        return "it is a function of expressions or formulas; choose another name"
    return None


def check_name(name: str, *, source: str = "", place: str = "") -> None:
    """Accept the name of a word or constant, or raise SpecError saying what would be right."""
    why = why_not_a_name(name)
    if why is not None:
        raise SpecError(f"{_shortened(name)!r} cannot be a name: {why}", source=source, place=place)


def _shortened(name: object) -> object:
    return f"{name[:30]}..." if isinstance(name, str) and len(name) > MAX_LENGTH else name
