"""Elimination and the search for products, compiled and plain, against each other and by evaluation."""

from __future__ import annotations

import random

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from revsynth.logic.product_chain import input_table, sum_table
from revsynth.logic.tables import product_kernels as kernels
from revsynth.logic.tables.product_search import Echelon, ProductSearch, Work, within_reach, words_of

EDGE_WORDS = [0, 1, 1 << 63, (1 << 64) - 1, 0xAAAAAAAAAAAAAAAA, 0x8000000000000001]


def constant_and_inputs(inputs: int) -> list[int]:
    return [(1 << (1 << inputs)) - 1, *(input_table(inputs, i) for i in range(inputs))]


@given(st.lists(st.integers(0, (1 << 16) - 1), max_size=12), st.integers(0, (1 << 12) - 1))
def test_an_echelon_expresses_the_sums_of_its_tables(tables: list[int], pattern: int) -> None:
    echelon = Echelon(16)
    independent = sum(echelon.insert(table) for table in tables)
    assert echelon.rank == independent
    total = sum_table(tables, pattern & ((1 << len(tables)) - 1))
    terms = echelon.express(total)
    assert terms is not None
    assert sum_table(tables, terms) == total
    assert echelon.residue(total) == 0


def test_what_is_no_sum_is_not_expressed() -> None:
    echelon = Echelon(8)
    echelon.insert(0b11)
    assert echelon.express(0b1) is None
    assert echelon.residue(0b1) in (0b1, 0b10)


@pytest.mark.parametrize("compiled", [False, True])
def test_found_products_give_the_target(compiled: bool) -> None:
    signals = constant_and_inputs(6)
    search = ProductSearch(3, compiled)
    search.extra_products(signals, 8)
    rng = random.Random(1)
    targets = [rng.getrandbits(64) for _ in range(20)]
    found = None
    for products in range(9):
        found = search.find(signals, targets, 64, products, Work(6, 64))
        if found is not None:
            break
    assert found is not None
    total = sum_table(signals, found.plain)
    for left, right in found.products:
        total ^= sum_table(signals, left) & sum_table(signals, right)
    assert total == targets[found.target]
    quadratic = signals[1] & signals[4] ^ signals[2] & (signals[3] ^ signals[6])
    found = search.find(signals, [quadratic], 64, 6, Work(100, 1 << 12))
    assert found is not None
    assert len(found.products) <= 6


def test_within_reach_are_the_quadratic_functions() -> None:
    signals = constant_and_inputs(4)
    quadratic, cubic = signals[1] & signals[3], signals[1] & signals[2] & signals[3]
    rank, near = within_reach(signals, [quadratic, cubic, quadratic ^ cubic], 16)
    assert rank == 11  # 1 + 4 + 6 monomials of degree at most 2
    assert near == [quadratic]


def rows_of(words: list[int], width: int) -> np.ndarray:
    return np.array(words, dtype=np.uint64).reshape(-1, width)


def test_places_are_the_exponents_of_powers_of_two() -> None:
    for exponent in range(64):
        product = (1 << exponent) * 0x03F79D71B4CB0A89 & 0xFFFFFFFFFFFFFFFF
        assert kernels.PLACES[product >> 58] == exponent


def test_row_kernels_equal_their_python_on_edge_words() -> None:
    for compiled in (True, False):
        insert = kernels.insert_row if compiled else kernels.insert_row.py_func
        basis = np.zeros((8, 2), dtype=np.uint64)
        words, masks = np.zeros(8, dtype=np.int64), np.zeros(8, dtype=np.uint64)
        rank = 0
        with np.errstate(over="ignore"):
            for row in rows_of(EDGE_WORDS + EDGE_WORDS[::-1], 2):
                rank = insert(row.copy(), basis, words, masks, rank)
        if compiled:
            expected = rank, basis, words, masks
    assert rank == expected[0]
    for one, other in zip((basis, words, masks), expected[1:], strict=True):
        assert np.array_equal(one, other)


def test_span_kernels_equal_their_python_on_edge_words() -> None:
    vectors = np.array([0, *EDGE_WORDS], dtype=np.uint64)
    slices = np.array([[word ^ f] for f in range(64) for word in [EDGE_WORDS[f % 6]]], dtype=np.uint64)
    results = []
    for span, test in (
        (kernels.reduced_span, kernels.targets_in_span),
        (kernels.reduced_span.py_func, kernels.targets_in_span.py_func),
    ):
        basis, masks = np.zeros(64, dtype=np.uint64), np.zeros(64, dtype=np.uint64)
        alive = np.array([0xFFFFFFFFFFFFFFFF], dtype=np.uint64)
        with np.errstate(over="ignore"):
            rank = span(vectors, basis, masks)
            some = test(basis, masks, rank, slices, 64, kernels.PLACES, alive)
        results.append((int(rank), basis.tolist(), masks.tolist(), bool(some), alive.tolist()))
    assert results[0] == results[1]


def test_the_search_kernel_equals_its_python() -> None:
    signals = words_of(constant_and_inputs(4), 16)
    targets = words_of([0x7888, 0x1234, 0xCAFE], 16)
    results = []
    for function in (kernels.search, kernels.search.py_func):
        state = np.array([88172645463325252], dtype=np.uint64)
        chosen = np.zeros((2, 5), dtype=np.uint8)
        with np.errstate(over="ignore"):
            k = function(signals, targets, 16, 2, 3, 40, state, kernels.PLACES, chosen)
        results.append((int(k), chosen.tolist(), state.tolist()))
    assert results[0] == results[1]
    assert results[0][0] == 0  # 0x7888 is the sum x0 x1 + x2 x3
