"""Values of an expression while it is elaborated: numbers, and lists whose items may depend on the input."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any, TypeAlias

from revsynth.elaborate.numbers import Bits, Number, Sum
from revsynth.logic.network import Literal


@dataclass(frozen=True, slots=True)
class Items:
    """A list whose items depend on the input; item i is there only where the literal `present[i]` is 1."""

    values: tuple[Value, ...]
    present: tuple[Literal, ...]


@dataclass(frozen=True, slots=True)
class Stepped:
    """A range(...) that depends on the input: start, start + step, ...; `length` is 0 or more."""

    start: Number
    step: Number
    length: Number


Listing: TypeAlias = "list[Any] | tuple[Any, ...] | range | Items | Stepped"
Value: TypeAlias = "Number | Listing"


def is_number(value: Value) -> bool:
    """True for a number, False for a list."""
    return isinstance(value, int | Bits | Sum)


def as_number(value: Value) -> Number:
    """A value that the parser has found to be a number."""
    assert isinstance(value, int | Bits | Sum)
    return value
