"""Quotients and remainders, rounded down as Python does.

By a constant, the remainder comes from a sum of the remainders of the powers of two, and the quotient from
an exact division, column by column from the lowest bit on; both cost about one AND for each bit added.
(T. Jebelean, An algorithm for exact division, Journal of Symbolic Computation, 1993.) By a word,
non-restoring division: one addition or subtraction a step, since an exclusive-or with the sign turns one into
the other at no cost. (A. W. Burks, H. H. Goldstine, J. von Neumann, Preliminary discussion of the logical
design of an electronic computing instrument, 1946.)
"""

from __future__ import annotations

from revsynth.elaborate.bitwise import select
from revsynth.elaborate.columns import Columns, signed_digits
from revsynth.elaborate.linear import add_literal, equal, less, linear, modulo_power, plain, total
from revsynth.elaborate.numbers import (
    Bits,
    Number,
    bounds_of,
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

_FEW_STEPS = 3
"""Quotients of up to so many bits are found by comparing and subtracting."""


def floor_divide(x: Number, y: Number, reach: Reach) -> Number:
    """x // y."""
    if isinstance(y, int):
        if y == 0:
            reach.fail(TRUE, refusals.DIVISION)
            return 0
        return _quotient_by(x, int(y), reach)
    divisor = _divisor(y, reach)
    if isinstance(divisor, int):
        return floor_divide(x, divisor, reach)
    return x if divisor is None else _divided(x, divisor, reach)[0]


def remainder(x: Number, y: Number, reach: Reach) -> Number:
    """x % y, with the sign of y."""
    if isinstance(y, int):
        if y == 0:
            reach.fail(TRUE, refusals.DIVISION)
            return 0
        return _remainder_by(x, int(y), reach)
    divisor = _divisor(y, reach)
    if isinstance(divisor, int):
        return remainder(x, divisor, reach)
    return 0 if divisor is None else _divided(x, divisor, reach)[1]


def _divisor(y: Number, reach: Reach) -> int | Bits | None:
    """The divisor, noting where it is 0; None where it is 1 or fails."""
    divisor = plain(reach.builder, y)
    lo, hi = bounds_of(divisor)
    if isinstance(divisor, Bits) and lo <= 0 <= hi:
        reach.fail(equal(reach.builder, divisor, 0), refusals.DIVISION)
    return None if (lo, hi) == (0, 1) else divisor


# --- by a constant ---


def _quotient_by(x: Number, divisor: int, reach: Reach) -> Number:
    builder = reach.builder
    if divisor < 0:
        negated = linear(builder, [(x, -1)], *bounds.negate(bounds_of(x)))
        return _quotient_by(negated, -divisor, reach)
    twos = (divisor & -divisor).bit_length() - 1
    x = shifted_down(builder, x, twos)
    odd = divisor >> twos
    lo, hi = bounds_of(x)
    if odd == 1 or lo // odd == hi // odd:
        return x if odd == 1 else lo // odd
    if (hi // odd - lo // odd).bit_length() <= _FEW_STEPS:
        return _by_steps(plain(builder, x), odd, reach)[0]
    rest = _remainder_by_odd(x, odd, reach)
    width = width_for(lo // odd, hi // odd)
    return settled(_exactly(builder, x, rest, odd, width), lo // odd, hi // odd)


def _exactly(builder: NetworkBuilder, x: Number, rest: Number, odd: int, width: int) -> list[Literal]:
    """The low bits of q where odd * q = x - rest.

    With t = ~x + rest = rest - x - 1, q is ~(t + (odd - 1) * q), and t + 1 + (odd + 1) * q: its bit i needs
    lower bits of q only, since the multiple of q is even. The one with fewer digits is taken.
    """
    down, up = signed_digits(odd - 1), signed_digits(odd + 1)
    flip = len(down) <= len(up)
    columns = Columns(builder, width, 0 if flip else 1)
    columns.add_word([literal ^ 1 for literal in pattern_of(plain(builder, x), width)])
    columns.add_word(pattern_of(plain(builder, rest), width))
    quotient: list[Literal] = []
    for place in range(width):
        bit = columns.bit(place) ^ flip
        quotient.append(bit)
        for digit, negative in down if flip else up:
            if negative:
                columns.subtract(bit, place + digit)
            else:
                columns.add(bit, place + digit)
    return quotient


def shifted_down(builder: NetworkBuilder, x: Number, places: int) -> Number:
    """x >> places for a constant count, rounded down."""
    if places == 0:
        return x
    if isinstance(x, int):
        return int(x) >> places
    known = plain(builder, x)
    lo, hi = bounds_of(known)
    if isinstance(known, int) or lo >> places == hi >> places:
        return lo >> places
    kept = known.literals[places:] or known.literals[-1:]  # at least the sign
    return settled(kept, lo >> places, hi >> places)


def _remainder_by(x: Number, divisor: int, reach: Reach) -> Number:
    builder = reach.builder
    if divisor < 0:
        negated = linear(builder, [(x, -1)], *bounds.negate(bounds_of(x)))
        rest = _remainder_by(negated, -divisor, reach)
        return linear(builder, [(rest, -1)], divisor + 1, 0)
    twos = (divisor & -divisor).bit_length() - 1
    odd = divisor >> twos
    if odd == 1:
        return modulo_power(builder, x, twos)
    lo, hi = bounds_of(x)
    if lo // divisor == hi // divisor:
        return linear(builder, [(x, 1)], lo % divisor, hi % divisor, -(lo // divisor) * divisor)
    if twos == 0:
        return _remainder_by_odd(x, odd, reach)
    low = modulo_power(builder, plain(builder, x), twos)
    high = _remainder_by_odd(shifted_down(builder, x, twos), odd, reach)
    return linear(builder, [(high, 1 << twos), (low, 1)], 0, divisor - 1)


def _remainder_by_odd(x: Number, odd: int, reach: Reach) -> Number:
    """x % odd: first the sum of each bit times the remainder of its weight, as long as that is shorter."""
    builder = reach.builder
    known = plain(builder, x)
    while not isinstance(known, int):
        folded = _folded(known, odd)
        span = known.hi - known.lo
        if bounds_of(folded)[1] - bounds_of(folded)[0] >= span >> 1:
            break
        direct = max(span // odd, 1).bit_length() * 2 * odd.bit_length()
        if _digits(known, odd) >= direct:
            break
        known = plain(builder, folded)
    if isinstance(known, int):
        return known % odd
    return _by_steps(known, odd, reach)[1]


def _residue(weight: int, odd: int) -> int:
    """What a weight leaves, between -odd / 2 and odd / 2."""
    rest = weight % odd
    return rest if 2 * rest < odd else rest - odd


def _weights(number: Bits, odd: int) -> list[tuple[Literal, int]]:
    last = len(number.literals) - 1 if number.lo < 0 else -1
    return [
        (literal, _residue(-(1 << place) if place == last else 1 << place, odd))
        for place, literal in enumerate(number.literals)
    ]


def _digits(number: Bits, odd: int) -> int:
    return sum(len(signed_digits(weight)) for _, weight in _weights(number, odd))


def _folded(number: Bits, odd: int) -> Number:
    """A number that leaves the same remainder."""
    coefficients: dict[Literal, int] = {}
    constant = sum(add_literal(coefficients, literal, weight) for literal, weight in _weights(number, odd))
    size = sum(map(abs, coefficients.values()))
    return total(coefficients, constant % odd, constant % odd - size, constant % odd + size)


def _by_steps(x: int | Bits, divisor: int, reach: Reach) -> tuple[Number, Number]:
    """Quotient and remainder by comparing with, and subtracting, divisor * 2**i for descending i."""
    builder = reach.builder
    lo, hi = bounds_of(x)
    base = lo // divisor
    rest = linear(builder, [(x, 1)], lo - base * divisor, hi - base * divisor, -base * divisor)
    terms: list[tuple[Number, int]] = []
    for step in range(max(hi // divisor - base, 0).bit_length() - 1, -1, -1):
        part = divisor << step
        high = bounds_of(rest)[1]
        if high < part:
            continue
        rest = plain(builder, rest)
        taken = less(builder, rest, part) ^ 1
        terms.append((truth_number(taken), 1 << step))
        most = max(high - part, part - 1)
        rest = linear(builder, [(rest, 1), (truth_number(taken), -part)], 0, most)
    lo, hi = lo // divisor, hi // divisor
    return linear(builder, terms, lo, hi, base), within(plain(builder, rest), 0, divisor - 1)


# --- by a word ---


def _divided(x: Number, divisor: Bits, reach: Reach) -> tuple[Number, Number]:
    """Quotient and remainder by a divisor that is not 0, of any sign."""
    builder = reach.builder
    known = plain(builder, x)
    quotients = bounds.floor_divide(bounds_of(known), bounds_of(divisor))
    rests = bounds.remainder(bounds_of(known), bounds_of(divisor))
    flip = divisor.literals[-1] if divisor.lo < 0 else FALSE
    size = within(_signed_by(builder, divisor, flip), *bounds.absolute(bounds_of(divisor)))
    dividend = _signed_by(builder, known, flip)
    lo, hi = bounds_of(dividend)
    sign = pattern_of(dividend, width_for(lo, hi))[-1] if lo < 0 else FALSE
    # x // y is ~(~x // y) for x < 0 < y, and x % y is y - 1 - ~x % y
    most = max(hi, ~lo)
    width = most.bit_length()
    upward = [builder.xor(literal, sign) for literal in pattern_of(dividend, width)]
    places, rest = _steps(builder, upward, size)
    quotient = settled([builder.xor(bit, sign) for bit in [*places, FALSE]], *_around(most, sign))
    if sign == FALSE:
        left: Number = rest
    else:
        other = linear(builder, [(size, 1), (rest, -1)], 0, bounds_of(size)[1], -1)
        left = select(builder, sign, other, rest)
    if flip != FALSE:
        negated = linear(builder, [(left, -1)], *bounds.negate(bounds_of(left)))
        left = select(builder, flip, negated, left)
    return within(plain(builder, quotient), *quotients), within(plain(builder, left), *rests)


def _around(most: int, sign: Literal) -> tuple[int, int]:
    return (0, most) if sign == FALSE else (~most, most)


def _signed_by(builder: NetworkBuilder, number: int | Bits, flip: Literal) -> int | Bits:
    """The number, or its negative where `flip` holds."""
    if flip == FALSE:
        return number
    negated = linear(builder, [(number, -1)], *bounds.negate(bounds_of(number)))
    return plain(builder, select(builder, flip, negated, number))


def _steps(
    builder: NetworkBuilder, dividend: list[Literal], divisor: int | Bits
) -> tuple[list[Literal], int | Bits]:
    """The bits of the quotient, lowest first, and the remainder, of unsigned numbers; divisor > 0.

    The partial remainder r lies in -divisor ... divisor - 1, held modulo 2**(m + 1) where the divisor has m
    bits; each step makes it 2 r + bit - divisor where r >= 0, else 2 r + bit + divisor.
    """
    size = max(bounds_of(divisor)[1], 1).bit_length()
    word = pattern_of(divisor, size)
    downward = dividend[::-1]
    quotient, known = _first_steps(builder, downward, word)
    rest = known + [FALSE] * (size + 1 - len(known))
    for bit in downward[len(quotient) :]:
        upward = rest[-1] ^ 1
        columns = Columns(builder, size + 1)
        columns.add_word([bit, *rest[:size]])
        columns.add_word([builder.xor(literal, upward) for literal in word])
        columns.add(upward, size)
        columns.add(upward, 0)
        rest = columns.bits()
        quotient.append(rest[-1] ^ 1)
    columns = Columns(builder, size)
    columns.add_word(rest[:size])
    columns.add_word([builder.and_(literal, rest[-1]) for literal in word])
    left = settled(columns.bits(), 0, max(bounds_of(divisor)[1] - 1, 0))
    return quotient[::-1], left


def _first_steps(
    builder: NetworkBuilder, downward: list[Literal], word: list[Literal]
) -> tuple[list[Literal], list[Literal]]:
    """The first bits of the quotient, highest first, and what remains of the dividend so far, never negative.

    After k steps there are k bits to compare with the divisor, which is greater where it has higher bits: at
    most 2 k ANDs a step and one for those, while k is small.
    """
    size = len(word)
    steps = max(min((size - 1) // 2, len(downward)), 0)
    above = [FALSE] * (steps + 1)
    if steps:
        above[steps] = builder.any_of(word[steps:])
        for place in range(steps - 1, 0, -1):
            above[place] = builder.or_(above[place + 1], word[place])
    quotient: list[Literal] = []
    rest: list[Literal] = []
    for step in range(1, steps + 1):
        rest = [downward[step - 1], *rest]
        columns = Columns(builder, step + 1)
        columns.add_word(rest)
        for place, literal in enumerate(word[:step]):
            columns.subtract(literal, place)
        less = columns.bits()
        fits = builder.and_(less[-1] ^ 1, above[step] ^ 1)
        rest = [builder.mux(fits, one, other) for one, other in zip(less, rest, strict=False)]
        quotient.append(fits)
    return quotient, rest
