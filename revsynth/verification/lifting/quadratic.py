"""Sums of phases over few parities, solved case by case: quotients, products of two, and what is left.

Parities are masks over a basis x; a product of two parities is a *plane*. A quadratic form over GF(2) is a
sum of planes, half as many as the rank of its alternating matrix (common practice; Dickson, "Linear Groups",
1901).
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import lru_cache
from itertools import product

Terms = tuple[tuple[int, int], ...]
Plane = tuple[int, int]
"""A product of two parities, each a mask of basis elements."""
Product = tuple[int, int, int, int]
"""(one, other, flip one, flip other): a product of two parities or their complements."""


@dataclass(frozen=True)
class Shape:
    """A sum of phases c (y ^ parity of x over a mask), solved.

    constant: the coefficient of y less 4 Q; quotient: masks of the products in the normal form of Q; rest: by
    case of x, what is left without y, in eighths.
    """

    constant: int
    quotient: tuple[int, ...]
    rest: tuple[int, ...]


@lru_cache(maxsize=4096)
def solve(terms: Terms, size: int) -> Shape | None:
    """Go through all values of `size` parities; terms are (mask, c). None where there is no such Q."""
    cases = range(1 << size)
    odd = [[(mask & case).bit_count() & 1 for mask, _ in terms] for case in cases]
    slope = [sum(c * (1 - 2 * s) for (_, c), s in zip(terms, row, strict=True)) & 7 for row in odd]
    if any((value - slope[0]) & 3 for value in slope):
        return None
    quotient = [(value - (slope[0] & 3)) >> 2 & 1 for value in slope]
    for bit in range(size):
        for case in cases:
            if case >> bit & 1:
                quotient[case] ^= quotient[case ^ 1 << bit]
    rest = tuple(sum(c * s for (_, c), s in zip(terms, row, strict=True)) & 7 for row in odd)
    return Shape(slope[0] & 3, tuple(mask for mask in cases if quotient[mask]), rest)


@dataclass(frozen=True)
class Beside:
    """Half turns: product k times the parity `factors[k]`, products of two parities, and a parity."""

    factors: tuple[int, ...]
    planes: tuple[Plane, ...]
    straight: int


@lru_cache(maxsize=4096)
def absorbed(planes: tuple[Plane, ...], straight: int) -> tuple[tuple[Product, ...], int]:
    """The products with complements so that they take in the parity `straight`, and what is left of it.

    (u ^ f)(v ^ g) = uv ^ gu ^ fv ^ fg.
    """
    for flips in product((0, 1), repeat=2 * len(planes)):
        total = straight
        for (one, other), flip_one, flip_other in zip(planes, flips[::2], flips[1::2], strict=True):
            total ^= (one if flip_other else 0) ^ (other if flip_one else 0)
        if total == 0:
            pairs = zip(planes, flips[::2], flips[1::2], strict=True)
            return tuple((one, other, f, g) for (one, other), f, g in pairs), 0
    return tuple((one, other, 0, 0) for one, other in planes), straight


@lru_cache(maxsize=4096)
def rest_beside(
    rest: tuple[int, ...], products: tuple[Product, ...], sign: tuple[int, ...] = ()
) -> Beside | None:
    """`rest` as -2 times every product, a constant, and half turns; None where it is not that.

    sign: half turns by case that come on top. Where there are any, no product of three may be left.
    """
    left = list(rest)
    for case in range(len(left)):
        for one, other, flip_one, flip_other in products:
            first, second = (
                (one & case).bit_count() & 1 ^ flip_one,
                (other & case).bit_count() & 1 ^ flip_other,
            )
            left[case] += 2 * ((first & second) - (flip_one & flip_other))
    if any(value & 3 for value in left):
        return None
    form = _normal_form([value >> 2 & 1 for value in left])
    if sign:
        form = form ^ _normal_form([value ^ sign[0] for value in sign])
        products = ()
    # The product that is written, the last one, first: the qubit's other sign is a multiple of it.
    factors: list[int] = []
    for each in reversed(products):
        factors.insert(0, _factor(form, each, len(left)))
        form = form ^ _times(each, factors[0])
    if any(mask.bit_count() > 2 for mask in form):
        return None
    rows = alternating(tuple(sorted(form)))
    straight = sum(mask for mask in form if mask.bit_count() == 1)
    found: list[Plane] = []
    while any(rows):
        found.append(any_plane(rows))
        rows = peeled(rows, found[-1])
        straight ^= found[-1][0] & found[-1][1]
    return Beside(tuple(factors), tuple(found), straight)


def _normal_form(table: list[int]) -> frozenset[int]:
    """Masks of the products in the normal form of a table."""
    for bit in range(len(table).bit_length() - 1):
        for case in range(len(table)):
            if case >> bit & 1:
                table[case] ^= table[case ^ 1 << bit]
    return frozenset(mask for mask, value in enumerate(table) if value)


def _times(pair: Product, factor: int) -> frozenset[int]:
    """The normal form of the product of three parities."""
    one, other, flip_one, flip_other = pair
    found: frozenset[int] = frozenset()
    for i in [*(1 << bit for bit in _bits(one)), *([0] * flip_one)]:
        for j in [*(1 << bit for bit in _bits(other)), *([0] * flip_other)]:
            for bit in _bits(factor):
                found = found ^ {i | j | 1 << bit}
    return found


def _bits(mask: int) -> list[int]:
    return [i for i in range(mask.bit_length()) if mask >> i & 1]


def _factor(form: frozenset[int], pair: Product, cases: int) -> int:
    """The parity that, times a product, takes most products of three out of a normal form."""
    before = sum(1 for mask in form if mask.bit_count() > 2)
    best, least = 0, before
    for factor in range(1, cases if before else 1):
        after = sum(1 for mask in form ^ _times(pair, factor) if mask.bit_count() > 2)
        if after < least:
            best, least = factor, after
    return best


def alternating(quotient: tuple[int, ...]) -> tuple[int, ...]:
    """The products of two in a normal form as the rows of a symmetric matrix without diagonal."""
    rows = [0] * max((mask.bit_length() for mask in quotient), default=0)
    for mask in quotient:
        if mask.bit_count() == 2:
            low, high = (mask & -mask).bit_length() - 1, mask.bit_length() - 1
            rows[low] ^= 1 << high
            rows[high] ^= 1 << low
    return tuple(rows)


def peeled(rows: tuple[int, ...], plane: Plane) -> tuple[int, ...]:
    """The matrix less that of one product."""
    one, other = plane
    rows += (0,) * (max(one.bit_length(), other.bit_length()) - len(rows))
    return tuple(
        row ^ (other if one >> i & 1 else 0) ^ (one if other >> i & 1 else 0) for i, row in enumerate(rows)
    )


@lru_cache(maxsize=4096)
def rank(rows: tuple[int, ...]) -> int:
    """Over GF(2)."""
    basis: list[int] = []
    for row in rows:
        for known in basis:
            row = min(row, row ^ known)
        if row:
            basis.append(row)
    return len(basis)


def any_plane(rows: tuple[int, ...]) -> Plane:
    """A product that lowers the rank by two; in rank 2 there is but one up to its canonical form."""
    first = next(i for i, row in enumerate(rows) if row)
    second = (rows[first] & -rows[first]).bit_length() - 1
    return rows[first], rows[second]
