"""Small binary fields as tables of logarithms.

An element of GF(2^n), n up to 7, is a polynomial in z by its coefficients, bit 0 the constant, modulo the
first primitive polynomial. GF(2^8) is a tower here: a + b Y with a in bits 0-3 and b in bits 4-7 over GF(16),
modulo Y^2 + Y + c with the first c that leaves it without roots. (Common practice; any other form of the same
field is a linear map away.)
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from functools import cache


@dataclass(frozen=True)
class Field:
    """exponentials[k] is the k-th power of a generator, logarithms the inverse (of 0: -1)."""

    bits: int
    exponentials: tuple[int, ...]
    logarithms: tuple[int, ...]

    def power(self, x: int, exponent: int) -> int:
        """x to a positive power; 0 stays 0."""
        if x == 0:
            return 0
        return self.exponentials[self.logarithms[x] * exponent % len(self.exponentials)]

    def times(self, x: int, y: int) -> int:
        """The product of two elements."""
        if x == 0 or y == 0:
            return 0
        return self.exponentials[(self.logarithms[x] + self.logarithms[y]) % len(self.exponentials)]

    def power_map(self, exponent: int) -> list[int]:
        """x to the power, for x = 0, 1, ..."""
        return [self.power(x, exponent) for x in range(1 << self.bits)]


@cache
def field(bits: int) -> Field:
    """GF(2^bits) for 2 to 8 bits."""
    if not 2 <= bits <= 8:
        raise ValueError(f"fields of 2 to 8 bits are known, not of {bits}")
    if bits == 8:
        return _with_generator(8, tower_product)
    for low in range(1, 1 << bits, 2):
        modulus = 1 << bits | low

        def times(x: int, y: int, modulus: int = modulus) -> int:
            return polynomial_product(x, y, modulus, bits)

        found = _orbit(bits, 2, times)
        if found is not None:
            return found
    raise AssertionError("there is a primitive polynomial of every degree")


def polynomial_product(x: int, y: int, modulus: int, bits: int) -> int:
    """The product of two polynomials modulo another one of degree `bits`."""
    total = 0
    for i in range(bits):
        if y >> i & 1:
            total ^= x << i
    for i in range(2 * bits - 2, bits - 1, -1):
        if total >> i & 1:
            total ^= modulus << (i - bits)
    return total


@cache
def tower_constant() -> int:
    """The c of Y^2 + Y + c: the first for which it has no root in GF(16)."""
    small = field(4)
    values = {small.times(y, y) ^ y for y in range(16)}
    return next(c for c in range(16) if c not in values)


def tower_product(x: int, y: int) -> int:
    """(a + b Y)(c + d Y) modulo Y^2 + Y + c."""
    small = field(4)
    a, b, c, d = x & 15, x >> 4, y & 15, y >> 4
    high = small.times(b, d)
    low = small.times(a, c) ^ small.times(high, tower_constant())
    return low | (small.times(a, d) ^ small.times(b, c) ^ high) << 4


def _with_generator(bits: int, times: Callable[[int, int], int]) -> Field:
    for generator in range(2, 1 << bits):
        found = _orbit(bits, generator, times)
        if found is not None:
            return found
    raise AssertionError("the units of a finite field have a generator")


def _orbit(bits: int, generator: int, times: Callable[[int, int], int]) -> Field | None:
    powers, x = [1], generator
    while x != 1 and len(powers) < 1 << bits:
        powers.append(x)
        x = times(x, generator)
    if len(powers) != (1 << bits) - 1:
        return None
    logarithms = [-1] * (1 << bits)
    for k, x in enumerate(powers):
        logarithms[x] = k
    return Field(bits, tuple(powers), tuple(logarithms))
