"""Sums with coefficients, added up only when it is known what is asked of them.

A sum compared with another one needs its sign only, an equality may assume in every carry that the bits below
are as they should be, and a sum of sums is added up at once.
"""

from __future__ import annotations

from collections.abc import Iterable
from math import gcd

from revsynth.elaborate.columns import Columns
from revsynth.elaborate.numbers import Bits, Number, Sum, bounds_of, settled, width_for
from revsynth.logic.network import FALSE, TRUE, Literal
from revsynth.logic.network_builder import NetworkBuilder
from revsynth.spec.bounds import Interval

Term = tuple[Number, int]
"""A number and the factor that it is taken by."""


def linear(builder: NetworkBuilder, terms: Iterable[Term], lo: int, hi: int, constant: int = 0) -> Number:
    """The sum of numbers times factors, between lo and hi."""
    coefficients: dict[Literal, int] = {}
    for number, factor in terms:
        constant += gather(builder, coefficients, number, factor)
    return total(coefficients, constant, lo, hi)


def total(coefficients: dict[Literal, int], constant: int, lo: int, hi: int) -> Number:
    """The sum that gathered coefficients stand for, between lo and hi."""
    lo, hi = _within(coefficients, constant, lo, hi)
    return lo if lo >= hi else Sum(coefficients, constant, lo, hi)


def _within(coefficients: dict[Literal, int], constant: int, lo: int, hi: int) -> Interval:
    """The part of a range that a sum can reach."""
    least = greatest = constant
    for coefficient in coefficients.values():
        if coefficient < 0:
            least += coefficient
        else:
            greatest += coefficient
    return max(lo, least), min(hi, greatest)


def gather(builder: NetworkBuilder, into: dict[Literal, int], number: Number, factor: int) -> int:
    """Add a number times a factor to coefficients; returns what it adds to the constant."""
    if isinstance(number, Sum):
        if number.modulo is None and number.bits is None:
            for literal, coefficient in number.coefficients.items():
                _add(into, literal, coefficient * factor)
            return number.constant * factor
        number = plain(builder, number)
    if isinstance(number, int):
        return number * factor
    constant, weight = 0, factor
    last = len(number.literals) - 1 if number.lo < 0 else -1
    for place, literal in enumerate(number.literals):
        if place == last:
            weight = -weight
        constant += add_literal(into, literal, weight)
        weight *= 2
    return constant


def add_literal(into: dict[Literal, int], literal: Literal, coefficient: int) -> int:
    """Add coefficient * literal to coefficients; returns what it adds to the constant."""
    if literal <= TRUE:
        return coefficient * literal
    if literal & 1:
        _add(into, literal ^ 1, -coefficient)
        return coefficient
    _add(into, literal, coefficient)
    return 0


def _add(into: dict[Literal, int], literal: Literal, coefficient: int) -> None:
    found = into.get(literal, 0) + coefficient
    if found:
        into[literal] = found
    else:
        into.pop(literal, None)


def plain(builder: NetworkBuilder, number: Number) -> int | Bits:
    """The number with its bits: a sum is added up."""
    if not isinstance(number, Sum):
        return number
    if number.bits is None:
        width = width_for(number.lo, number.hi) if number.modulo is None else number.modulo
        columns = _columns(builder, number.coefficients, number.constant, width)
        number.bits = settled(columns.bits(), number.lo, number.hi)
    return number.bits


def modulo_power(builder: NetworkBuilder, number: Number, bits: int) -> Number:
    """number % 2**bits, not added up yet where it is a sum."""
    if isinstance(number, int):
        return number & ((1 << bits) - 1)
    lo, hi = bounds_of(number)
    if lo >> bits == hi >> bits == 0:
        return number
    if isinstance(number, Bits):
        fill = [number.literals[-1] if number.lo < 0 else FALSE] * (bits - len(number.literals))
        return settled([*number.literals[:bits], *fill], 0, (1 << bits) - 1)
    if number.bits is not None:
        return modulo_power(builder, number.bits, bits)
    if number.modulo is not None and number.modulo < bits:
        return number
    return Sum(number.coefficients, number.constant, 0, (1 << bits) - 1, bits)


