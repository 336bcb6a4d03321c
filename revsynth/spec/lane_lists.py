"""Lists on many inputs at once: their items, lengths, look-ups, membership and equality.

A plain number in place of a list is what an operation gave that failed on every lane; it acts as an
empty list.
"""

from __future__ import annotations

import ast
from collections.abc import Sequence
from typing import Any

import numpy as np
from numpy.typing import NDArray

from revsynth.spec import arithmetic
from revsynth.spec.arithmetic import Undefined
from revsynth.spec.bounds import fits_int64, union
from revsynth.spec.lane_numbers import binary, compare, instead, where_bad
from revsynth.spec.lane_values import (
    Items,
    Mask,
    Number,
    Numbers,
    Stepped,
    Value,
    bounds_of,
    plain,
    select,
    settled,
    truths,
)
from revsynth.spec.lanes import Lanes
from revsynth.spec.limits import MAX_STEPS

_FEW = 8
_TABLE = 1 << 20


def is_number(value: Value) -> bool:
    """True for a number, False for a list."""
    return isinstance(value, int | Numbers)


def rounds(values: Value) -> int:
    """How many items a list has on the lane where it is longest."""
    if isinstance(values, Stepped):
        return bounds_of(values.length)[1]
    if isinstance(values, Items):
        return len(values.values)
    return 0 if isinstance(values, int | Numbers) else len(values)


def round_of(values: Value, number: int, lanes: Lanes) -> tuple[Value, bool | Mask]:
    """Item `number` of a list, counting items that are absent too, and where it is there."""
    if isinstance(values, Items):
        present = values.present[number]
        return values.values[number], True if present is None else present
    if isinstance(values, Stepped):
        offset = binary(ast.Mult, values.step, number, lanes)
        return binary(ast.Add, values.start, offset, lanes), compare(ast.Gt, values.length, number)
    assert isinstance(values, Sequence)
    return values[number], True


def length(values: Value, lanes: Lanes) -> Number:
    """Number of items on each lane."""
    if isinstance(values, Stepped):
        return values.length
    total: Number = rounds(values)
    if isinstance(values, Items):
        masks = [present for present in values.present if present is not None]
        total = len(values.values) - len(masks)
        for mask in masks:
            total = binary(ast.Add, total, truths(mask), lanes)
    return total


def stepped(ends: Sequence[Number], lanes: Lanes) -> Value:
    """range(...) of numbers; it fails where the step is 0."""
    if not any(isinstance(end, Numbers) for end in ends):
        return _fixed_range([int(end) for end in ends if not isinstance(end, Numbers)], lanes)
    start, stop = (0, ends[0]) if len(ends) == 1 else (ends[0], ends[1])
    step: Number = ends[2] if len(ends) == 3 else 1
    zero = where_bad(lanes, compare(ast.Eq, step, 0))
    if zero is not None:
        step = instead(step, zero, 1)
    # ceil((stop - start) / step), which is right for both signs of the step, as -((start - stop) // step)
    back = binary(ast.FloorDiv, binary(ast.Sub, start, stop, lanes), step, lanes)
    count = binary(ast.Sub, 0, back, lanes)
    positive = compare(ast.Gt, count, 0)
    if positive is False or not isinstance(count, Numbers):
        return Stepped(start, step, count if positive is True else 0)
    # what failed or unused lanes hold may be of any size, so it must not decide how often a loop runs
    sound = lanes.sound()
    used = both(positive, True if sound is None else sound)
    lengths = plain(count) if used is True else np.where(used, plain(count), 0)
    return Stepped(start, step, settled(lengths, (int(lengths.min()), int(lengths.max()))))


