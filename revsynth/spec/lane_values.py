"""Values of many inputs at once: one number an input, or lists of such.

What is the same for every input stays a plain Python number, list, tuple or range; only what depends on
the input is an array. A `lane` is one input of the array, at the same position in every array.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from typing import Any, TypeAlias

import numpy as np
from numpy.typing import NDArray

from revsynth.spec.bounds import Interval, fits_int64

Mask: TypeAlias = NDArray[np.bool_]
"""Shape (lanes,): which lanes are meant."""


@dataclass(frozen=True, slots=True)
class Numbers:
    """One integer a lane, all between `lo` and `hi`, lanes out of use included.

    `array` has shape (lanes,) and dtype bool, int64, or object where int64 does not suffice.
    """

    array: NDArray[Any]
    lo: int
    hi: int


@dataclass(frozen=True, slots=True)
class Items:
    """A list whose items depend on the lane; item i is there only where `present[i]` (None: everywhere)."""

    values: tuple[Value, ...]
    present: tuple[Mask | None, ...]


@dataclass(frozen=True, slots=True)
class Stepped:
    """A range(...) that depends on the lane: start, start + step, ...; `length` is 0 or more."""

    start: Number
    step: Number
    length: Number


Number: TypeAlias = "int | Numbers"
Listing: TypeAlias = "list[Any] | tuple[Any, ...] | range | Items | Stepped"
Value: TypeAlias = "Number | Listing"


def bounds_of(x: Number) -> Interval:
    """Least and greatest value that a number can have on any lane."""
    return (x.lo, x.hi) if isinstance(x, Numbers) else (int(x), int(x))


def is_truth(x: Number) -> bool:
    """True where a number is held as truth values."""
    return x.array.dtype == np.bool_ if isinstance(x, Numbers) else isinstance(x, bool)


def plain(x: Number) -> Any:
    """The number as int64 (or object) array, or Python integer, ready for arithmetic."""
    if not isinstance(x, Numbers):
        return int(x)
    return x.array.astype(np.int64) if x.array.dtype == np.bool_ else x.array


def objects(x: Number) -> Any:
    """The number as array of Python's own integers (without lanes, where it is the same for all)."""
    if not isinstance(x, Numbers):
        return np.array(int(x), dtype=object)
    return x.array if x.array.dtype == object else plain(x).astype(object)


def settled(array: NDArray[Any], interval: Interval) -> Number:
    """The number of an array with its interval: in 64 bits where they suffice."""
    if interval[0] == interval[1]:
        return interval[0]
    if array.dtype == object and fits_int64(interval):
        array = array.astype(np.int64)
    return Numbers(array, *interval)


def truths(array: Any) -> Number:
    """The truth values of an array of bools (any dtype) as a number."""
    return Numbers(array.astype(np.bool_, copy=False), 0, 1)


def select(condition: Mask, x: Number, y: Number) -> Number:
    """On each lane x where the condition holds, y elsewhere."""
    (xl, xh), (yl, yh) = bounds_of(x), bounds_of(y)
    interval = min(xl, yl), max(xh, yh)
    if is_truth(x) and is_truth(y):
        left = x.array if isinstance(x, Numbers) else x
        right = y.array if isinstance(y, Numbers) else y
        return truths(np.where(condition, left, right))
    if fits_int64(interval):
        return settled(np.where(condition, plain(x), plain(y)), interval)
    return settled(np.where(condition, objects(x), objects(y)), interval)


def mapped(value: Value, number: Callable[[Numbers], Number], mask: Callable[[Mask], Mask]) -> Value:
    """The value with `number` applied to all arrays of numbers in it, and `mask` to all masks."""
    if isinstance(value, Numbers):
        return number(value)
    if isinstance(value, Items):
        return Items(
            tuple(mapped(item, number, mask) for item in value.values),
            tuple(None if there is None else mask(there) for there in value.present),
        )
    if isinstance(value, Stepped):
        parts = (value.start, value.step, value.length)
        return Stepped(*(number(part) if isinstance(part, Numbers) else part for part in parts))
    return value


def take(value: Value, rows: NDArray[np.intp]) -> Value:
    """The value on some of its lanes only."""
    return mapped(value, lambda x: Numbers(x.array[rows], x.lo, x.hi), lambda mask: mask[rows])


def spread(value: Value, rows: NDArray[np.intp], lanes: int) -> Value:
    """The opposite of `take`: the value at `rows` of `lanes` lanes, 0 or absent on the others."""

    def wide(array: NDArray[Any]) -> NDArray[Any]:
        result = np.zeros(lanes, dtype=array.dtype)
        result[rows] = array
        return result

    return mapped(value, lambda x: Numbers(wide(x.array), min(x.lo, 0), max(x.hi, 0)), wide)
