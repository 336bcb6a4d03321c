"""Operations bit by bit, and choices between numbers."""

from __future__ import annotations

from collections.abc import Callable

from revsynth.elaborate.linear import equal, less, linear, plain
from revsynth.elaborate.numbers import (
    Bits,
    Number,
    bounds_of,
    is_truth,
    pattern_of,
    settled,
    truth_number,
    width_for,
    within,
)
from revsynth.elaborate.reach import Reach
from revsynth.logic.network import FALSE, TRUE, Literal
from revsynth.logic.network_builder import NetworkBuilder
from revsynth.spec import bounds, refusals
from revsynth.spec.arithmetic import Width
from revsynth.spec.bounds import Interval


def truth(builder: NetworkBuilder, number: Number) -> Literal:
    """Where a number is not 0."""
    if isinstance(number, int):
        return TRUE if number else FALSE
    lo, hi = bounds_of(number)
    if lo > 0 or hi < 0:
        return TRUE
    if isinstance(number, Bits):
        return builder.any_of(number.literals)
    return equal(builder, number, 0) ^ 1


def select(builder: NetworkBuilder, condition: Literal, x: Number, y: Number) -> Number:
    """x where the condition holds, otherwise y: one AND a bit."""
    if condition <= TRUE or x is y:
        return x if condition else y
    left, right = plain(builder, x), plain(builder, y)
    lo, hi = bounds.union(bounds_of(left), bounds_of(right))
    width = _common_width(left, right)
    pairs = zip(pattern_of(left, width), pattern_of(right, width), strict=True)
    return settled([builder.mux(condition, one, other) for one, other in pairs], lo, hi)


def masked(builder: NetworkBuilder, number: Number, condition: Literal) -> Number:
    """The number where the condition holds, otherwise 0."""
    return select(builder, condition, number, 0)


def bit_and(builder: NetworkBuilder, x: Number, y: Number) -> Number:
    """x & y."""
    return _bit_by_bit(builder, builder.and_, bounds.bit_and, x, y)


def bit_or(builder: NetworkBuilder, x: Number, y: Number) -> Number:
    """x | y."""
    return _bit_by_bit(builder, builder.or_, bounds.bit_or, x, y)


def bit_xor(builder: NetworkBuilder, x: Number, y: Number) -> Number:
    """x ^ y."""
    return _bit_by_bit(builder, builder.xor, bounds.bit_xor, x, y)


def invert(builder: NetworkBuilder, x: Number) -> Number:
    """~x, which is -1 - x."""
    return linear(builder, [(x, -1)], *bounds.invert(bounds_of(x)), constant=-1)


def _common_width(x: int | Bits, y: int | Bits) -> int:
    """Bits that hold both numbers, in two's complement where one of them may be negative."""
    lo, hi = bounds.union(bounds_of(x), bounds_of(y))
    return width_for(lo, hi)


def _bit_by_bit(
    builder: NetworkBuilder,
    join: Callable[[Literal, Literal], Literal],
    interval_of: Callable[[Interval, Interval], Interval],
    x: Number,
    y: Number,
) -> Number:
    left, right = plain(builder, x), plain(builder, y)
    lo, hi = interval_of(bounds_of(left), bounds_of(right))
    width = _common_width(left, right)
    pairs = zip(pattern_of(left, width), pattern_of(right, width), strict=True)
    return settled([join(one, other) for one, other in pairs], lo, hi)


def smaller(builder: NetworkBuilder, x: Number, y: Number) -> Number:
    """min(x, y)."""
    return _picked(builder, x, y, 0)


def larger(builder: NetworkBuilder, x: Number, y: Number) -> Number:
    """max(x, y); it shares its ANDs with min(x, y)."""
    return _picked(builder, x, y, 1)


def _picked(builder: NetworkBuilder, x: Number, y: Number, which: int) -> Number:
    if isinstance(x, int) and isinstance(y, int):
        return max(int(x), int(y)) if which else min(int(x), int(y))
    x, y = plain(builder, x), plain(builder, y)
    pick = bounds.greatest if which else bounds.least
    lo, hi = pick(bounds_of(x), bounds_of(y))
    if is_truth(x) and is_truth(y):
        left, right = truth(builder, x), truth(builder, y)
        both = builder.and_(left, right)
        return truth_number(builder.xor(builder.xor(left, right), both) if which else both)
    below = less(builder, x, y)
    chosen = select(builder, below, y, x) if which else select(builder, below, x, y)
    return within(plain(builder, chosen), lo, hi)


def absolute(builder: NetworkBuilder, x: Number) -> Number:
    """abs(x): the bits exclusive-or the sign, plus the sign."""
    if isinstance(x, int):
        return abs(x)
    lo, hi = bounds_of(x)
    if lo >= 0:
        return x
    interval = bounds.absolute((lo, hi))
    if hi <= 0:
        return linear(builder, [(x, -1)], *interval)
    number = plain(builder, x)
    if isinstance(number, int) or number.lo >= 0:
        return absolute(builder, number)
    sign = number.literals[-1]
    flipped = [builder.xor(literal, sign) for literal in number.literals[:-1]]
    ones = settled(flipped, 0, (1 << len(flipped)) - 1)
    return linear(builder, [(ones, 1), (truth_number(sign), 1)], *interval)


def popcount(x: Number, width: Width | None, reach: Reach, name: str = "popcount") -> Number:
    """The number of ones: n - ones(n) ANDs once it is added up, where n is the number of bits."""
    literals = _ones(x, width, reach, name)
    ones: list[tuple[Number, int]] = [(truth_number(literal), 1) for literal in literals]
    return linear(reach.builder, ones, 0, len(literals))


def parity(x: Number, width: Width | None, reach: Reach) -> Number:
    """1 where popcount(x) is odd, else 0: no AND."""
    return truth_number(reach.builder.parity(_ones(x, width, reach, "parity")))


def _ones(x: Number, width: Width | None, reach: Reach, name: str) -> list[Literal]:
    number = plain(reach.builder, x)
    if width is not None:
        return pattern_of(number, width.bits)
    lo, hi = bounds_of(number)
    if lo < 0:
        value = "..."
        sign = TRUE if isinstance(number, int) else number.literals[-1]
        reach.fail(sign, refusals.NEGATIVE_POPCOUNT, name=name, value=value)
    return pattern_of(number, max(hi, 0).bit_length())
