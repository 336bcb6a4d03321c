"""Exact integer operations on many inputs at once.

Intervals decide: where operands and result fit signed 64-bit numbers, numpy computes on int64 without
wrap-around; elsewhere arrays hold Python's own integers. Where an operation is undefined its lanes fail,
and go on with a harmless value.
"""

from __future__ import annotations

import ast
from collections.abc import Callable
from typing import Any

import numpy as np

from revsynth.spec import arithmetic, bounds
from revsynth.spec.arithmetic import Undefined
from revsynth.spec.bounds import Interval, fits_int64, union
from revsynth.spec.lane_values import (
    Mask,
    Number,
    Numbers,
    bounds_of,
    is_truth,
    objects,
    plain,
    settled,
    truths,
)
from revsynth.spec.lanes import Lanes
from revsynth.spec.limits import MAX_BITS

_INT64_MIN = -(1 << 63)
_lengths = np.frompyfunc(int.bit_length, 1, 1)


def binary(op: type[ast.operator], x: Number, y: Number, lanes: Lanes) -> Number:
    """x op y for every operator of the language."""
    if not isinstance(x, Numbers) and not isinstance(y, Numbers):
        return uniform(arithmetic.BINARY[op], lanes, x, y)
    return _KERNELS[op](x, y, lanes)


def uniform(operation: Callable[..., int], lanes: Lanes, *operands: Any) -> int:
    """An operation on numbers that are the same for every lane."""
    try:
        return operation(*operands)
    except Undefined:
        lanes.fail(True)
        return 0


def unary(op: type[ast.unaryop], x: Number, lanes: Lanes) -> Number:
    """-x, +x, ~x or not x."""
    if not isinstance(x, Numbers):
        return arithmetic.UNARY[op](x)
    if op is ast.Not:
        known = truth(x)
        return not known if isinstance(known, bool) else truths(~known)
    if op is ast.Invert:
        return settled(np.invert(plain(x)), bounds.invert(bounds_of(x)))
    if op is ast.USub:
        return _on_one(np.negative, bounds.negate, x, lanes)
    return Numbers(plain(x), x.lo, x.hi)


def absolute(x: Number, lanes: Lanes) -> Number:
    """abs(x)."""
    if not isinstance(x, Numbers):
        return abs(x)
    return x if x.lo >= 0 else _on_one(np.abs, bounds.absolute, x, lanes)


def smaller(x: Number, y: Number, lanes: Lanes) -> Number:
    """min(x, y)."""
    if not isinstance(x, Numbers) and not isinstance(y, Numbers):
        return min(x, y)
    return _on_two(np.minimum, bounds.least, x, y, lanes)


def larger(x: Number, y: Number, lanes: Lanes) -> Number:
    """max(x, y)."""
    if not isinstance(x, Numbers) and not isinstance(y, Numbers):
        return max(x, y)
    return _on_two(np.maximum, bounds.greatest, x, y, lanes)


def truth(x: Number) -> bool | Mask:
    """Where a number is not 0: one answer where it is the same for every lane."""
    if not isinstance(x, Numbers):
        return bool(x)
    if x.array.dtype == np.bool_:
        mask: Mask = x.array
        return mask
    if x.lo > 0 or x.hi < 0:
        return True
    nonzero: Mask = np.not_equal(x.array, 0).astype(np.bool_, copy=False)
    return nonzero


def compare(op: type[ast.cmpop], x: Number, y: Number) -> bool | Mask:
    """x op y for == != < <= > >=; intervals answer where they do not overlap."""
    if op is ast.Gt:
        return compare(ast.Lt, y, x)
    if op is ast.GtE:
        return compare(ast.LtE, y, x)
    (xl, xh), (yl, yh) = bounds_of(x), bounds_of(y)
    if op in (ast.Eq, ast.NotEq):
        known = False if xh < yl or yh < xl else True if xl == xh == yl == yh else None
        if known is not None:
            return known is (op is ast.Eq)
        ufunc: Any = np.equal if op is ast.Eq else np.not_equal
    else:
        strict = op is ast.Lt
        if xh < yl or (xh == yl and not strict):
            return True
        if xl > yh or (xl == yh and strict):
            return False
        ufunc = np.less if strict else np.less_equal
    wide = not (fits_int64((xl, xh)) and fits_int64((yl, yh)))
    left, right = (objects(x), objects(y)) if wide else (_raw(x), _raw(y))
    result: Mask = ufunc(left, right).astype(np.bool_, copy=False)
    return result


def tight(x: Number, lanes: Lanes) -> Number:
    """The same number with the least interval over the lanes in use, the others brought inside it."""
    if not isinstance(x, Numbers):
        return x
    array = plain(x)
    used = array if lanes.active is None else array[lanes.active]
    low, high = int(used.min()), int(used.max())
    if lanes.active is not None:
        array = np.where(lanes.active, array, used[0])
    return Numbers(array, low, high)


