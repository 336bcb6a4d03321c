"""Reversible targets and their completion."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from revsynth.embed.target import ReversibleTarget, complete


@st.composite
def targets(draw: st.DrawFn, max_lines: int = 4) -> ReversibleTarget:
    """A target that some permutation meets."""
    lines = draw(st.integers(1, max_lines))
    table = np.array(draw(st.permutations(range(1 << lines))))
    full = (1 << lines) - 1
    fixed = np.array(draw(st.lists(st.integers(0, full), min_size=full + 1, max_size=full + 1)))
    return ReversibleTarget(lines, fixed, table & fixed)


@given(targets())
def test_a_completion_is_a_permutation_that_the_target_accepts(target: ReversibleTarget) -> None:
    table = complete(target)
    assert table is not None
    assert sorted(table.tolist()) == list(range(1 << target.lines))
    assert target.accepts(table)


@given(st.integers(1, 3), st.data())
def test_no_completion_is_reported_exactly_where_there_is_none(lines: int, data: st.DataObject) -> None:
    """Against Hall's theorem, by trying all sets of states (common practice)."""
    size = 1 << lines
    fixed = np.array(data.draw(st.lists(st.integers(0, size - 1), min_size=size, max_size=size)))
    image = fixed & np.array(data.draw(st.lists(st.integers(0, size - 1), min_size=size, max_size=size)))
    fits = [sum(1 << y for y in range(size) if y & int(fixed[x]) == int(image[x])) for x in range(size)]
    possible = True
    for subset in range(1 << size):
        reach = 0
        for x in range(size):
            if (subset >> x) & 1:
                reach |= fits[x]
        possible &= reach.bit_count() >= subset.bit_count()
    assert (complete(ReversibleTarget(lines, fixed, image)) is not None) == possible


def test_what_is_free_stays_where_it_is() -> None:
    fixed = np.array([0, 3, 0, 0])
    image = np.array([0, 2, 0, 0])
    assert complete(ReversibleTarget(2, fixed, image)).tolist() == [0, 2, 1, 3]


@pytest.mark.parametrize("outputs", [1, 3, 11, 12])
def test_large_targets_are_completed_by_pattern(outputs: int) -> None:
    size = 1 << 12
    value = np.random.default_rng(outputs).permutation(size) & ((1 << outputs) - 1)
    fixed = np.full(size, (1 << outputs) - 1, dtype=np.int64)
    target = ReversibleTarget(12, fixed, value)
    table = complete(target)
    assert table is not None
    assert np.array_equal(np.sort(table), np.arange(size))
    assert target.accepts(table)


def test_the_inverse_target_accepts_the_inverse_permutation() -> None:
    table = np.array([3, 0, 2, 1])
    fixed = np.array([3, 3, 0, 0])
    inverse = ReversibleTarget(2, fixed, table & fixed).inverse()
    assert inverse.accepts(np.argsort(table))
    assert inverse.cared == 2
    with pytest.raises(ValueError, match="half-fixed images"):
        ReversibleTarget(2, np.array([1, 0, 0, 0]), np.array([1, 0, 0, 0])).inverse()


def test_tables_of_the_wrong_size_or_value_are_refused() -> None:
    with pytest.raises(ValueError, match="tables of 4 states wanted"):
        ReversibleTarget(2, np.zeros(3, dtype=np.int64), np.zeros(3, dtype=np.int64))
    with pytest.raises(ValueError, match="must be 0 where they are free, and below 2"):
        ReversibleTarget(1, np.array([0, 0]), np.array([1, 0]))