def _fixed_range(ends: list[int], lanes: Lanes) -> Value:
    try:
        values = arithmetic.stepped_range(*ends)
    except Undefined:
        lanes.fail(True)
        return []
    too_long = -((values.start - values.stop) // values.step) > MAX_STEPS  # only where all lanes failed
    return [] if too_long else values


def item(values: Value, index: Number, lanes: Lanes) -> Value:
    """values[index], counting from the end for negative indexes; it fails where there is no such item."""
    size = length(values, lanes)
    if isinstance(values, int | Numbers) or bounds_of(size)[1] == 0:
        lanes.fail(True)
        return 0
    bad: Mask | None = None
    negative_size = binary(ast.Sub, 0, size, lanes)
    for outside in (compare(ast.GtE, index, size), compare(ast.Lt, index, negative_size)):
        found = where_bad(lanes, outside)
        if found is not None:
            bad = found if bad is None else bad | found
    if bad is not None:
        index = instead(index, bad, 0)
    below = compare(ast.Lt, index, 0)
    if below is True:
        index = binary(ast.Add, index, size, lanes)
    elif not isinstance(below, bool):
        index = select(below, binary(ast.Add, index, size, lanes), index)
    return _at(values, index, lanes)


def contains(values: Value, x: Value, lanes: Lanes) -> bool | Mask:
    """x in values."""
    if isinstance(values, Stepped) and isinstance(x, int | Numbers):
        steps = binary(ast.Sub, x, values.start, lanes)
        quotient = binary(ast.FloorDiv, steps, values.step, lanes)
        parts = (
            compare(ast.Eq, binary(ast.Mod, steps, values.step, lanes), 0),
            compare(ast.GtE, quotient, 0),
            compare(ast.Lt, quotient, values.length),
        )
        return both(both(parts[0], parts[1]), parts[2])
    if isinstance(x, Numbers) and isinstance(values, list | tuple | range) and len(values) > _FEW:
        return _among(values, x)
    found: bool | Mask = False
    for number in range(rounds(values)):
        value, present = round_of(values, number, lanes)
        found = either(found, both(equal(value, x, lanes), present))
        if found is True:
            break
    return found


def equal(x: Value, y: Value, lanes: Lanes) -> bool | Mask:
    """x == y, for two numbers or two lists."""
    if isinstance(x, int | Numbers) and isinstance(y, int | Numbers):
        return compare(ast.Eq, x, y)
    if is_number(x) or is_number(y):
        return False
    left, right = length(x, lanes), length(y, lanes)
    result = compare(ast.Eq, left, right)
    for number in range(min(bounds_of(left)[1], bounds_of(right)[1])):
        if result is False:
            break
        same = equal(_at(x, number, lanes), _at(y, number, lanes), lanes)
        result = both(result, either(same, compare(ast.LtE, left, number)))
    return result


def both(x: bool | Mask, y: bool | Mask) -> bool | Mask:
    """x and y, of conditions without side effects."""
    if isinstance(x, bool):
        return y if x else False
    if isinstance(y, bool):
        return x if y else False
    return x & y


def either(x: bool | Mask, y: bool | Mask) -> bool | Mask:
    """x or y, of conditions without side effects."""
    if isinstance(x, bool):
        return True if x else y
    if isinstance(y, bool):
        return True if y else x
    return x | y


def negated(condition: bool | Mask) -> bool | Mask:
    """not condition, of a condition without side effects."""
    return not condition if isinstance(condition, bool) else ~condition


def display(values: Sequence[Value]) -> Value:
    """The list of some values: a plain one where no value depends on the input."""
    if any(isinstance(value, Numbers | Items | Stepped) for value in values):
        return Items(tuple(values), (None,) * len(values))
    return list(values)


def joined(condition: Mask, x: Value, y: Value) -> Value:
    """On each lane the list x where the condition holds, y elsewhere; or numbers, likewise."""
    if isinstance(x, int | Numbers) and isinstance(y, int | Numbers):
        return select(condition, x, y)
    values: list[Value] = []
    present: list[Mask | None] = []
    for part, where in ((x, condition), (y, ~condition)):
        listing = itemised(part)
        values.extend(listing.values)
        present.extend(where if there is None else there & where for there in listing.present)
    return Items(tuple(values), tuple(present))


def itemised(values: Value) -> Items:
    """A list as its items one by one."""
    if isinstance(values, Items):
        return values
    if isinstance(values, Stepped):
        size = bounds_of(values.length)[1]
        items: list[Value] = []
        masks: list[Mask | None] = []
        for number in range(size):
            low = bounds_of(values.start)[0] + min(bounds_of(values.step)[0] * number, 0)
            high = bounds_of(values.start)[1] + max(bounds_of(values.step)[1] * number, 0)
            array = np.asarray(plain(values.start) + plain(values.step) * number)
            items.append(Numbers(array, low, high) if array.ndim else int(array))
            there = compare(ast.Gt, values.length, number)
            masks.append(None if there is True else there if not isinstance(there, bool) else None)
        return Items(tuple(items), tuple(masks))
    plain_items: Sequence[Any] = () if isinstance(values, int | Numbers) else values
    return Items(tuple(plain_items), (None,) * len(plain_items))


def unpack(values: Value, wanted: int, lanes: Lanes) -> list[Value]:
    """The items of a list of exactly `wanted`; it fails where there are more or fewer."""
    if is_number(values):
        return [0] * wanted
    size = length(values, lanes)
    if where_bad(lanes, compare(ast.NotEq, size, wanted)) is not None and bounds_of(size)[1] < wanted:
        return [0] * wanted
    return [_at(values, number, lanes) for number in range(wanted)]


def _at(values: Value, index: Number, lanes: Lanes) -> Value:
    """Item `index` >= 0 on each lane; anything where there is no such item."""
    if isinstance(values, Stepped):
        return binary(ast.Add, values.start, binary(ast.Mult, values.step, index, lanes), lanes)
    if isinstance(values, Items):
        if all(present is None for present in values.present):
            return _pick(values.values, index)
        return _scan(values, index, lanes)
    if isinstance(values, int | Numbers):
        return 0
    if not isinstance(index, Numbers):
        return values[index] if 0 <= index < len(values) else 0
    return _look_up(values, index, lanes)


def _pick(values: Sequence[Value], index: Number) -> Value:
    if not isinstance(index, Numbers):
        return values[index] if 0 <= index < len(values) else 0
    result: Value = values[0]
    for number in range(1, len(values)):
        here = compare(ast.Eq, index, number)
        if here is True:
            result = values[number]
        elif not isinstance(here, bool):
            result = joined(here, values[number], result)
    return result


def _scan(values: Items, index: Number, lanes: Lanes) -> Value:
    """Item `index` among those that are there, counted lane by lane."""
    result: Value | None = None
    seen: Number = 0
    for value, present in zip(values.values, values.present, strict=True):
        here = both(compare(ast.Eq, seen, index), True if present is None else present)
        if result is None or here is True:
            result = value
        elif not isinstance(here, bool):
            result = joined(here, value, result)
        seen = binary(ast.Add, seen, 1 if present is None else truths(present), lanes)
    return 0 if result is None else result


def _look_up(values: Sequence[Any], index: Numbers, lanes: Lanes) -> Value:
    """Items of a constant list: one gather, or one for each place where the items are lists."""
    rows = np.clip(plain(index), 0, len(values) - 1).astype(np.int64)
    if not any(isinstance(value, list | tuple | range) for value in values):
        table, low, high = _table(values, lanes)
        return settled(table[rows], (low, high))
    columns, sizes = _columns(values, lanes)
    place_rows = Numbers(rows, 0, len(values) - 1)
    return Items(
        tuple(_look_up(column, place_rows, lanes) for column in columns),
        tuple(None if (there := sizes > place).all() else there[rows] for place in range(len(columns))),
    )


def _columns(values: Sequence[Any], lanes: Lanes) -> tuple[list[list[Any]], NDArray[np.int64]]:
    """The items of lists by their place, and how long each list is."""
    known = lanes.shared.tables.get(id(values))
    if known is None:
        sizes = np.array([len(value) for value in values], dtype=np.int64)
        columns = [
            [value[place] if place < len(value) else _like(values, place) for value in values]
            for place in range(int(sizes.max()))
        ]
        known = (values, (columns, sizes))
        lanes.shared.tables[id(values)] = known
    result: tuple[list[list[Any]], NDArray[np.int64]] = known[1]
    return result


def _like(values: Sequence[Any], place: int) -> Any:
    """What stands in for an absent item: one of the same kind."""
    return next(value[place] for value in values if place < len(value))


def _table(values: Sequence[Any], lanes: Lanes) -> tuple[NDArray[Any], int, int]:
    known = lanes.shared.tables.get(id(values))
    if known is None:
        low, high = int(min(values)), int(max(values))
        boolean = all(isinstance(value, bool) for value in values)
        dtype: Any = np.bool_ if boolean else np.int64 if fits_int64((low, high)) else object
        entries = list(values) if boolean else [int(value) for value in values]
        known = (values, (np.array(entries, dtype=dtype), low, high))
        lanes.shared.tables[id(values)] = known
    table: tuple[NDArray[Any], int, int] = known[1]
    return table


def _among(values: Sequence[Any], x: Numbers) -> bool | Mask:
    """x in a constant list of numbers: one gather where x has few values, else a search."""
    inside = sorted({int(value) for value in values if x.lo <= value <= x.hi})
    if not inside:
        return False
    if x.hi - x.lo < _TABLE:
        marks = np.zeros(x.hi - x.lo + 1, dtype=np.bool_)
        marks[[value - x.lo for value in inside]] = True
        found: Mask = marks[(plain(x) - x.lo).astype(np.int64)]
        return found
    if fits_int64(union((x.lo, x.hi), (inside[0], inside[-1]))):
        return np.isin(plain(x), np.array(inside, dtype=np.int64))
    chosen = frozenset(inside)
    return np.array([value in chosen for value in x.array], dtype=np.bool_)
