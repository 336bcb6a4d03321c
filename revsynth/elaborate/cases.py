"""Operations on numbers with so few cases that they are tabulated with Python's own integers."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from typing import Any

from revsynth.elaborate.linear import plain
from revsynth.elaborate.look_up import look_up, tables_of
from revsynth.elaborate.numbers import Bits, Number, settled, width_for
from revsynth.elaborate.reach import Reach
from revsynth.logic.network_builder import NetworkBuilder
from revsynth.spec.arithmetic import Undefined
from revsynth.spec.refusals import Refusal

MOST_BITS = 8
"""Bits that all operands together may depend on."""


def few_cases(builder: NetworkBuilder, *numbers: Number) -> bool:
    """Whether numbers take few combinations of values."""
    return len(_nodes([plain(builder, number) for number in numbers])) <= MOST_BITS


def by_cases(operation: Callable[..., int], numbers: Sequence[Number], reach: Reach) -> Number:
    """operation(*numbers), which raises Undefined where it is not defined."""
    known = [plain(reach.builder, number) for number in numbers]
    nodes = _nodes(known)
    values: list[int] = []
    lo = hi = None
    failing: dict[Refusal, list[int]] = {}
    shown: dict[Refusal, dict[str, Any]] = {}
    for index in range(1 << len(nodes)):
        at = {node: index >> place & 1 for place, node in enumerate(nodes)}
        operands = [_value(number, at) for number in known]
        result = values[index ^ (1 << index.bit_length() - 1)] if index else 0
        if all(_inside(number, operand) for number, operand in zip(known, operands, strict=True)):
            try:
                result = int(operation(*operands))
                lo, hi = (result, result) if lo is None or hi is None else (min(lo, result), max(hi, result))
            except Undefined as undefined:
                failing.setdefault(undefined.refusal, []).append(index)
                shown.setdefault(undefined.refusal, undefined.fields)
        values.append(result)
    index_bits = [2 * node for node in nodes]
    for refusal, places in failing.items():
        table = sum(1 << place for place in places)
        reach.fail(look_up(reach.builder, index_bits, [table])[0], refusal, **shown[refusal])
    if lo is None or hi is None:
        return 0
    tables = tables_of(values, width_for(lo, hi))
    return settled(look_up(reach.builder, index_bits, tables), lo, hi)


def _nodes(numbers: Sequence[int | Bits]) -> list[int]:
    """The nodes that the bits of some numbers are, constants left out."""
    found = {
        literal >> 1: None for number in numbers if isinstance(number, Bits) for literal in number.literals
    }
    found.pop(0, None)
    return list(found)


def _value(number: int | Bits, at: dict[int, int]) -> int:
    if isinstance(number, int):
        return int(number)
    value = 0
    for place, literal in enumerate(number.literals):
        value |= (at.get(literal >> 1, 0) ^ (literal & 1)) << place
    return (
        value - (1 << len(number.literals)) if number.lo < 0 and value >> len(number.literals) - 1 else value
    )


def _inside(number: int | Bits, value: int) -> bool:
    return isinstance(number, int) or number.lo <= value <= number.hi
