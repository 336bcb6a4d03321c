"""Interval arithmetic: the least and greatest value that an operation can give.

Every function takes closed intervals of integers and returns one that holds every defined result
(results may be fewer). Division ignores a divisor 0, shifts and powers ignore negative counts and
results beyond MAX_BITS, since those are errors where they are reached.
"""

from __future__ import annotations

import ast
from collections.abc import Callable
from typing import TypeAlias

from revsynth.spec.limits import MAX_BITS

Interval: TypeAlias = tuple[int, int]

_INT64 = (-(1 << 63), (1 << 63) - 1)
_CEILING = 1 << MAX_BITS


def fits_int64(interval: Interval) -> bool:
    """True where every value of the interval is a signed 64-bit number."""
    return _INT64[0] <= interval[0] and interval[1] <= _INT64[1]


def union(x: Interval, y: Interval) -> Interval:
    """The least interval around both."""
    return min(x[0], y[0]), max(x[1], y[1])


def _around(values: list[int]) -> Interval:
    return min(values), max(values)


def _capped(interval: Interval) -> Interval:
    return max(interval[0], -_CEILING), min(interval[1], _CEILING)


def add(x: Interval, y: Interval) -> Interval:
    """x + y."""
    return x[0] + y[0], x[1] + y[1]


def subtract(x: Interval, y: Interval) -> Interval:
    """x - y."""
    return x[0] - y[1], x[1] - y[0]


def multiply(x: Interval, y: Interval) -> Interval:
    """x * y, at most MAX_BITS bits."""
    return _capped(_around([p * q for p in x for q in y]))


def floor_divide(x: Interval, y: Interval) -> Interval:
    """x // y: monotone in x, and in y on either side of 0, so corners decide."""
    divisors = [q for q in (y[0], y[1], -1, 1) if q and y[0] <= q <= y[1]]
    return _around([p // q for p in x for q in divisors]) if divisors else (0, 0)


def remainder(x: Interval, y: Interval) -> Interval:
    """x % y: it has the sign of y and a smaller size."""
    found: list[Interval] = []
    if y[1] > 0:
        if x[0] >= 0:
            found.append(x if x[1] < max(y[0], 1) else (0, min(x[1], y[1] - 1)))
        else:
            found.append((0, y[1] - 1))
    if y[0] < 0:
        if x[1] <= 0:
            found.append(x if x[0] > min(y[1], -1) else (max(x[0], y[0] + 1), 0))
        else:
            found.append((y[0] + 1, 0))
    result = found[0] if found else (0, 0)
    for other in found[1:]:
        result = union(result, other)
    return result


def left_shift(x: Interval, n: Interval) -> Interval:
    """x << n, at most MAX_BITS bits."""
    counts = [min(max(count, 0), MAX_BITS) for count in n]
    return _capped(_around([p << q for p in x for q in counts]))


def right_shift(x: Interval, n: Interval) -> Interval:
    """x >> n."""
    enough = max(x[0].bit_length(), x[1].bit_length()) + 1
    counts = [min(max(count, 0), enough) for count in n]
    return _around([p >> q for p in x for q in counts])


def _bit_limits(x: Interval, y: Interval) -> Interval:
    """The interval of all numbers with no more bits than the ends of x and y."""
    top = (1 << max(end.bit_length() for end in (*x, *y))) - 1
    return (0 if x[0] >= 0 and y[0] >= 0 else -top - 1), top


def bit_and(x: Interval, y: Interval) -> Interval:
    """x & y: where one side is never negative, it bounds the result."""
    if x[0] >= 0 and y[0] >= 0:
        return 0, min(x[1], y[1])
    if x[0] >= 0:
        return 0, x[1]
    if y[0] >= 0:
        return 0, y[1]
    return _bit_limits(x, y)


def bit_or(x: Interval, y: Interval) -> Interval:
    """x | y: never less than a side that is not negative."""
    low, top = _bit_limits(x, y)
    return (max(x[0], y[0]) if low == 0 else low), top


def bit_xor(x: Interval, y: Interval) -> Interval:
    """x ^ y."""
    return _bit_limits(x, y)


def power(x: Interval, k: Interval) -> Interval:
    """x ** k, at most MAX_BITS bits."""
    most = max(abs(x[0]), abs(x[1]))
    low_k, high_k = max(k[0], 0), max(k[1], 0)
    if most <= 1:
        return (-1 if x[0] < 0 else 0), 1
    top = _CEILING if (most.bit_length() - 1) * high_k >= MAX_BITS else min(int(most**high_k), _CEILING)
    if x[0] < 0:
        return -top, top
    if x[0] == 0:
        return 0, top
    if (x[0].bit_length() - 1) * low_k >= MAX_BITS:
        return 1, top
    return int(x[0] ** low_k), top


def power_modulo(m: Interval) -> Interval:
    """pow(x, k, m): as a remainder by m."""
    return min(m[0] + 1, 0), max(m[1] - 1, 0)


def negate(x: Interval) -> Interval:
    """-x."""
    return -x[1], -x[0]


def invert(x: Interval) -> Interval:
    """~x."""
    return ~x[1], ~x[0]


def absolute(x: Interval) -> Interval:
    """abs(x)."""
    low = 0 if x[0] <= 0 <= x[1] else min(abs(x[0]), abs(x[1]))
    return low, max(abs(x[0]), abs(x[1]))


def least(x: Interval, y: Interval) -> Interval:
    """min(x, y)."""
    return min(x[0], y[0]), min(x[1], y[1])


def greatest(x: Interval, y: Interval) -> Interval:
    """max(x, y)."""
    return max(x[0], y[0]), max(x[1], y[1])


BINARY: dict[type[ast.operator], Callable[[Interval, Interval], Interval]] = {
    ast.Add: add,
    ast.Sub: subtract,
    ast.Mult: multiply,
    ast.FloorDiv: floor_divide,
    ast.Mod: remainder,
    ast.Pow: power,
    ast.LShift: left_shift,
    ast.RShift: right_shift,
    ast.BitAnd: bit_and,
    ast.BitOr: bit_or,
    ast.BitXor: bit_xor,
}
"""The interval of each operator of the language."""


def word(bits: int, signed: bool) -> Interval:
    """The values of a word: 0 to 2**bits - 1, or two's complement."""
    return (-(1 << (bits - 1)), (1 << (bits - 1)) - 1) if signed else (0, (1 << bits) - 1)
