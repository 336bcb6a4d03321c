"""Products and powers.

A product is a sum of the products of bits, added up together with whatever it is part of. In a square the
products of different bits come twice, so that half of them are built and they are taken by 2.
"""

from __future__ import annotations

from revsynth.elaborate.bitwise import select
from revsynth.elaborate.cases import by_cases, few_cases
from revsynth.elaborate.linear import add_literal, less, linear, plain, total
from revsynth.elaborate.numbers import Bits, Number, bounds_of, is_truth, within
from revsynth.elaborate.reach import Reach
from revsynth.logic.network import Literal
from revsynth.spec import arithmetic, bounds, refusals
from revsynth.spec.limits import MAX_BITS


def multiply(x: Number, y: Number, reach: Reach) -> Number:
    """x * y: one AND for each pair of bits, and those of the sum."""
    (xl, xh), (yl, yh) = bounds_of(x), bounds_of(y)
    corners = [p * q for p in (xl, xh) for q in (yl, yh)]
    lo, hi = min(corners), max(corners)
    if isinstance(x, int) or isinstance(y, int):
        number, factor = (y, x) if isinstance(x, int) else (x, y)
        assert isinstance(factor, int)
        return limited(linear(reach.builder, [(number, factor)], lo, hi), reach)
    left, right = plain(reach.builder, x), plain(reach.builder, y)
    if isinstance(left, int) or isinstance(right, int):
        return multiply(left, right, reach)
    if left == right:
        lo = max(lo, 0)
    reach.build.check_size(3 * len(left.literals) * len(right.literals))
    coefficients: dict[Literal, int] = {}
    constant = 0
    and_ = reach.builder.and_
    weights = _weighted(right)
    for one, weight in _weighted(left):
        for other, factor in weights:
            constant += add_literal(coefficients, and_(one, other), weight * factor)
    return limited(total(coefficients, constant, lo, hi), reach)


def _weighted(number: Bits) -> list[tuple[Literal, int]]:
    """The bits of a number with what they count; the sign counts negative."""
    found = [(literal, 1 << place) for place, literal in enumerate(number.literals)]
    if number.lo < 0:
        found[-1] = (found[-1][0], -found[-1][1])
    return found


def limited(number: Number, reach: Reach) -> Number:
    """The number; it is undefined where it has more than MAX_BITS bits."""
    lo, hi = bounds_of(number)
    most = 1 << MAX_BITS
    if -most < lo and hi < most:
        return number
    builder = reach.builder
    reach.build.check_size(8 * max(lo.bit_length(), hi.bit_length()))
    known = plain(builder, number)
    outside = builder.or_(less(builder, most - 1, known), less(builder, known, 1 - most))
    reach.fail(outside, refusals.TOO_LARGE, limit=MAX_BITS)
    return within(known, 1 - most, most - 1)


def power(x: Number, k: Number, reach: Reach) -> Number:
    """x ** k by repeated squaring; few cases are tabulated."""
    if few_cases(reach.builder, x, k):
        return by_cases(arithmetic.power, (x, k), reach)
    builder = reach.builder
    low, high = bounds_of(k)
    if low < 0:
        reach.fail(less(builder, k, 0), refusals.NEGATIVE_EXPONENT, count="...")
        k = select(builder, less(builder, k, 0), 0, k)
        low, high = bounds_of(k)
    if isinstance(k, int):
        return _power(x, min(int(k), MAX_BITS + 1 - ((MAX_BITS + 1 + int(k)) & 1)), reach)
    exponent = plain(builder, k)
    assert isinstance(exponent, Bits)
    result: Number = 1
    square = x
    for place, literal in enumerate(exponent.literals):
        if place:
            chosen = reach.narrow(_any_from(reach, exponent, place))
            if chosen is None:
                break
            square = _kept(multiply(square, square, chosen), reach)
        chosen = reach.narrow(literal)
        if chosen is not None:
            product = _kept(multiply(result, square, chosen), reach)
            result = select(builder, literal, product, result)
    lo, hi = bounds.power(bounds_of(x), (low, high))
    return within(plain(builder, result), lo, hi)


def _any_from(reach: Reach, exponent: Bits, place: int) -> Literal:
    """Where the exponent has a one at a place or above, so that the square is needed."""
    return reach.builder.any_of(exponent.literals[place:])


def _kept(number: Number, reach: Reach) -> Number:
    return plain(reach.builder, number)


def _power(x: Number, k: int, reach: Reach) -> Number:
    """x ** k for a constant exponent, from its highest bit on, so that no power beyond the last is made."""
    if k == 0:
        return 1
    if isinstance(x, int):
        return by_cases(arithmetic.power, (x, k), reach)
    if is_truth(x):
        return x
    result: Number = x
    for place in range(k.bit_length() - 2, -1, -1):
        result = multiply(_kept(result, reach), _kept(result, reach), reach)
        if k >> place & 1:
            result = multiply(_kept(result, reach), x, reach)
    if k % 2 == 0:
        return within(plain(reach.builder, result), 0, bounds.power(bounds_of(x), (k, k))[1])
    return result
