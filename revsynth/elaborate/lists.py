"""Lists while an expression is elaborated: items, lengths, look-ups, membership and equality.

A number in place of a list is what an operation gave that always fails; it acts as an empty list.
"""

from __future__ import annotations

import ast
from collections.abc import Sequence
from typing import Any

from revsynth.elaborate.bitwise import select
from revsynth.elaborate.linear import equal as equal_numbers
from revsynth.elaborate.linear import linear, plain
from revsynth.elaborate.look_up import look_up, tables_of
from revsynth.elaborate.members import among
from revsynth.elaborate.numbers import Bits, Number, bounds_of, settled, truth_number, width_for
from revsynth.elaborate.operators import add, binary, compare, subtract
from revsynth.elaborate.reach import Reach
from revsynth.elaborate.values import Items, Stepped, Value, as_number, is_number
from revsynth.logic.network import FALSE, TRUE, Literal
from revsynth.spec import arithmetic, refusals
from revsynth.spec.arithmetic import Undefined
from revsynth.spec.limits import MAX_STEPS


def rounds(values: Value) -> int:
    """How many items a list has where it is longest."""
    if isinstance(values, Stepped):
        return max(bounds_of(values.length)[1], 0)
    if isinstance(values, Items):
        return len(values.values)
    return len(values) if isinstance(values, list | tuple | range) else 0


def round_of(values: Value, number: int, reach: Reach) -> tuple[Value, Literal]:
    """Item `number` of a list, counting items that may be absent, and where it is there."""
    if isinstance(values, Items):
        return values.values[number], values.present[number]
    if isinstance(values, Stepped):
        return _step(values, number, reach), compare(ast.Gt, values.length, number, reach.builder)
    assert isinstance(values, Sequence)
    return values[number], TRUE


def _step(values: Stepped, index: Number, reach: Reach) -> Number:
    offset = binary(ast.Mult, values.step, index, reach)
    return plain(reach.builder, add(values.start, offset, reach))


def length(values: Value, reach: Reach) -> Number:
    """Number of items."""
    if isinstance(values, Stepped):
        return values.length
    if isinstance(values, Items):
        terms: list[tuple[Number, int]] = [(truth_number(present), 1) for present in values.present]
        return plain(reach.builder, linear(reach.builder, terms, 0, len(values.values)))
    return rounds(values)


def stepped(ends: Sequence[Number], reach: Reach) -> Value:
    """range(...) of numbers; it fails where the step is 0."""
    builder = reach.builder
    if all(isinstance(end, int) for end in ends):
        return _fixed_range([int(end) for end in ends if isinstance(end, int)], reach)
    start, stop = (0, ends[0]) if len(ends) == 1 else (ends[0], ends[1])
    step: Number = plain(builder, ends[2]) if len(ends) == 3 else 1
    zero = equal_numbers(builder, step, 0)
    reach.fail(zero, refusals.RANGE_STEP)
    if zero == TRUE:
        return []
    inside = reach.narrow(zero ^ 1)
    assert inside is not None
    # ceil((stop - start) / step), which is right for both signs of the step, as -((start - stop) // step)
    back = binary(ast.FloorDiv, subtract(start, stop, reach), step, inside)
    count = subtract(0, back, reach)
    positive = compare(ast.Gt, count, 0, builder)
    if positive == FALSE:
        return []
    return Stepped(plain(builder, start), step, plain(builder, select(builder, positive, count, 0)))


