"""Numbers whose bits are literals of a network, with the range of the values that they can have.

What does not depend on the input is a plain Python integer. The range of a number holds wherever the number
is reached and defined; elsewhere its bits mean nothing. Bit 0 is the least significant.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, field
from typing import TypeAlias

from revsynth.logic.network import FALSE, TRUE, Literal
from revsynth.spec.bounds import Interval


@dataclass(frozen=True, slots=True)
class Bits:
    """A number by its bits: unsigned, or two's complement with the sign last where `lo` is negative."""

    literals: tuple[Literal, ...]
    lo: int
    hi: int


@dataclass(slots=True, eq=False)
class Sum:
    """A sum that is not added up yet: constant + coefficient * bit for each bit, exactly or modulo 2**modulo.

    The bits are uncomplemented literals. `bits` holds the number once it is added up.
    """

    coefficients: dict[Literal, int]
    constant: int
    lo: int
    hi: int
    modulo: int | None = None
    bits: int | Bits | None = field(default=None, repr=False)


Number: TypeAlias = "int | Bits | Sum"


def bounds_of(number: Number) -> Interval:
    """Least and greatest value."""
    return (int(number), int(number)) if isinstance(number, int) else (number.lo, number.hi)


def width_for(lo: int, hi: int) -> int:
    """Bits of a number between lo and hi: unsigned where lo >= 0, otherwise two's complement."""
    return max(end.bit_length() if end >= 0 else (~end).bit_length() for end in (lo, hi)) + (lo < 0)


def truth_number(literal: Literal) -> int | Bits:
    """A truth value as the number 0 or 1."""
    return literal if literal <= TRUE else Bits((literal,), 0, 1)


def is_truth(number: Number) -> bool:
    """Whether a number is 0 or 1, by its range."""
    lo, hi = bounds_of(number)
    return lo >= 0 and hi <= 1


def settled(literals: Sequence[Literal], lo: int, hi: int) -> int | Bits:
    """The number of a bit pattern with values between lo and hi, cut to as few bits as its range needs.

    The pattern is two's complement where lo is negative, otherwise unsigned. Constant bits narrow the range.
    """
    if lo >= hi:
        return lo
    pattern = list(literals[: width_for(lo, hi)])
    if lo < 0:
        while len(pattern) > 1 and pattern[-1] == pattern[-2]:
            pattern.pop()
        if pattern and pattern[-1] == FALSE:
            lo = 0
    if lo >= 0:
        while pattern and pattern[-1] == FALSE:
            pattern.pop()
    least = greatest = 0
    for place, literal in enumerate(pattern):
        weight = 1 << place
        if lo < 0 and place == len(pattern) - 1:
            weight = -weight
        if literal == TRUE:
            least, greatest = least + weight, greatest + weight
        elif literal != FALSE:
            least, greatest = least + min(weight, 0), greatest + max(weight, 0)
    lo, hi = max(lo, least), min(hi, greatest)
    return lo if lo >= hi else Bits(tuple(pattern), lo, hi)


def within(number: int | Bits, lo: int, hi: int) -> int | Bits:
    """The same number where it is known to lie between lo and hi too."""
    if isinstance(number, int):
        return number
    lo, hi = max(lo, number.lo), min(hi, number.hi)
    return settled(number.literals[:-1] if number.lo < 0 <= lo else number.literals, lo, hi)


def pattern_of(number: int | Bits, width: int) -> list[Literal]:
    """The low `width` bits of the two's complement pattern, extended by the sign where it is shorter."""
    if isinstance(number, int):
        return [number >> place & 1 for place in range(width)]
    literals = list(number.literals[:width])
    fill = number.literals[-1] if number.lo < 0 else FALSE
    return literals + [fill] * (width - len(literals))
