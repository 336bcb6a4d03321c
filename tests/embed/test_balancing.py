"""Swaps that even an output out, and the lines they go along, checked state by state."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from revsynth.embed.balancing import evening_swaps, signed, splitting_order, swapping
from revsynth.logic.truth_table import pack


def uneven(values: list[int]) -> bool:
    return max(values.count(1), values.count(-1)) > len(values) // 2


@st.composite
def even_values(draw: st.DrawFn, size: int) -> list[int]:
    """`size` values of +1, -1 and 0, none of the signs in more than half of them."""
    ones = draw(st.integers(0, size // 2))
    zeros = draw(st.integers(0, size // 2))
    return draw(st.permutations([1] * ones + [-1] * zeros + [0] * (size - ones - zeros)))


@given(st.data())
def test_swaps_leave_both_halves_even(data: st.DataObject) -> None:
    pairs = data.draw(st.sampled_from([2, 4, 8]))
    blocks = [data.draw(even_values(2 * pairs)) for _ in range(data.draw(st.integers(1, 3)))]
    both = np.array(blocks, dtype=np.int8).reshape(-1, 2, pairs)
    swap = evening_swaps(both[:, 0], both[:, 1])
    for block, chosen in zip(both.tolist(), swap.tolist(), strict=True):
        zero = [
            pair[1] if turn else pair[0] for pair, turn in zip(zip(*block, strict=True), chosen, strict=True)
        ]
        one = [
            pair[0] if turn else pair[1] for pair, turn in zip(zip(*block, strict=True), chosen, strict=True)
        ]
        assert not uneven(zero)
        assert not uneven(one)
        if not uneven(block[0]) and not uneven(block[1]):
            assert not any(chosen), "an even block is left alone"


def test_the_roundest_first_pairs_are_swapped() -> None:
    zero = np.array([[1, 1, 1, 1]], dtype=np.int8)
    assert evening_swaps(zero, -zero).tolist() == [[True, True, False, False]]


def test_where_no_first_pairs_do_the_helpful_ones_are_swapped() -> None:
    """Along the first pairs the ones get fewer only after the zeros have become too many."""
    zero = np.array([[1, 0, 1, 1]], dtype=np.int8)
    one = np.array([[0, -1, 0, -1]], dtype=np.int8)
    swap = evening_swaps(zero, one)[0]
    after = [b if turn else a for a, b, turn in zip(zero[0], one[0], swap, strict=True)]
    assert not uneven([int(value) for value in after])


def test_pairs_alone_have_nothing_to_be_spread_over() -> None:
    with pytest.raises(ValueError, match="nothing to be spread over"):
        evening_swaps(np.ones((1, 1), dtype=np.int8), -np.ones((1, 1), dtype=np.int8))


@given(st.data())
def test_gates_along_the_lines_make_the_output_differ_across_the_last(data: st.DataObject) -> None:
    lines = data.draw(st.integers(1, 5))
    values = np.array(data.draw(even_values(1 << lines)), dtype=np.int8)
    last = data.draw(st.integers(0, lines - 1))
    order = splitting_order(values, lines, last, ())
    state = np.arange(1 << lines)
    for place, line in enumerate(order):
        below = (last, *reversed(order[place + 1 :]))
        condition, matters = swapping(values, lines, line, below)
        assert np.array_equal(condition, condition[state ^ (1 << line)])
        assert np.array_equal(matters, values != values[state ^ (1 << line)])
        values = values[state ^ (condition.astype(np.int64) << line)]
        blocks: dict[int, list[int]] = {}
        for s, value in enumerate(values.tolist()):
            blocks.setdefault(s & ~sum(1 << other for other in below), []).append(value)
        assert not any(uneven(block) for block in blocks.values())
    assert not np.any((values == values[state ^ (1 << last)]) & (values != 0))


def test_settled_lines_are_not_used_and_what_needs_them_is_refused() -> None:
    values = np.array([1, 1, -1, -1], dtype=np.int8)
    assert splitting_order(values, 2, 0, ()) == [1]
    assert splitting_order(values, 2, 1, (0,)) == []
    with pytest.raises(ValueError, match="not even where the settled lines are the same"):
        splitting_order(values, 2, 0, (1,))


def test_signs() -> None:
    values, fixed = pack(np.array([0, 1, 0, 0])), pack(np.array([1, 1, 0, 0]))
    assert signed(values, fixed, 2).tolist() == [-1, 1, 0, 0]
