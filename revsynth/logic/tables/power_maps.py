"""Recognises bijective tables that are affinely equivalent to a power map x^d of GF(2^n), 4 to 8 bits.

The differential spectrum, how often S(x) + S(x + a) takes each value, rules out nearly everything at once.
The affine maps are then found by guess and determine: two images of the inner linear map settle it, with one
of them 1 since scaling is an automorphism of a power map. Source: A. Biryukov, C. De Canniere, A. Braeken, B.
Preneel, "A toolbox for cryptanalysis: linear and affine equivalence algorithms", Eurocrypt 2003. For the
inverse in an even number of bits, the one difference that is taken four times gives the linear maps free of
all constants, so that these need not be guessed.
"""

from __future__ import annotations

from collections import Counter
from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from math import gcd

import numpy as np
from numpy.typing import NDArray

from revsynth.logic.tables.binary_fields import field

LEAST_BITS, MOST_BITS = 4, 8
_MOST_GUESSES = 1 << 12


@dataclass(frozen=True)
class PowerMap:
    """S(x) = outer(power(inner(x) + inside)) + outside in `field(bits)`.

    inner, outer: the images of 1, 2, 4, ... under the linear maps.
    """

    bits: int
    exponent: int
    inner: tuple[int, ...]
    inside: int
    outer: tuple[int, ...]
    outside: int

    def table(self) -> list[int]:
        """S(x) for x = 0, 1, ..."""
        powers = field(self.bits).power_map(self.exponent)
        return [
            linear_image(self.outer, powers[linear_image(self.inner, x) ^ self.inside]) ^ self.outside
            for x in range(1 << self.bits)
        ]


def linear_image(columns: Sequence[int], x: int) -> int:
    """The linear map with these images of 1, 2, 4, ... at x."""
    total = 0
    for i, column in enumerate(columns):
        if x >> i & 1:
            total ^= column
    return total


def exponents(bits: int) -> list[int]:
    """One exponent for each bijective power map that is not linear, the least of its class."""
    order = (1 << bits) - 1
    found = []
    for d in range(3, order):
        cyclotomic = [d << k for k in range(bits)]
        if gcd(d, order) == 1 and d == min(e % order for e in cyclotomic) and d & (d - 1):
            found.append(d)
    return found


def recognise(values: Sequence[int], bits: int) -> PowerMap | None:
    """The power map behind a bijective table, checked on all inputs; None where there is none.

    Also None where the guesses would be too many: 7 and 8 bits, unless it is the inverse in 8 bits.
    """
    if not LEAST_BITS <= bits <= MOST_BITS or sorted(values) != list(range(1 << bits)):
        return None
    table = np.array(values, dtype=np.int64)
    spectrum = _spectrum(table, bits)
    if spectrum is None:
        return None
    for exponent in exponents(bits):
        powers = field(bits).power_map(exponent)
        if _row(np.array(powers), 1) != spectrum:
            continue
        found = _solve(table, bits, exponent, powers)
        if found is not None:
            if found.table() != table.tolist():
                raise AssertionError("a power map was recognised that the table is not")
            return found
    return None


def _row(table: NDArray[np.int64], difference: int) -> Counter[int]:
    x = np.arange(len(table))
    return Counter(np.bincount(table ^ table[x ^ difference], minlength=len(table)).tolist())


def _spectrum(table: NDArray[np.int64], bits: int) -> Counter[int] | None:
    """The common distribution of all differences, as a power map has it; None where they differ."""
    first = _row(table, 1)
    return first if all(_row(table, a) == first for a in range(2, 1 << bits)) else None


