"""Errors that the caller can mend; each owns the exit status of the command line.

Every message is one line that names the file, the place and what would be right.
"""

from __future__ import annotations


class RevsynthError(Exception):
    """Root of all errors that come from input, options or budgets, not from a defect."""

    exit_status = 2


class SpecError(RevsynthError, ValueError):
    """A spec that cannot be understood: bad TOML, an unknown key, a wrong table length."""

    def __init__(self, message: str, *, source: str = "", place: str = "") -> None:
        self.source = source
        self.place = place
        self.reason = message
        super().__init__(": ".join(part for part in (source, place, message) if part))


class ExpressionError(SpecError):
    """An expression or formula that is not allowed, or that fails for an input of the domain.

    `index` is the combined index of such an input, where it is known.
    """

    index: int | None = None


class CircuitFileError(RevsynthError, ValueError):
    """An OpenQASM file that the reader refuses, by line and column (both from 1)."""

    def __init__(self, message: str, *, source: str = "", line: int = 0, column: int = 0) -> None:
        self.source = source
        self.line = line
        self.column = column
        self.reason = message
        place = f"line {line}, column {column}" if line else ""
        super().__init__(": ".join(part for part in (source, place, message) if part))


class UsageError(RevsynthError, ValueError):
    """Options that are out of range or do not go together."""


class BudgetError(RevsynthError):
    """Nothing fits the qubit, T or depth budget; the message says what was needed."""

    exit_status = 1


class UndecidedError(RevsynthError):
    """Verification could not finish, so nothing may be called right or wrong."""

    exit_status = 3