def where_bad(lanes: Lanes, bad: bool | Mask) -> Mask | None:
    """Fail the lanes where `bad` holds, and return them where there are any, in use or not."""
    if isinstance(bad, bool):
        if not bad:
            return None
        bad = np.ones(lanes.size, dtype=np.bool_)
    if not bad.any():
        return None
    lanes.fail(bad)
    return bad


def instead(x: Number, bad: Mask, value: int) -> Number:
    """The number with `value` on the lanes where `bad` holds."""
    low, high = union(bounds_of(x), (value, value))
    if fits_int64((low, high)):
        return settled(np.where(bad, value, plain(x)), (low, high))
    return Numbers(np.where(bad, np.array(value, dtype=object), objects(x)), low, high)


def _raw(x: Number) -> Any:
    return x.array if isinstance(x, Numbers) else x


def _fit(*intervals: Interval) -> bool:
    return all(fits_int64(interval) for interval in intervals)


def _on_one(ufunc: Any, interval_of: Callable[[Interval], Interval], x: Numbers, lanes: Lanes) -> Number:
    number: Number = x
    if not _fit(interval_of(bounds_of(x)), bounds_of(x)):
        number = tight(x, lanes)
    interval = interval_of(bounds_of(number))
    operand = plain(number) if _fit(interval, bounds_of(number)) else objects(number)
    return settled(ufunc(operand), interval)


def _brought(
    interval_of: Callable[[Interval, Interval], Interval], x: Number, y: Number, lanes: Lanes
) -> tuple[Number, Number, Interval, bool]:
    """Operands, the result's interval, and whether 64 bits suffice, tightened only where they do not."""
    interval = interval_of(bounds_of(x), bounds_of(y))
    if _fit(interval, bounds_of(x), bounds_of(y)):
        return x, y, interval, True
    x, y = tight(x, lanes), tight(y, lanes)
    interval = interval_of(bounds_of(x), bounds_of(y))
    return x, y, interval, _fit(interval, bounds_of(x), bounds_of(y))


def _on_two(
    ufunc: Any, interval_of: Callable[[Interval, Interval], Interval], x: Number, y: Number, lanes: Lanes
) -> Number:
    x, y, interval, small = _brought(interval_of, x, y, lanes)
    if small:
        return settled(ufunc(plain(x), plain(y)), interval)
    return settled(ufunc(objects(x), objects(y)), interval)


def _add(x: Number, y: Number, lanes: Lanes) -> Number:
    return _on_two(np.add, bounds.add, x, y, lanes)


def _subtract(x: Number, y: Number, lanes: Lanes) -> Number:
    return _on_two(np.subtract, bounds.subtract, x, y, lanes)


def _multiply(x: Number, y: Number, lanes: Lanes) -> Number:
    x, y, interval, small = _brought(bounds.multiply, x, y, lanes)
    if small:
        return settled(np.multiply(plain(x), plain(y)), interval)
    product = np.multiply(objects(x), objects(y))
    if _longest(x) + _longest(y) > MAX_BITS:
        return _not_too_large(product, interval, lanes)
    return settled(product, interval)


def _not_too_large(array: Any, interval: Interval, lanes: Lanes) -> Number:
    """The number of an array of Python integers; it fails where one has more than MAX_BITS bits."""
    bad = where_bad(lanes, np.greater(_lengths(array), MAX_BITS).astype(np.bool_))
    if bad is None:
        return settled(array, interval)
    return settled(np.where(bad, np.array(0, dtype=object), array), union(interval, (0, 0)))


def _longest(x: Number) -> int:
    return max(end.bit_length() for end in bounds_of(x))


def _divisor(y: Number, lanes: Lanes) -> Number | None:
    """A divisor with failed lanes made 1; None where it is 0 on every lane."""
    if not isinstance(y, Numbers):
        lanes.fail(y == 0)
        return y or None
    if y.lo > 0 or y.hi < 0:
        return y
    bad = where_bad(lanes, np.equal(y.array, 0).astype(np.bool_, copy=False))
    array = plain(y) if bad is None else plain(instead(y, bad, 1))
    return Numbers(array, y.lo or 1, y.hi if y.hi > 0 else (-1 if bad is None else 1))


def _floor_divide(x: Number, y: Number, lanes: Lanes) -> Number:
    divisor = _divisor(y, lanes)
    if divisor is None:
        return 0
    if not isinstance(divisor, Numbers) and divisor > 0 and divisor & (divisor - 1) == 0:
        return _right_shift(x, divisor.bit_length() - 1, lanes)
    return _on_two(np.floor_divide, bounds.floor_divide, x, divisor, lanes)


