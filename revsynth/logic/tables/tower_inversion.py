"""The inverse in GF(2^8) with 32 products, from the tower over GF(16).

With N = a^2 + a b + c b^2 in GF(16), the inverse of a + b Y modulo Y^2 + Y + c is ((a + b) + b Y) / N. So it
takes the product a b, the inverse of N and two products with that: 9 + 5 + 9 + 9. A product of two
polynomials of degree 3 has 9 bit products by A. Karatsuba's method twice; five for the inverse in GF(16) are
found by `small_chains`. Towers for this purpose: V. Rijmen, "Efficient implementation of the Rijndael S-box",
2000 (from memory); the best known number: J. Boyar, R. Peralta, "A small depth-16 circuit for the AES S-box",
SEC 2012.
"""

from __future__ import annotations

from functools import cache

from revsynth.logic.product_chain import ProductChain, Sum, mapped, substituted
from revsynth.logic.tables.binary_fields import Field, field, tower_constant
from revsynth.logic.tables.power_maps import PowerMap
from revsynth.logic.tables.small_chains import small_chain

Element = list[Sum]
"""An element of GF(16): the sum of signals of each coefficient."""
_SEARCHED = 500


@cache
def inversion_chain() -> ProductChain:
    """x^254 in the tower of `binary_fields`, checked on all 256 inputs."""
    small = field(4)
    products: list[tuple[Sum, Sum]] = []
    a: Element = [2 << i for i in range(4)]
    b: Element = [2 << (4 + i) for i in range(4)]
    product = _times(a, b, products, small)
    squares = _linear(a, [small.times(1 << i, 1 << i) for i in range(4)])
    scaled = [small.times(tower_constant(), small.times(1 << i, 1 << i)) for i in range(4)]
    norm = _plus(_plus(squares, product), _linear(b, scaled))
    inverse = _inverse(norm, products)
    low = _times(_plus(a, b), inverse, products, small)
    high = _times(b, inverse, products, small)
    chain = ProductChain(8, tuple(products), (*low, *high))
    wanted = field(8).power_map(254)
    if chain.tables() != [sum((wanted[x] >> j & 1) << x for x in range(256)) for j in range(8)]:
        raise AssertionError("the tower does not invert")
    return chain


def power_map_chain(found: PowerMap) -> ProductChain | None:
    """A chain of 32 products where the table is an inverse in GF(2^8); None for other power maps."""
    if found.bits != 8 or found.exponent != 127:
        return None
    inner = [
        (found.inside >> i & 1) | sum(2 << j for j in range(8) if found.inner[j] >> i & 1) for i in range(8)
    ]
    chain = substituted(inversion_chain(), 8, inner)
    doubled = _squared(found)
    outputs = tuple(
        (found.outside >> i & 1) ^ mapped(sum(1 << j for j in range(8) if doubled[j] >> i & 1), chain.outputs)
        for i in range(8)
    )
    return ProductChain(8, chain.products, outputs)


def _squared(found: PowerMap) -> list[int]:
    """x^127 is the linear map x^(128) of the inverse: the outer map with this before it."""
    big = field(8)
    columns = []
    for i in range(8):
        image = big.power(1 << i, 128)
        columns.append(mapped(image, found.outer))
    return columns


def _plus(one: Element, other: Element) -> Element:
    return [x ^ y for x, y in zip(one, other, strict=True)]


def _linear(element: Element, columns: list[int]) -> Element:
    """The linear map with the images `columns` of 1, z, z^2, z^3."""
    result = [0] * 4
    for coefficient, column in zip(element, columns, strict=True):
        for i in range(4):
            if column >> i & 1:
                result[i] ^= coefficient
    return result


def _times(one: Element, other: Element, products: list[tuple[Sum, Sum]], small: Field) -> Element:
    """The product in GF(16) with nine products appended."""
    long = _karatsuba(one, other, products)
    result = list(long[:4])
    for degree in range(4, 7):
        image = small.power(2, degree)
        for i in range(4):
            if image >> i & 1:
                result[i] ^= long[degree]
    return result


def _karatsuba(one: list[Sum], other: list[Sum], products: list[tuple[Sum, Sum]]) -> list[Sum]:
    """The coefficients of a product of polynomials of equal length, a power of two (depth 2 at length 4)."""
    if len(one) == 1:
        products.append((one[0], other[0]))
        return [1 << (8 + len(products))]
    half = len(one) // 2
    low = _karatsuba(one[:half], other[:half], products)
    high = _karatsuba(one[half:], other[half:], products)
    both = _karatsuba(_plus(one[:half], one[half:]), _plus(other[:half], other[half:]), products)
    total = [0] * (2 * len(one) - 1)
    for k in range(len(low)):
        total[k] ^= low[k]
        total[k + half] ^= low[k] ^ high[k] ^ both[k]
        total[k + 2 * half] ^= high[k]
    return total


def _inverse(element: Element, products: list[tuple[Sum, Sum]]) -> Element:
    """The inverse in GF(16) with five products appended."""
    wanted = field(4).power_map(14)
    tables = [sum((wanted[x] >> j & 1) << x for x in range(16)) for j in range(4)]
    chain = small_chain(tables, 4, _SEARCHED)
    if chain is None:
        raise AssertionError("the inverse in GF(16) has five products")
    moved = substituted(chain, 8, element, after=len(products))
    products.extend(moved.products)
    return list(moved.outputs)
