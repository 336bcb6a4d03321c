"""Estimated costs of exclusive sums against exact ones and against sums that exist."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from revsynth.logic.decomposition import decompose
from revsynth.logic.exclusive_sum import cube_prices
from revsynth.logic.four_inputs import five_input_cubes
from revsynth.logic.sum_costs import SumCosts, to_bits, to_words
from revsynth.logic.truth_table import pack


def tables(inputs: int, count: int, seed: int = 0) -> np.ndarray:
    return np.random.default_rng(seed).integers(0, 2, (count, 1 << inputs)).astype(np.uint8)


@given(st.integers(0, 9), st.integers(0, 1000))
def test_words_hold_the_table(inputs: int, seed: int) -> None:
    bits = tables(inputs, 3, seed)
    words = to_words(bits)
    assert np.array_equal(to_bits(words, inputs), bits)
    x = seed % (1 << inputs)
    assert np.array_equal((words[:, x // 16] >> np.uint16(x % 16)) & 1, bits[:, x])


@pytest.mark.parametrize("inputs", range(5))
def test_exact_up_to_four_inputs(inputs: int) -> None:
    """Exact is what the cheapest of all sums of up to three cubes says, where there is one."""
    prices = (7, 9, 10, 31, 95)[: inputs + 1]
    cubes = []
    for code in range(3**inputs):
        places = [code // 3**i % 3 for i in range(inputs)]
        column = sum(
            1 << x
            for x in range(1 << inputs)
            if all(p == 2 or (x >> i & 1) == p for i, p in enumerate(places))
        )
        cubes.append((column, prices[sum(p < 2 for p in places)]))
    cheapest = {0: 0}
    for _ in range(3 if inputs < 4 else 2):
        for function, cost in list(cheapest.items()):
            for column, price in cubes:
                cheapest[function ^ column] = min(cheapest.get(function ^ column, 1 << 30), cost + price)
    functions = list(cheapest)
    bits = np.array([[f >> x & 1 for x in range(1 << inputs)] for f in functions], dtype=np.uint8)
    found = SumCosts(inputs, prices)(to_words(bits))
    for function, cost in zip(functions, found.tolist(), strict=True):
        assert cost <= cheapest[function]
        assert cost == cheapest[function] or cheapest[function] > 2 * min(prices)


@given(st.integers(5, 8), st.integers(0, 1000), st.booleans())
def test_near_one_decomposition_and_no_less_than_possible(inputs: int, seed: int, by_t: bool) -> None:
    prices = tuple(100 + 64 * size * size for size in range(inputs + 1)) if by_t else cube_prices(inputs)
    bits = tables(inputs, 4, seed)
    found = SumCosts(inputs, prices)(to_words(bits))
    for table, cost in zip(bits, found.tolist(), strict=True):
        one = decompose(pack(table)[None], inputs, prices)
        assert one is not None
        assert cost <= 1.3 * one.price(prices)
        if inputs == 5:
            number = sum(int(bit) << x for x, bit in enumerate(table))
            exact = sum(prices[care.bit_count()] for care, _ in five_input_cubes(number, prices))
            assert exact <= cost <= 2 * exact


@given(st.integers(4, 7), st.integers(0, 1000))
def test_the_order_of_functions_is_kept(inputs: int, seed: int) -> None:
    words = to_words(tables(inputs, 600, seed)).reshape(20, 30, -1)
    costs = SumCosts(inputs, cube_prices(inputs), leaves=3)
    together = costs(words)
    assert together.shape == (20, 30)
    assert int(costs(words[7, 11])) == together[7, 11]


def test_regular_functions_are_cheap() -> None:
    """A parity is a sum of single literals, an AND one cube: facts of the trade."""
    x = np.arange(256)
    costs = SumCosts(8, (1,) * 9)
    parity = (np.bitwise_count(x) & 1).astype(np.uint8)
    every = (x == 255).astype(np.uint8)
    assert costs(to_words(np.stack([parity, every, 0 * every]))).tolist() == [8, 1, 0]


def test_prices_must_fit() -> None:
    with pytest.raises(ValueError, match="6 prices are needed, not 4"):
        SumCosts(5, (1, 1, 1, 1))
