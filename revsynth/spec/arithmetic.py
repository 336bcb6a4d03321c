"""The exact operations on single Python integers, and which of them are undefined where.

Python's own operators do the work; what Python answers with an exception, a fraction or a number too
large to hold raises Undefined. Truth values are the integers 0 and 1, as in Python.
"""

from __future__ import annotations

import ast
import operator
from collections.abc import Callable, Sequence
from dataclasses import dataclass
from typing import Any

from revsynth.spec import refusals
from revsynth.spec.limits import MAX_BITS
from revsynth.spec.refusals import Refusal


@dataclass(frozen=True)
class Width:
    """How many bits a word has, and whether it is signed: what bits and popcount need to know."""

    bits: int
    signed: bool

    @property
    def mask(self) -> int:
        """Ones at the word's bits."""
        return (1 << self.bits) - 1


class Undefined(Exception):  # noqa: N818 - it names a state of the operation, and never leaves the room
    """An operation without a result; `node` is the part of the expression, once known."""

    def __init__(self, refusal: Refusal, **fields: Any) -> None:
        super().__init__(refusal.message)
        self.refusal = refusal
        self.fields = fields
        self.node: ast.expr | None = None


def multiply(x: int, y: int) -> int:
    """x * y, of at most MAX_BITS bits."""
    return _not_too_large(x * y)


def _not_too_large(result: int) -> int:
    if result.bit_length() > MAX_BITS:
        raise Undefined(refusals.TOO_LARGE, limit=MAX_BITS)
    return result


def floor_divide(x: int, y: int) -> int:
    """x // y, rounding down."""
    if y == 0:
        raise Undefined(refusals.DIVISION)
    return x // y


def remainder(x: int, y: int) -> int:
    """x % y, with the sign of y."""
    if y == 0:
        raise Undefined(refusals.DIVISION)
    return x % y


def left_shift(x: int, n: int) -> int:
    """x << n for n >= 0."""
    if n < 0:
        raise Undefined(refusals.NEGATIVE_SHIFT, count=n)
    if x == 0:
        return 0
    if x.bit_length() + n > MAX_BITS:
        raise Undefined(refusals.TOO_LARGE, limit=MAX_BITS)
    return x << n


def right_shift(x: int, n: int) -> int:
    """x >> n for n >= 0, rounding down."""
    if n < 0:
        raise Undefined(refusals.NEGATIVE_SHIFT, count=n)
    return x >> min(n, x.bit_length() + 1)


def power(x: int, k: int) -> int:
    """x ** k for k >= 0; 0 ** 0 is 1."""
    if k < 0:
        raise Undefined(refusals.NEGATIVE_EXPONENT, count=k)
    if abs(x) > 1 and (x.bit_length() - 1) * k >= MAX_BITS:
        raise Undefined(refusals.TOO_LARGE, limit=MAX_BITS)
    return _not_too_large(int(x**k))


def power_modulo(x: int, k: int, m: int) -> int:
    """pow(x, k, m); a negative k takes the inverse of x modulo m, where there is one."""
    if m == 0:
        raise Undefined(refusals.MODULUS)
    try:
        return pow(x, k, m)
    except ValueError:
        raise Undefined(refusals.NO_INVERSE, base=int(x), modulus=int(m)) from None


def popcount(x: int, width: Width | None, name: str = "popcount") -> int:
    """Number of ones of x >= 0, or of the bit pattern of a word (which may be signed and negative).

    A negative number that is not a word's value has no fixed number of ones: Undefined.
    """
    if width is not None:
        x &= width.mask
    if x < 0:
        raise Undefined(refusals.NEGATIVE_POPCOUNT, value=x, name=name)
    return x.bit_count()


def parity(x: int, width: Width | None) -> int:
    """1 where popcount(x) is odd, else 0."""
    return popcount(x, width, "parity") & 1


def bit(x: int, index: int, width: Width) -> int:
    """Bit `index` of a word's value, 0 the least significant; indexes from the end are not allowed."""
    if not 0 <= index < width.bits:
        raise Undefined(refusals.BIT_REACHED, index=int(index), last=width.bits - 1)
    return (x >> index) & 1


def bit_slice(x: int, lo: int, hi: int, width: Width) -> int:
    """Bits lo to hi - 1 of a word's value as an unsigned number, bit lo the least significant."""
    if not 0 <= lo <= hi <= width.bits:
        raise Undefined(refusals.SLICE_REACHED, lo=int(lo), hi=int(hi), bits=width.bits)
    return (x >> lo) & ((1 << (hi - lo)) - 1)


def item(values: Sequence[Any], index: int) -> Any:
    """values[index], counting from the end for negative indexes, as Python does."""
    if not -len(values) <= index < len(values):
        raise Undefined(refusals.INDEX_REACHED, index=int(index), length=len(values))
    return values[index]


def stepped_range(*ends: int) -> range:
    """range(...), whose step must not be 0."""
    if len(ends) == 3 and ends[2] == 0:
        raise Undefined(refusals.RANGE_STEP)
    return range(*ends)


def invert(x: int) -> int:
    """~x of the integer value: ~True is -2."""
    return ~int(x)


def absolute(x: int) -> int:
    """abs(x)."""
    return abs(x)


BINARY: dict[type[ast.operator], Callable[[int, int], int]] = {
    ast.Add: operator.add,
    ast.Sub: operator.sub,
    ast.Mult: multiply,
    ast.FloorDiv: floor_divide,
    ast.Mod: remainder,
    ast.Pow: power,
    ast.LShift: left_shift,
    ast.RShift: right_shift,
    ast.BitAnd: operator.and_,
    ast.BitOr: operator.or_,
    ast.BitXor: operator.xor,
}
"""The operators of the language on single integers."""

UNARY: dict[type[ast.unaryop], Callable[[int], int]] = {
    ast.UAdd: operator.pos,
    ast.USub: operator.neg,
    ast.Invert: invert,
    ast.Not: operator.not_,
}
"""The one-sided operators."""

COMPARE: dict[type[ast.cmpop], Callable[[Any, Any], bool]] = {
    ast.Eq: operator.eq,
    ast.NotEq: operator.ne,
    ast.Lt: operator.lt,
    ast.LtE: operator.le,
    ast.Gt: operator.gt,
    ast.GtE: operator.ge,
    ast.In: lambda x, values: x in values,
    ast.NotIn: lambda x, values: x not in values,
}
"""The comparisons; `in` takes a list, tuple or range."""