def equal(builder: NetworkBuilder, x: Number, y: Number) -> Literal:
    """Where x == y."""
    (xl, xh), (yl, yh) = bounds_of(x), bounds_of(y)
    if xh < yl or yh < xl:
        return FALSE
    modulo = _common_modulo(x, y)
    coefficients: dict[Literal, int] = {}
    if modulo is None:
        constant = gather(builder, coefficients, x, 1) + gather(builder, coefficients, y, -1)
        lo, hi = _within(coefficients, constant, xl - yh, xh - yl)
        if not lo <= 0 <= hi:
            return FALSE
        return _is_zero(builder, coefficients, constant, max(hi, -lo).bit_length())
    constant = _gather_raw(builder, coefficients, x, 1) + _gather_raw(builder, coefficients, y, -1)
    columns = _columns(builder, coefficients, constant, modulo)
    return _all_zero(columns)


def _common_modulo(x: Number, y: Number) -> int | None:
    """The bits of a modular equality: x and y are equal where they are modulo 2**bits."""
    found = None
    for one, other in ((x, y), (y, x)):
        if isinstance(one, Sum) and one.modulo is not None and one.bits is None:
            lo, hi = bounds_of(other)
            if lo >= 0 and hi >> one.modulo == 0 and found in (None, one.modulo):
                found = one.modulo
            else:
                return None
    return found


def _gather_raw(builder: NetworkBuilder, into: dict[Literal, int], number: Number, factor: int) -> int:
    """As `gather`, for a sum whose modulus is that of the whole."""
    if isinstance(number, Sum) and number.modulo is not None and number.bits is None:
        number = Sum(number.coefficients, number.constant, number.lo, number.hi)
    return gather(builder, into, number, factor)


def _is_zero(builder: NetworkBuilder, coefficients: dict[Literal, int], constant: int, width: int) -> Literal:
    """Where a sum whose size is below 2**width is 0."""
    divisor = gcd(*coefficients.values())
    if divisor == 0:
        return FALSE if constant else TRUE
    if constant % divisor:
        return FALSE
    scaled = {literal: coefficient // divisor for literal, coefficient in coefficients.items()}
    return _all_zero(_columns(builder, scaled, constant // divisor, max(width - divisor.bit_length() + 1, 1)))


def _all_zero(columns: Columns) -> Literal:
    conditions = []
    for place in range(columns.width):
        conditions.append(columns.zero(place))
        if conditions[-1] == FALSE:
            return FALSE
    return columns.builder.all_of(conditions)


def less(builder: NetworkBuilder, x: Number, y: Number) -> Literal:
    """Where x < y."""
    (xl, xh), (yl, yh) = bounds_of(x), bounds_of(y)
    if xh < yl:
        return TRUE
    if xl >= yh:
        return FALSE
    coefficients: dict[Literal, int] = {}
    constant = gather(builder, coefficients, x, 1) + gather(builder, coefficients, y, -1)
    lo, hi = _within(coefficients, constant, xl - yh, xh - yl)
    if hi < 0 or lo >= 0:
        return TRUE if hi < 0 else FALSE
    divisor = gcd(*coefficients.values())
    if divisor > 1:  # g * s + c < 0 where s + floor(c / g) < 0
        coefficients = {literal: one // divisor for literal, one in coefficients.items()}
        rounded = constant // divisor
        lo, hi = rounded - (constant - lo) // divisor, rounded + (hi - constant) // divisor
        constant = rounded
    return _columns(builder, coefficients, constant, width_for(lo, max(hi, 0))).bits()[-1]


def _columns(builder: NetworkBuilder, coefficients: dict[Literal, int], constant: int, width: int) -> Columns:
    columns = Columns(builder, width, constant)
    half, whole = 1 << max(width - 1, 0), 1 << width
    for literal, coefficient in coefficients.items():
        if not -half <= coefficient <= half:
            coefficient = (coefficient + half) % whole - half
        columns.add_multiple(literal, coefficient)
    return columns
