"""Shifts by constants, which cost nothing, and by words: one selection a bit and a bit of the count."""

from __future__ import annotations

from revsynth.elaborate.bitwise import select, smaller
from revsynth.elaborate.division import shifted_down
from revsynth.elaborate.linear import less, linear, plain
from revsynth.elaborate.numbers import Bits, Number, bounds_of, within
from revsynth.elaborate.products import limited
from revsynth.elaborate.reach import Reach
from revsynth.logic.network import TRUE
from revsynth.spec import bounds, refusals
from revsynth.spec.limits import MAX_BITS


def left_shift(x: Number, n: Number, reach: Reach) -> Number:
    """x << n."""
    builder = reach.builder
    count = _count(n, reach)
    if count is None or bounds_of(x) == (0, 0):
        return 0
    if bounds_of(count)[1] > MAX_BITS + 1:
        count = plain(builder, smaller(builder, count, MAX_BITS + 1))
    reach.build.check_size(4 * bounds_of(count)[1])
    if isinstance(count, int):
        return limited(_scaled(x, count, reach), reach)
    result: Number = x
    for place, literal in enumerate(count.literals):
        result = plain(builder, select(builder, literal, _scaled(result, 1 << place, reach), result))
    low, high = bounds_of(x)
    span = [end << times for end in (low, high) for times in bounds_of(count)]
    return limited(within(plain(builder, result), min(span), max(span)), reach)


def _scaled(x: Number, places: int, reach: Reach) -> Number:
    lo, hi = bounds_of(x)
    return linear(reach.builder, [(x, 1 << places)], lo << places, hi << places)


def right_shift(x: Number, n: Number, reach: Reach) -> Number:
    """x >> n, rounded down."""
    builder = reach.builder
    count = _count(n, reach)
    if count is None:
        return 0
    known = plain(builder, x)
    enough = max(end.bit_length() for end in bounds_of(known)) + 1
    interval = bounds.right_shift(bounds_of(known), bounds_of(count))
    if bounds_of(count)[1] > enough:
        count = plain(builder, smaller(builder, count, enough))
    if isinstance(count, int):
        return shifted_down(builder, known, count)
    result: Number = known
    for place, literal in reversed(list(enumerate(count.literals))):
        result = select(builder, literal, shifted_down(builder, result, 1 << place), result)
    return within(plain(builder, result), *interval)


def _count(n: Number, reach: Reach) -> int | Bits | None:
    """A shift count, 0 where it fails because it is negative; None where it is negative everywhere."""
    builder = reach.builder
    lo, hi = bounds_of(n)
    if hi < 0:
        reach.fail(TRUE, refusals.NEGATIVE_SHIFT, count=n)
        return None
    known = plain(builder, n)
    if lo < 0:
        negative = less(builder, known, 0)
        reach.fail(negative, refusals.NEGATIVE_SHIFT, count="...")
        if isinstance(known, Bits) and known.lo < 0:
            # where it fails, any count will do: the pattern without its sign
            known = within(known, 0, hi)
    return known
