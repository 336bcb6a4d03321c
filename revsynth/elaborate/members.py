"""Whether a number is one of some constants: selections along its bits, sets that are equal built once."""

from __future__ import annotations

from collections.abc import Sequence

from revsynth.elaborate.linear import equal, less, plain
from revsynth.elaborate.look_up import look_up
from revsynth.elaborate.numbers import Bits, Number, bounds_of
from revsynth.logic.network import FALSE, TRUE, Literal
from revsynth.logic.network_builder import NetworkBuilder

_TABLE_BITS = 10


def among(builder: NetworkBuilder, x: Number, constants: Sequence[int]) -> Literal:
    """Where x is one of the constants."""
    lo, hi = bounds_of(x)
    members = sorted({int(value) for value in constants if lo <= value <= hi})
    if not members:
        return FALSE
    if len(members) == hi - lo + 1:
        return TRUE
    if len(members) == 1:
        return equal(builder, x, members[0])
    number = plain(builder, x)
    if isinstance(number, int):
        return TRUE if number in members else FALSE
    if members[-1] - members[0] == len(members) - 1:
        return builder.and_(less(builder, members[0] - 1, number), less(builder, number, members[-1] + 1))
    width = len(number.literals)
    patterns = sorted({member & ((1 << width) - 1) for member in members})
    if width <= _TABLE_BITS:
        return look_up(builder, number.literals, [sum(1 << pattern for pattern in patterns)])[0]
    return _along(builder, number, patterns)


def _along(builder: NetworkBuilder, number: Bits, patterns: list[int]) -> Literal:
    """Where the bit pattern is one of some ascending patterns; recursion is as deep as the number is wide.

    Level by level from the highest bit on the sets of what may follow are found, then built from the lowest
    bit on, equal sets once.
    """
    levels: list[dict[tuple[int, ...], None]] = [{tuple(patterns): None}]
    for place in range(len(number.literals) - 1, -1, -1):
        below: dict[tuple[int, ...], None] = {}
        for one in levels[-1]:
            for half in _halves(one, place):
                below[half] = None
        levels.append(below)
    built: dict[tuple[int, ...], Literal] = {one: TRUE if one else FALSE for one in levels[-1]}
    for place, sets in enumerate(reversed(levels[:-1])):
        upper = {}
        for one in sets:
            low, high = _halves(one, place)
            upper[one] = builder.mux(number.literals[place], built[high], built[low])
        built = upper
    return built[tuple(patterns)]


def _halves(patterns: tuple[int, ...], place: int) -> tuple[tuple[int, ...], tuple[int, ...]]:
    """What may follow below a bit where it is 0, and where it is 1."""
    step = 1 << place
    low = tuple(pattern for pattern in patterns if not pattern & step)
    return low, tuple(pattern ^ step for pattern in patterns if pattern & step)
