"""Inputs added to inputs: the function of the new inputs is the old one, and carries get short."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from revsynth.embed import shearing
from revsynth.embed.shearing import sheared
from revsynth.logic.decomposition import decompose
from revsynth.logic.exclusive_sum import cube_prices
from revsynth.logic.truth_table import pack, unpack
from tests.logic.tables import random_column


@given(st.integers(2, 7), st.integers(0, 99), st.data())
def test_the_function_of_the_new_inputs_is_the_old_one(inputs: int, seed: int, data: st.DataObject) -> None:
    column = random_column(inputs, seed)
    changeable = data.draw(st.lists(st.integers(0, inputs - 1), unique=True))
    with pytest.MonkeyPatch.context() as patch:
        patch.setattr(shearing, "FEWEST_CUBES", 2)
        patch.setattr(shearing, "WORTHWHILE", 0.99)
        steps, new = sheared(column, inputs, changeable, cube_prices(inputs))
    state = np.arange(1 << inputs)
    for place, other in steps:
        assert place in changeable
        state ^= ((state >> other) & 1) << place
    assert unpack(new, inputs)[state].tolist() == unpack(column, inputs).tolist()


def test_a_carry_becomes_a_chain() -> None:
    x = np.arange(1 << 12)
    carry = pack((x & 63) + (x >> 6) > 63)
    prices = cube_prices(12)
    steps, new = sheared(carry, 12, range(6), prices)
    before, after = decompose(carry[None], 12, prices), decompose(new[None], 12, prices)
    assert before is not None
    assert after is not None
    assert len(before) == 63
    assert len(after) <= 7
    assert set(steps) <= {(i, i + 6) for i in range(6)}


def test_short_sums_irregular_ones_and_wide_ones_are_left_alone() -> None:
    x = np.arange(1 << 12)
    for column in (pack(x == 5), random_column(12, 1)):
        steps, same = sheared(column, 12, range(12), cube_prices(12))
        assert not steps
        assert same is column
    wide = np.zeros(1 << 17, dtype=np.uint64)
    assert sheared(wide, 23, range(23), cube_prices(23)) == ([], wide)