def _solve(table: NDArray[np.int64], bits: int, exponent: int, powers: list[int]) -> PowerMap | None:
    inverse = exponent == (1 << (bits - 1)) - 1
    if inverse and bits % 2 == 0:
        for inner, outer in _linear_maps(_fourfold(table), powers, bits):
            found = _with_constants(table, bits, exponent, powers, inner, outer)
            if found is not None:
                return found
        return None
    if 1 << (2 * bits) > _MOST_GUESSES:
        return None
    for shift in range(1 << bits):
        centred = (table[np.arange(1 << bits) ^ shift] ^ table[shift]).tolist()
        for inner, outer in _linear_maps(centred, powers, bits):
            inside = linear_image(inner, shift)
            outside = int(table[shift])
            return PowerMap(bits, exponent, tuple(inner), inside, tuple(outer), outside)
    return None


def _fourfold(table: NDArray[np.int64]) -> list[int]:
    """For each difference of inputs the difference of outputs that occurs most; 0 for 0."""
    x = np.arange(len(table))
    return [0, *(int(np.bincount(table ^ table[x ^ a]).argmax()) for a in range(1, len(table)))]


def _with_constants(
    table: NDArray[np.int64],
    bits: int,
    exponent: int,
    powers: list[int],
    inner: list[int],
    outer: list[int],
) -> PowerMap | None:
    size = 1 << bits
    images = np.array([linear_image(inner, x) for x in range(size)])
    after = np.array([linear_image(outer, y) for y in powers])
    for inside in range(size):
        difference = after[images ^ inside] ^ table
        if np.all(difference == difference[0]):
            return PowerMap(bits, exponent, tuple(inner), inside, tuple(outer), int(difference[0]))
    return None


def _linear_maps(table: list[int], powers: list[int], bits: int) -> Iterator[tuple[list[int], list[int]]]:
    """Linear A, B with table[x] = B(powers[A x]), where A maps 1 to 1; table[0] = 0 is given."""
    if sorted(table) != list(range(len(table))):
        return
    reverse_table, reverse_powers = [0] * len(table), [0] * len(table)
    for x, y in enumerate(table):
        reverse_table[y] = x
    for x, y in enumerate(powers):
        reverse_powers[y] = x
    for guess in range(2, 1 << bits):
        states = [(_Linear(), _Linear(), [(True, 1, 1), (True, 2, guess)])]
        while states:
            a, b, waiting = states.pop()
            if not _consistent(a, b, waiting, table, reverse_table, powers, reverse_powers):
                continue
            if len(a.images) == 1 << bits:
                columns = [1 << i for i in range(bits)]
                yield [a.images[c] for c in columns], [b.images[c] for c in columns]
                continue
            point = next(x for x in range(1 << bits) if x not in a.images)
            taken = set(a.images.values())
            for image in range((1 << bits) - 1, 0, -1):
                if image not in taken:
                    states.append((a.copy(), b.copy(), [(True, point, image)]))


class _Linear:
    """A linear map known on a growing subspace: images of all its points."""

    def __init__(self, images: dict[int, int] | None = None) -> None:
        self.images = {0: 0} if images is None else images

    def copy(self) -> _Linear:
        """The same knowledge, to be added to apart."""
        return _Linear(dict(self.images))

    def learn(self, x: int, image: int) -> list[int] | None:
        """Add an image; the new points of the subspace, or None where it contradicts what is known."""
        known = self.images.get(x)
        if known is not None:
            return [] if known == image else None
        new = {point ^ x: value ^ image for point, value in self.images.items()}
        self.images.update(new)
        return list(new)


def _consistent(
    a: _Linear,
    b: _Linear,
    waiting: list[tuple[bool, int, int]],
    table: list[int],
    reverse_table: list[int],
    powers: list[int],
    reverse_powers: list[int],
) -> bool:
    """Learn all that follows, each point of one map giving a point of the other; False at a contradiction."""
    while waiting:
        inner, x, image = waiting.pop()
        new = (a if inner else b).learn(x, image)
        if new is None:
            return False
        for point in new:
            if inner:
                waiting.append((False, powers[a.images[point]], table[point]))
            else:
                waiting.append((True, reverse_table[b.images[point]], reverse_powers[point]))
    return True
