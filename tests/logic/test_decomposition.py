"""Exact sums of four inputs, and decomposition down to them."""

from __future__ import annotations

from itertools import product

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from revsynth.logic import decomposition
from revsynth.logic.decomposition import decompose
from revsynth.logic.four_inputs import CUBES, FourInputSums, five_input_cubes, four_input_sums
from tests.logic.tables import columns_of, from_rule, random_column, tables


@pytest.fixture(scope="module")
def fewest() -> FourInputSums:
    return four_input_sums((1, 1, 1, 1, 1))


def test_the_numbers_of_functions_by_cubes(fewest: FourInputSums) -> None:
    """At most 6 cubes and 3.66 on average: Sasao, Besslich, IEEE Trans. Computers 39(2), 1990 (from memory).

    The whole distribution was recounted by a search of this project's own.
    """
    assert np.bincount(fewest.cost).tolist() == [1, 81, 2268, 21744, 37530, 3888, 24]
    assert round(float(fewest.cost.mean()), 2) == 3.66


def test_the_fewest_cubes_agree_with_a_search_level_by_level(fewest: FourInputSums) -> None:
    """Functions reached by 1 and 2 cubes, by plain set building."""
    one = {column for _, _, column in CUBES}
    two = {a ^ b for a in one for b in one} - one - {0}
    assert {f for f in range(1 << 16) if fewest.cost[f] == 1} == one
    assert {f for f in range(1 << 16) if fewest.cost[f] == 2} == two


@given(st.integers(0, (1 << 16) - 1))
def test_the_cubes_are_the_function_and_cost_what_is_said(function: int) -> None:
    prices = (3, 4, 9, 20, 21)
    table = four_input_sums(prices)
    cubes = table.cubes(function)
    assert [sum(x & care == value for care, value in cubes) % 2 for x in range(16)] == [
        function >> x & 1 for x in range(16)
    ]
    assert sum(prices[care.bit_count()] for care, _ in cubes) == table.cost[function]


def test_prices_must_be_positive() -> None:
    with pytest.raises(ValueError, match="five prices from 1"):
        FourInputSums((0, 1, 1, 1, 1))


@given(tables(max_inputs=8, max_outputs=3), st.randoms(use_true_random=False))
def test_a_decomposition_is_the_function(case: tuple[int, list[list[int]]], random) -> None:  # type: ignore[no-untyped-def]
    inputs, rows = case
    order = list(range(inputs))
    random.shuffle(order)
    columns = columns_of(inputs, rows)
    for prices in ([1024 + k for k in range(inputs + 1)], [1 + 9 * max(k - 1, 0) for k in range(inputs + 1)]):
        found = decompose(columns, inputs, prices, order)
        assert found is not None
        assert np.array_equal(found.evaluate(), columns)


def test_three_inputs_are_exact() -> None:
    """All 256 functions against a search over sums of at most 4 of the 27 cubes."""
    cubes = []
    for codes in product((0, 1, 2), repeat=3):
        cubes.append(
            sum(
                1 << x
                for x in range(8)
                if all(code == 2 or x >> i & 1 == code for i, code in enumerate(codes))
            )
        )
    best = {0: 0}
    for count in range(1, 5):
        for function in list(best):
            for cube in cubes:
                best.setdefault(function ^ cube, count)
    assert len(best) == 256
    for function, count in best.items():
        column = np.array([[function]], dtype=np.uint64)
        found = decompose(column, 3, [1, 1, 1, 1])
        assert found is not None
        assert len(found) == count


@given(st.integers(0, (1 << 32) - 1))
def test_five_inputs_are_the_function(function: int) -> None:
    for prices in ((1, 1, 1, 1, 1, 1), (3, 5, 90, 200, 310, 420)):
        cubes = five_input_cubes(function, prices)
        assert [sum(x & care == value for care, value in cubes) % 2 for x in range(32)] == [
            function >> x & 1 for x in range(32)
        ]


def test_five_inputs_take_the_published_mean() -> None:
    """About 6.2 cubes on average (from memory), at most 9 (T. Sasao, 1990s, from memory)."""
    seeds = np.random.Generator(np.random.PCG64(1)).integers(0, 1 << 32, size=300)
    counts = [len(five_input_cubes(int(f), (1, 1, 1, 1, 1, 1))) for f in seeds]
    assert 6.0 < sum(counts) / len(counts) < 6.35
    assert max(counts) <= 9


def test_equal_cubes_of_several_outputs_are_one_cube() -> None:
    columns = np.repeat(random_column(7, seed=2)[None], 3, axis=0)
    found = decompose(columns, 7, [1] * 8)
    assert found is not None
    assert set(found.feeds.tolist()) == {0b111}


def test_long_but_regular_functions_have_few_parts() -> None:
    found = decompose(from_rule(20, lambda x: (x & 1023) + (x >> 10) == 700).values, 20, [1] * 21)
    assert found is not None
    assert len(found) <= 701  # one cube a pair of words that adds up


def test_too_many_parts_are_given_up(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(decomposition, "MAX_PARTS", 100)
    assert decompose(random_column(12, seed=1)[None], 12, [1] * 13) is None


def test_no_outputs_and_bad_orders() -> None:
    nothing = decompose(np.zeros((0, 1), dtype=np.uint64), 3, [1] * 4)
    assert nothing is not None
    assert len(nothing) == 0
    with pytest.raises(ValueError, match="does not list each of the 2 inputs once"):
        decompose(np.zeros((1, 1), dtype=np.uint64), 2, [1] * 3, [0, 0])