def _remainder(x: Number, y: Number, lanes: Lanes) -> Number:
    divisor = _divisor(y, lanes)
    if divisor is None:
        return 0
    if not isinstance(divisor, Numbers) and divisor > 0 and divisor & (divisor - 1) == 0:
        return _on_two(
            np.bitwise_and, lambda p, q: bounds.remainder(p, (divisor, divisor)), x, divisor - 1, lanes
        )
    x, y, interval, small = _brought(bounds.remainder, x, divisor, lanes)
    if small and bounds_of(x)[0] > _INT64_MIN:
        return settled(np.remainder(plain(x), plain(y)), interval)
    return settled(np.remainder(objects(x), objects(y)), interval)


def _count(n: Number, lanes: Lanes) -> Number | None:
    """A shift count or exponent with failed lanes made 0; None where it is negative on every lane."""
    if bounds_of(n)[0] >= 0:
        return n
    if not isinstance(n, Numbers):
        lanes.fail(True)
        return None
    bad = where_bad(lanes, np.less(n.array, 0).astype(np.bool_, copy=False))
    if bad is None:
        return Numbers(n.array, 0, max(n.hi, 0))
    array = plain(instead(n, bad, 0))
    return Numbers(array, 0, n.hi) if n.hi > 0 else 0


def _left_shift(x: Number, n: Number, lanes: Lanes) -> Number:
    count = _count(n, lanes)
    if count is None:
        return 0
    if not isinstance(x, Numbers) and not isinstance(count, Numbers):
        return uniform(arithmetic.left_shift, lanes, x, count)
    x, count, interval, small = _brought(bounds.left_shift, x, count, lanes)
    if small and bounds_of(count)[1] < 64:
        return settled(np.left_shift(plain(x), plain(count)), interval)
    left, right = objects(x), objects(count)
    if _longest(x) + bounds_of(count)[1] > MAX_BITS:
        too_far = np.greater(_lengths(left) + right, MAX_BITS).astype(np.bool_)
        where_bad(lanes, too_far & np.not_equal(left, 0).astype(np.bool_))
        right = np.where(too_far, np.array(0, dtype=object), right)
        interval = union(interval, bounds_of(x))
    return settled(np.left_shift(left, right), interval)


def _right_shift(x: Number, n: Number, lanes: Lanes) -> Number:
    count = _count(n, lanes)
    if count is None:
        return 0
    interval = bounds.right_shift(bounds_of(x), bounds_of(count))
    small = fits_int64(bounds_of(x))
    top = 63 if small else _longest(x) + 1
    if bounds_of(count)[1] > top:
        count = smaller(count, top, lanes)
    if not isinstance(x, Numbers) and not isinstance(count, Numbers):
        return x >> count
    if small:
        return settled(np.right_shift(plain(x), plain(count)), interval)
    return settled(np.right_shift(objects(x), objects(count)), interval)


def _power(x: Number, k: Number, lanes: Lanes) -> Number:
    count = _count(k, lanes)
    if count is None:
        return 0
    if not isinstance(x, Numbers) and not isinstance(count, Numbers):
        return uniform(arithmetic.power, lanes, x, count)
    x, count, interval, small = _brought(bounds.power, x, count, lanes)
    if small:
        return settled(np.power(plain(x), plain(count)), interval)
    base, exponent = objects(x), objects(count)
    if _longest(x) * bounds_of(count)[1] > MAX_BITS:
        long = np.greater_equal((_lengths(base) - 1) * exponent, MAX_BITS).astype(np.bool_)
        bad = where_bad(lanes, long & np.greater(np.abs(base), 1).astype(np.bool_))
        if bad is not None:
            exponent = np.where(bad, np.array(0, dtype=object), exponent)
            interval = union(interval, (1, 1))
        return _not_too_large(np.power(base, exponent), interval, lanes)
    return settled(np.power(base, exponent), interval)


def _bitwise(ufunc: Any, interval_of: Callable[[Interval, Interval], Interval]) -> Callable[..., Number]:
    def kernel(x: Number, y: Number, lanes: Lanes) -> Number:
        if is_truth(x) and is_truth(y):
            return truths(ufunc(_raw(x), _raw(y)))
        return _on_two(ufunc, interval_of, x, y, lanes)

    return kernel


_KERNELS: dict[type[ast.operator], Callable[[Number, Number, Lanes], Number]] = {
    ast.Add: _add,
    ast.Sub: _subtract,
    ast.Mult: _multiply,
    ast.FloorDiv: _floor_divide,
    ast.Mod: _remainder,
    ast.Pow: _power,
    ast.LShift: _left_shift,
    ast.RShift: _right_shift,
    ast.BitAnd: _bitwise(np.bitwise_and, bounds.bit_and),
    ast.BitOr: _bitwise(np.bitwise_or, bounds.bit_or),
    ast.BitXor: _bitwise(np.bitwise_xor, bounds.bit_xor),
}
