"""Bit-plane arithmetic modulo 8 against integers."""

from __future__ import annotations

from hypothesis import given
from hypothesis import strategies as st

from revsynth.verification.phases import (
    NO_PHASE,
    Phases,
    added,
    at_lane,
    chosen,
    constant,
    difference,
    negated,
    turned,
)

LANES = 16
ONES = (1 << LANES) - 1
planes = st.tuples(*[st.integers(0, ONES)] * 3)
columns = st.integers(0, ONES)


def values(phases: Phases) -> list[int]:
    return [at_lane(phases, lane) for lane in range(LANES)]


@given(planes, planes, columns, st.integers(0, 7))
def test_arithmetic_modulo_eight(one: Phases, other: Phases, where: int, amount: int) -> None:
    here = [where >> lane & 1 for lane in range(LANES)]
    a, b = values(one), values(other)
    assert values(turned(one, where, amount)) == [(x + w * amount) % 8 for x, w in zip(a, here, strict=True)]
    assert values(added(one, where, other)) == [(x + w * y) % 8 for x, y, w in zip(a, b, here, strict=True)]
    assert values(negated(one, where)) == [(-x if w else x) % 8 for x, w in zip(a, here, strict=True)]
    assert values(difference(one, other, ONES)) == [(x - y) % 8 for x, y in zip(a, b, strict=True)]
    assert values(chosen(where, one, other)) == [x if w else y for x, y, w in zip(a, b, here, strict=True)]


@given(planes, st.integers(0, 7))
def test_constant(phases: Phases, amount: int) -> None:
    assert constant(turned(NO_PHASE, ONES, amount), ONES) == amount
    same = len(set(values(phases))) == 1
    assert (constant(phases, ONES) is not None) == same
