"""pow(x, k, m): repeated squaring, reduced after every product."""

from __future__ import annotations

from math import lcm

from revsynth.elaborate.bitwise import absolute, select
from revsynth.elaborate.cases import MOST_BITS, by_cases, few_cases
from revsynth.elaborate.division import remainder
from revsynth.elaborate.linear import equal, less, plain
from revsynth.elaborate.numbers import Bits, Number, bounds_of, within
from revsynth.elaborate.products import multiply
from revsynth.elaborate.reach import Reach
from revsynth.errors import SpecError
from revsynth.logic.network import TRUE
from revsynth.spec import arithmetic, bounds, refusals

_MOST_TRIALS = 1 << 20
"""Trial divisors for the order of the group that inverses are found in."""


def power_modulo(x: Number, k: Number, m: Number, reach: Reach) -> Number:
    """pow(x, k, m); a negative k takes the inverse of x modulo m.

    Raises SpecError for a negative exponent where the modulus is a wide word or hard to factor.
    """
    if few_cases(reach.builder, x, k, m):
        return by_cases(arithmetic.power_modulo, (x, k, m), reach)
    builder = reach.builder
    lo, hi = bounds_of(m)
    if lo <= 0 <= hi:
        reach.fail(TRUE if isinstance(m, int) else equal(builder, m, 0), refusals.MODULUS)
    interval = bounds.power_modulo((lo, hi))
    size = absolute(builder, m)
    if size == 0 or interval == (0, 0):
        return 0
    base = plain(builder, remainder(x, size, reach))
    if bounds_of(k)[0] < 0:
        negative = less(builder, k, 0)
        inside = reach.narrow(negative)
        assert inside is not None
        base = plain(builder, select(builder, negative, _inverse(base, size, inside), base))
        k = absolute(builder, k)
    result = _squared(base, plain(builder, k), size, reach)
    return within(plain(builder, remainder(result, m, reach)), *interval)


def _squared(base: Number, k: int | Bits, size: Number, reach: Reach) -> Number:
    builder = reach.builder
    if isinstance(k, int):
        result: Number = 1
        for digit in f"{k:b}" if k else "":
            result = _times(result, result, size, reach)
            if digit == "1":
                result = _times(result, base, size, reach)
        return remainder(result, size, reach)
    result = remainder(1, size, reach)
    for literal in reversed(k.literals):
        result = _times(result, result, size, reach)
        result = plain(builder, select(builder, literal, _times(result, base, size, reach), result))
    return result


def _times(x: Number, y: Number, size: Number, reach: Reach) -> Number:
    product = multiply(plain(reach.builder, x), plain(reach.builder, y), reach)
    return plain(reach.builder, remainder(product, size, reach))


def _inverse(x: int | Bits, size: Number, reach: Reach) -> Number:
    """The inverse of x modulo a constant: the power to one less than the exponent of the group."""
    if not isinstance(size, int):
        raise _too_wide(
            reach, f"a modulus and numbers of more than {MOST_BITS} bits that depend on the input"
        )
    exponent = group_exponent(size)
    if exponent is None:
        raise _too_wide(reach, f"a modulus of {size.bit_length()} bits that has large factors")
    inverse = _squared(x, exponent - 1, size, reach)
    wrong = equal(reach.builder, _times(x, inverse, size, reach), 1 % size) ^ 1
    reach.fail(wrong, refusals.NO_INVERSE, base="...", modulus=size)
    return inverse


def _too_wide(reach: Reach, what: str) -> SpecError:
    return SpecError(
        f"pow() with a negative exponent and {what} is not built: an exponent of 0 or more is wanted",
        source=reach.build.source,
        place=reach.build.place,
    )


def group_exponent(modulus: int) -> int | None:
    """The least e > 0 with x**e = 1 for all x that have an inverse (R. D. Carmichael, 1910).

    None where the modulus has two or more large prime factors.
    """
    result, rest = 1, modulus
    twos = (rest & -rest).bit_length() - 1
    rest >>= twos
    if twos:
        result = 1 if twos == 1 else 2 if twos == 2 else 1 << (twos - 2)
    factor = 3
    while factor * factor <= rest:
        if factor > _MOST_TRIALS:
            return None
        order = 1
        while rest % factor == 0:
            rest //= factor
            order *= factor
        if order > 1:
            result = lcm(result, order // factor * (factor - 1))
        factor += 2
    return lcm(result, rest - 1) if rest > 1 else result
