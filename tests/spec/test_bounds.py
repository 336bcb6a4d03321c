"""Interval arithmetic holds every result, checked against all values of small and random intervals."""

from __future__ import annotations

import ast
import itertools

import pytest
from hypothesis import given
from hypothesis import strategies as st

from revsynth.spec import arithmetic, bounds
from revsynth.spec.arithmetic import Undefined

SMALL = [(low, high) for low in range(-4, 5) for high in range(low, 5)]
ends = st.one_of(
    st.integers(-9, 9), st.integers(-(2**70), 2**70), st.sampled_from([2**63, -(2**63), 2**31, 5000])
)


@pytest.mark.parametrize("op", list(bounds.BINARY), ids=lambda op: op.__name__)
def test_small_intervals_hold_all_results(op: type[ast.operator]) -> None:
    for x, y in itertools.product(SMALL, SMALL):
        low, high = bounds.BINARY[op](x, y)
        for p, q in itertools.product(range(x[0], x[1] + 1), range(y[0], y[1] + 1)):
            try:
                assert low <= arithmetic.BINARY[op](p, q) <= high
            except Undefined:
                continue


@given(st.sampled_from(list(bounds.BINARY)), *[st.tuples(ends, ends, st.floats(0, 1))] * 2)
def test_large_intervals_hold_their_results(
    op: type[ast.operator], first: tuple[int, int, float], second: tuple[int, int, float]
) -> None:
    points, intervals = [], []
    for one, other, share in (first, second):
        low, high = min(one, other), max(one, other)
        intervals.append((low, high))
        points.append(low + int((high - low) * int(share * 1000) // 1000))
    low, high = bounds.BINARY[op](*intervals)
    for p, q in itertools.product({*intervals[0], points[0]}, {*intervals[1], points[1]}):
        try:
            assert low <= arithmetic.BINARY[op](p, q) <= high
        except Undefined:
            continue


def test_intervals_of_one_sided_operations() -> None:
    for x in SMALL:
        numbers = range(x[0], x[1] + 1)
        assert bounds.negate(x) == (min(-p for p in numbers), max(-p for p in numbers))
        assert bounds.invert(x) == (min(~p for p in numbers), max(~p for p in numbers))
        assert bounds.absolute(x) == (min(map(abs, numbers)), max(map(abs, numbers)))
        for y in SMALL:
            others = range(y[0], y[1] + 1)
            assert bounds.least(x, y) == (min(x[0], y[0]), min(x[1], y[1]))
            assert bounds.greatest(x, y)[1] == max(max(numbers), max(others))


def test_the_edges_of_64_bits() -> None:
    assert bounds.fits_int64((-(2**63), 2**63 - 1))
    assert not bounds.fits_int64((-(2**63) - 1, 0))
    assert not bounds.fits_int64((0, 2**63))
    assert bounds.word(8, False) == (0, 255)
    assert bounds.word(8, True) == (-128, 127)
