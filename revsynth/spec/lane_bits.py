"""Bits, ones and modular powers of numbers on many inputs at once."""

from __future__ import annotations

import ast
from typing import Any

import numpy as np

from revsynth.spec import arithmetic, bounds
from revsynth.spec.arithmetic import Undefined, Width
from revsynth.spec.bounds import fits_int64
from revsynth.spec.lane_numbers import absolute, binary, compare, instead, uniform, where_bad
from revsynth.spec.lane_values import (
    Mask,
    Number,
    Numbers,
    bounds_of,
    objects,
    plain,
    select,
    settled,
    truths,
)
from revsynth.spec.lanes import Lanes

_ones = np.frompyfunc(int.bit_count, 1, 1)
_PRODUCT_FITS = 1 << 31


def popcount(x: Number, width: Width | None, lanes: Lanes) -> Number:
    """Number of ones of x >= 0, or of a word's bit pattern; a negative x without a width fails."""
    if not isinstance(x, Numbers):
        return uniform(arithmetic.popcount, lanes, x, width)
    if width is not None:
        counts = np.bitwise_count(plain(x) & width.mask)
        return settled(counts.astype(np.int64), (0, width.bits))
    if x.lo < 0:
        bad = where_bad(lanes, np.less(x.array, 0).astype(np.bool_, copy=False))
        number = x if bad is None else instead(x, bad, 0)
        if not isinstance(number, Numbers):
            return 0
        x = number
    most = max(x.hi, 0).bit_length()
    if fits_int64(bounds_of(x)):
        return settled(np.bitwise_count(plain(x)).astype(np.int64), (0, most))
    return settled(_ones(x.array), (0, most))


def parity(x: Number, width: Width | None, lanes: Lanes) -> Number:
    """1 where popcount(x) is odd, else 0."""
    return binary(ast.BitAnd, popcount(x, width, lanes), 1, lanes)


def bit(x: Number, index: Number, width: Width, lanes: Lanes) -> Number:
    """Bit `index` of a word's value, 0 the least significant; it fails outside 0 ... bits - 1."""
    if not isinstance(index, Numbers):
        if not 0 <= index < width.bits:
            lanes.fail(True)
            return 0
        return truths(np.not_equal(np.bitwise_and(_array(x, lanes), 1 << index), 0))
    low, high = bounds_of(index)
    if low < 0 or high >= width.bits:
        outside = np.less(index.array, 0) | np.greater_equal(index.array, width.bits)
        bad = where_bad(lanes, outside.astype(np.bool_, copy=False))
        if bad is not None:
            index = Numbers(np.where(bad, 0, plain(index)).astype(np.int64), 0, width.bits - 1)
    return truths(np.bitwise_and(np.right_shift(_array(x, lanes), plain(index)), 1))


def bit_slice(x: Number, lo: Number, hi: Number, width: Width, lanes: Lanes) -> Number:
    """Bits lo to hi - 1 of a word's value as an unsigned number; it fails unless 0 <= lo <= hi <= bits."""
    bad: Mask | None = None
    for outside in (compare(ast.Lt, lo, 0), compare(ast.Gt, lo, hi), compare(ast.Gt, hi, width.bits)):
        found = where_bad(lanes, outside)
        if found is not None:
            bad = found if bad is None else bad | found
    if bad is not None:
        lo, hi = instead(lo, bad, 0), instead(hi, bad, 0)
    ones = binary(ast.Sub, binary(ast.LShift, 1, binary(ast.Sub, hi, lo, lanes), lanes), 1, lanes)
    return binary(ast.BitAnd, binary(ast.RShift, x, lo, lanes), ones, lanes)


def power_modulo(x: Number, k: Number, m: Number, lanes: Lanes) -> Number:
    """pow(x, k, m) by repeated squaring; it fails modulo 0 and where an inverse is wanted and is none."""
    if not any(isinstance(part, Numbers) for part in (x, k, m)):
        return uniform(arithmetic.power_modulo, lanes, x, k, m)
    if not isinstance(m, Numbers):
        lanes.fail(m == 0)
        if m == 0:
            return 0
    elif m.lo <= 0 <= m.hi:
        bad = where_bad(lanes, np.equal(m.array, 0).astype(np.bool_, copy=False))
        m = m if bad is None else instead(m, bad, 1)
    interval = bounds.power_modulo(bounds_of(m))
    largest = max(map(abs, bounds_of(m)))
    if bounds_of(k)[0] >= 0 and largest <= _PRODUCT_FITS and fits_int64(bounds_of(k)):
        return _squared(x, k, m, lanes)
    values, defined = _powers(objects(x), objects(k), objects(m))
    where_bad(lanes, ~defined.astype(np.bool_))
    return settled(values, interval)


def _squared(x: Number, k: Number, m: Number, lanes: Lanes) -> Number:
    size = absolute(m, lanes)
    base = binary(ast.Mod, x, size, lanes)
    result = binary(ast.Mod, 1, size, lanes)
    for index in range(bounds_of(k)[1].bit_length()):
        if index:
            base = binary(ast.Mod, binary(ast.Mult, base, base, lanes), size, lanes)
        product = binary(ast.Mod, binary(ast.Mult, result, base, lanes), size, lanes)
        if isinstance(k, Numbers):
            result = select(np.not_equal(np.bitwise_and(plain(k), 1 << index), 0), product, result)
        elif k >> index & 1:
            result = product
    return binary(ast.Mod, result, m, lanes)


def _power_or_not(x: int, k: int, m: int) -> tuple[int, bool]:
    try:
        return arithmetic.power_modulo(x, k, m), True
    except Undefined:
        return 0, False


_powers = np.frompyfunc(_power_or_not, 3, 2)


def _array(x: Number, lanes: Lanes) -> Any:
    return plain(x) if isinstance(x, Numbers) else np.full(lanes.size, int(x), dtype=np.int64)