def _fixed_range(ends: list[int], reach: Reach) -> Value:
    try:
        values = arithmetic.stepped_range(*ends)
    except Undefined as undefined:
        reach.fail(TRUE, undefined.refusal, **undefined.fields)
        return []
    too_long = -((values.start - values.stop) // values.step) > MAX_STEPS  # only where it is never reached
    return [] if too_long else values


def item(values: Value, index: Number, reach: Reach) -> Value:
    """values[index], counting from the end for negative indexes; it fails where there is no such item."""
    builder = reach.builder
    size = length(values, reach)
    most = bounds_of(size)[1]
    index = plain(builder, index)
    shown = {"index": index, "length": most}
    if is_number(values) or most == 0:
        reach.fail(TRUE, refusals.INDEX_REACHED, **shown)
        return 0
    low, high = bounds_of(index)
    above = compare(ast.GtE, index, size, builder)
    below = compare(ast.Lt, add(index, size, reach), 0, builder)
    reach.fail(builder.or_(above, below), refusals.INDEX_REACHED, **shown)
    if low < 0:
        negative = compare(ast.Lt, index, 0, builder)
        index = plain(builder, select(builder, negative, add(index, size, reach), index))
    low, high = max(bounds_of(index)[0], 0), min(bounds_of(index)[1], most - 1)
    if low > high:
        return 0
    return _at(values, index if isinstance(index, int) else _inside(index, low, high), reach)


def _inside(index: Bits, low: int, high: int) -> int | Bits:
    """An index as the items of a list need it: what is outside has failed."""
    literals = index.literals[:-1] if index.lo < 0 else index.literals
    return settled(literals, low, high)


def contains(values: Value, x: Value, reach: Reach) -> Literal:
    """x in values."""
    builder = reach.builder
    if is_number(x):
        number = as_number(x)
        if isinstance(values, Stepped):
            return _in_steps(values, number, reach)
        constants = _constants(values)
        if constants is not None:
            return among(builder, number, constants)
        x = plain(builder, number) if rounds(values) > 1 else number
    found = []
    for number_of in range(rounds(values)):
        value, present = round_of(values, number_of, reach)
        found.append(builder.and_(equal(value, x, reach), present))
    return builder.any_of(found)


def _constants(values: Value) -> Sequence[int] | None:
    """The numbers of a list that does not depend on the input."""
    if isinstance(values, range):
        return values
    if isinstance(values, list | tuple) and all(isinstance(value, int) for value in values):
        return values
    return None


def _in_steps(values: Stepped, x: Number, reach: Reach) -> Literal:
    builder = reach.builder
    inside = reach.narrow(compare(ast.NotEq, values.step, 0, builder))
    if inside is None:
        return FALSE
    steps = plain(builder, subtract(x, values.start, reach))
    quotient = plain(builder, binary(ast.FloorDiv, steps, values.step, inside))
    parts = (
        compare(ast.Eq, binary(ast.Mod, steps, values.step, inside), 0, builder),
        compare(ast.GtE, quotient, 0, builder),
        compare(ast.Lt, quotient, values.length, builder),
    )
    return builder.all_of(parts)


def equal(x: Value, y: Value, reach: Reach) -> Literal:
    """x == y, for two numbers or two lists."""
    builder = reach.builder
    if is_number(x) and is_number(y):
        return compare(ast.Eq, as_number(x), as_number(y), builder)
    if is_number(x) or is_number(y):
        return FALSE
    left, right = length(x, reach), length(y, reach)
    found = [compare(ast.Eq, left, right, builder)]
    for number in range(min(bounds_of(left)[1], bounds_of(right)[1])):
        if found[-1] == FALSE:
            return FALSE
        same = equal(_at(x, number, reach), _at(y, number, reach), reach)
        found.append(builder.or_(same, compare(ast.LtE, left, number, builder)))
    return builder.all_of(found)


def display(values: Sequence[Value]) -> Value:
    """The list of some values: a plain one where no value depends on the input."""
    if any(isinstance(value, Items | Stepped) or not isinstance(value, _PLAIN) for value in values):
        return Items(tuple(values), (TRUE,) * len(values))
    return list(values)


_PLAIN = (int, list, tuple, range)


def joined(condition: Literal, x: Value, y: Value, reach: Reach) -> Value:
    """x where the condition holds, y elsewhere: two numbers, or two lists."""
    if is_number(x) and is_number(y):
        return select(reach.builder, condition, as_number(x), as_number(y))
    values: list[Value] = []
    present: list[Literal] = []
    for part, where in ((x, condition), (y, condition ^ 1)):
        listing = _itemised(part, reach)
        values.extend(listing.values)
        present.extend(reach.builder.and_(there, where) for there in listing.present)
    return Items(tuple(values), tuple(present))


def _itemised(values: Value, reach: Reach) -> Items:
    parts = [round_of(values, number, reach) for number in range(rounds(values))]
    return Items(tuple(value for value, _ in parts), tuple(present for _, present in parts))


def unpack(values: Value, wanted: int, reach: Reach) -> list[Value]:
    """The items of a list of exactly `wanted`; it fails where there are more or fewer."""
    if is_number(values):
        return [0] * wanted
    size = length(values, reach)
    wrong = compare(ast.NotEq, size, wanted, reach.builder)
    reach.fail(wrong, refusals.UNPACK_REACHED, given=bounds_of(size)[1], wanted=wanted)
    if bounds_of(size)[1] < wanted:
        return [0] * wanted
    return [_at(values, number, reach) for number in range(wanted)]


def _at(values: Value, index: Number, reach: Reach) -> Value:
    """Item `index` >= 0; anything where there is no such item."""
    if isinstance(values, Stepped):
        return _step(values, index, reach)
    if isinstance(values, Items) and any(present != TRUE for present in values.present):
        return _scan(values, index, reach)
    listed = values.values if isinstance(values, Items) else values
    if not isinstance(listed, list | tuple | range):
        return 0
    if isinstance(index, int):
        return listed[index] if 0 <= index < len(listed) else 0
    number = plain(reach.builder, index)
    assert isinstance(number, Bits)
    if _constants(listed) is not None:
        return _constant_item(listed, number, reach)
    return _chosen(listed, number, reach)


def _constant_item(values: Sequence[Any], index: Bits, reach: Reach) -> Number:
    """An item of a constant list: a table; what lies behind its end is what makes selections fewer."""
    listed = [int(value) for value in values[: index.hi + 1]]
    used = listed[index.lo :]
    for place in range(len(listed), 1 << len(index.literals)):
        listed.append(listed[place ^ (1 << place.bit_length() - 1)])
    lo, hi = min(used), max(used)
    tables = tables_of(listed, width_for(lo, hi))
    return settled(look_up(reach.builder, index.literals, tables), lo, hi)


def _chosen(values: Sequence[Value], index: Bits, reach: Reach) -> Value:
    """An item of a list: selections by the bits of the index, from the lowest bit on."""
    level: list[Value] = list(values[: index.hi + 1])
    for literal in index.literals:
        paired = [
            joined(literal, level[place + 1], level[place], reach) for place in range(0, len(level) - 1, 2)
        ]
        if len(level) % 2:
            paired.append(level[-1])
        level = paired
    return level[0]


def _scan(values: Items, index: Number, reach: Reach) -> Value:
    """Item `index` among those that are there."""
    builder = reach.builder
    result: Value | None = None
    seen: Number = 0
    for value, present in zip(values.values, values.present, strict=True):
        here = builder.and_(compare(ast.Eq, seen, index, builder), present)
        if result is None or here == TRUE:
            result = value
        elif here != FALSE:
            result = joined(here, value, result, reach)
        seen = plain(builder, add(seen, truth_number(present), reach))
    return 0 if result is None else result
