"""The direction along which an output changes most, against counting pairs one by one."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from revsynth.embed.directions import autocorrelation, fewest_clashes


def counted(values: list[int], direction: int) -> int:
    """Pairs of states x, x ^ direction with the same fixed value."""
    return sum(
        value != 0 and value == values[x ^ direction] for x, value in enumerate(values) if x < x ^ direction
    )


@given(
    st.integers(1, 5).flatmap(
        lambda n: st.lists(st.sampled_from([-1, 0, 1]), min_size=1 << n, max_size=1 << n)
    )
)
def test_the_best_direction_is_the_best_of_all(values: list[int]) -> None:
    lines = len(values).bit_length() - 1
    array = np.array(values, dtype=np.int8)
    found, direction = fewest_clashes(array, lines, ())
    assert found == counted(values, direction) == min(counted(values, v) for v in range(1, 1 << lines))
    sums = [sum(values[x] * values[x ^ v] for x in range(1 << lines)) for v in range(1 << lines)]
    assert autocorrelation(array, lines).tolist() == sums


def test_a_majority_changes_when_all_votes_do() -> None:
    """Common practice: a majority of an odd number of votes is self-dual."""
    values = np.array([1 if x.bit_count() >= 3 else -1 for x in range(32)], dtype=np.int8)
    assert fewest_clashes(values, 5, ()) == (0, 31)
    clashes, direction = fewest_clashes(values, 5, (2,))
    assert clashes
    assert not direction >> 2 & 1


def test_too_many_lines_are_refused() -> None:
    with pytest.raises(ValueError, match="25 lines are too many for the transforms: at most 24"):
        fewest_clashes(np.zeros(1, dtype=np.int8), 25, ())
