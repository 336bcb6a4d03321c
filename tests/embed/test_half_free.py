"""Half-free values: settled so that no value is given too often, and only where something is fixed."""

from __future__ import annotations

from collections import Counter

import pytest
from hypothesis import given
from hypothesis import strategies as st

from revsynth.embed.half_free import wholly_fixed
from revsynth.embed.in_place import tables
from revsynth.embed.multiplicity import output_multiplicity, shared_out
from revsynth.logic.function import Function
from tests.logic.tables import functions
from tests.synthesis.checks import from_table


@given(functions(max_inputs=4, max_outputs=3))
def test_no_value_occurs_more_often_than_it_must(function: Function) -> None:
    most = output_multiplicity(function)
    settled = wholly_fixed(function, most)
    values, care = tables(function)
    chosen, fixed = tables(settled)
    full = (1 << function.outputs) - 1
    assert [int(mask) for mask in fixed] == [full if mask else 0 for mask in care]
    assert not ((chosen ^ values) & care).any()
    times = Counter(int(value) for value, mask in zip(chosen, fixed, strict=True) if mask)
    assert max(times.values(), default=0) <= most


def test_free_bits_are_0_where_that_does_it() -> None:
    function = from_table(2, 2, [0, 0, 0, 0], [0b01, 0b01, 0, 0])
    assert tables(wholly_fixed(function, 2))[0].tolist() == [0, 0, 0, 0]
    assert tables(wholly_fixed(function, 1))[0].tolist() == [0, 2, 0, 0]


def test_groups_of_many_completions_take_what_is_left() -> None:
    assert shared_out([(1, 0, 2), (2, 0b111, 0)], 1) == [{2: 1}, {0: 1, 1: 1}]
    assert shared_out([(3, 0b1, 4), (1, 0, 4)], 2) == [{4: 1, 5: 2}, {4: 1}]


@given(
    st.lists(st.tuples(st.integers(1, 3), st.integers(0, 7), st.integers(0, 7)), max_size=4),
    st.integers(1, 3),
)
def test_shares_add_up(groups: list[tuple[int, int, int]], most: int) -> None:
    groups = [(count, free, value & ~free) for count, free, value in groups]
    try:
        shares = shared_out(groups, most)
    except ValueError:
        return
    load: Counter[int] = Counter()
    for (count, free, value), share in zip(groups, shares, strict=True):
        assert sum(share.values()) == count
        assert all(choice & ~free == value for choice in share)
        load.update(share)
    assert max(load.values(), default=0) <= most


def test_too_few_values_are_refused() -> None:
    with pytest.raises(ValueError, match="some output value must occur more than 1 times"):
        shared_out([(3, 0b1, 4)], 1)
