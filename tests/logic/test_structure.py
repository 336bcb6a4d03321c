"""Structure of columns against definitions, spelled out value by value."""

from __future__ import annotations

from itertools import combinations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from revsynth.logic.function import Function
from revsynth.logic.normal_form import algebraic_normal_form, degree
from revsynth.logic.permutation import CycleStructure, cycle_structure, is_permutation
from revsynth.logic.structure import (
    affine_form,
    doubled,
    halves,
    independent_nonlinear,
    inputs_without_effect,
    least_degree,
    linear_inputs,
    swap_invariant,
    symmetric_groups,
)
from revsynth.logic.truth_table import unpack, zeros
from tests.logic.tables import columns_of, from_rule, function_of, functions, random_column, tables
from tests.strategies import permutations


def tables_of(function: Function) -> tuple[list[list[int]], list[list[int]]]:
    n = function.inputs
    return (
        [unpack(row, n).tolist() for row in function.values],
        [unpack(row, n).tolist() for row in function.care],
    )


@given(tables(max_inputs=9), st.data())
def test_halves_and_doubling(case: tuple[int, list[list[int]]], data: st.DataObject) -> None:
    inputs, rows = case
    if inputs == 0:
        return
    index = data.draw(st.integers(0, inputs - 1))
    column = columns_of(inputs, rows)[0]
    low, high = halves(column, inputs, index)
    for half, bit in ((low, 0), (high, 1)):
        table = unpack(doubled(half, index), inputs)
        for x in range(1 << inputs):
            assert table[x] == rows[0][x & ~(1 << index) | bit << index]


@given(functions(max_inputs=7, max_outputs=2))
def test_inputs_without_effect_can_be_left_out_together(function: Function) -> None:
    n = function.inputs
    mask = inputs_without_effect(function.values, function.care, n)
    values, care = tables_of(function)
    for row, fixed in zip(values, care, strict=True):
        seen: dict[int, int] = {}
        for x in range(1 << n):
            if fixed[x]:
                assert seen.setdefault(x & ~mask, row[x]) == row[x]
    # and no further input can be left out on top of them
    for i in range(n):
        if mask >> i & 1:
            continue
        conflict = False
        for row, fixed in zip(values, care, strict=True):
            seen = {}
            conflict |= any(
                fixed[x] and seen.setdefault(x & ~mask & ~(1 << i), row[x]) != row[x] for x in range(1 << n)
            )
        assert conflict


@given(functions(max_inputs=7, max_outputs=1))
def test_linear_inputs_turn_the_value_over(function: Function) -> None:
    n = function.inputs
    values, care = tables_of(function)
    for row, fixed, packed, packed_care in zip(values, care, function.values, function.care, strict=True):
        mask = linear_inputs(packed, packed_care, n)
        for i in range(n):
            pairs = [x for x in range(1 << n) if fixed[x] and fixed[x ^ 1 << i]]
            assert bool(mask >> i & 1) == (bool(pairs) and all(row[x] != row[x ^ 1 << i] for x in pairs))


@given(st.integers(0, 8), st.data())
def test_an_affine_function_is_recognised_whatever_is_free(inputs: int, data: st.DataObject) -> None:
    mask = data.draw(st.integers(0, (1 << inputs) - 1))
    constant = data.draw(st.integers(0, 1))
    care = data.draw(st.integers(0, (1 << (1 << inputs)) - 1))
    value = [(x & mask).bit_count() % 2 ^ constant for x in range(1 << inputs)]
    fixed = [care >> x & 1 for x in range(1 << inputs)]
    function = function_of(inputs, [value], [fixed])
    found = affine_form(function.values[0], function.care[0], inputs)
    assert found is not None
    for x in range(1 << inputs):
        assert not fixed[x] or (x & found[0]).bit_count() % 2 ^ found[1] == value[x]


@given(functions(max_inputs=4, max_outputs=1))
def test_the_least_degree_is_the_least_over_all_fillings(function: Function) -> None:
    n = function.inputs
    for values, care in zip(function.values, function.care, strict=True):
        free = [x for x in range(1 << n) if not int(care[0]) >> x & 1][:9]
        if len(free) < (1 << n) - int(np.bitwise_count(care[0])):
            return  # too many fillings to try them all
        degrees = []
        for size in range(len(free) + 1):
            for chosen in combinations(free, size):
                filled = np.array([int(values[0]) | sum(1 << x for x in chosen)], dtype=np.uint64)
                degrees.append(degree(algebraic_normal_form(filled, n), n))
        assert least_degree(values, care, n) == min(degrees)
        assert (affine_form(values, care, n) is not None) == (min(degrees) <= 1)


def test_the_least_degree_has_a_limit() -> None:
    with pytest.raises(ValueError, match="up to 10 inputs, not 11"):
        least_degree(zeros(11), zeros(11), 11)


def swapped(x: int, i: int, j: int, negated: bool) -> int:
    one, two = x >> i & 1, x >> j & 1
    if negated:
        one, two = 1 - one, 1 - two
    return x & ~(1 << i | 1 << j) | two << i | one << j


@given(tables(max_inputs=8), st.data())
def test_swap_invariance_by_definition(case: tuple[int, list[list[int]]], data: st.DataObject) -> None:
    inputs, rows = case
    if inputs < 2:
        return
    i, j = data.draw(st.lists(st.integers(0, inputs - 1), min_size=2, max_size=2, unique=True))
    negated = data.draw(st.booleans())
    # Make it invariant half of the time, or hardly any case would be.
    if data.draw(st.booleans()):
        rows[0] = [row & rows[0][swapped(x, i, j, negated)] for x, row in enumerate(rows[0])]
    wanted = all(rows[0][x] == rows[0][swapped(x, i, j, negated)] for x in range(1 << inputs))
    assert swap_invariant(columns_of(inputs, rows)[0], inputs, i, j, negated=negated) == wanted


@pytest.mark.parametrize(("i", "j"), [(0, 5), (2, 8), (6, 7), (9, 13), (13, 3)])
@pytest.mark.parametrize("negated", [False, True])
def test_swap_invariance_of_long_columns(i: int, j: int, negated: bool) -> None:
    table = unpack(random_column(14, seed=i), 14)
    x = np.arange(1 << 14)
    one, two = (x >> i & 1) ^ int(negated), (x >> j & 1) ^ int(negated)
    both = table & table[x & ~(1 << i | 1 << j) | two << i | one << j]
    column = columns_of(14, [both.tolist()])[0]
    assert swap_invariant(column, 14, i, j, negated=negated)
    column[-1] ^= np.uint64(1 << 63)
    column[column.size // 3] ^= np.uint64(1 << 17)
    assert not swap_invariant(column, 14, 0, 12, negated=negated)


def test_groups_of_known_functions() -> None:
    """A majority is symmetric in all inputs, a sum in the bits of equal place (common practice)."""
    majority = from_rule(7, lambda x: np.bitwise_count(x) >= 4).values
    assert symmetric_groups(majority, 7) == [[(i, False) for i in range(7)]]
    total = from_rule(8, lambda x: (x & 15) + (x >> 4) == 9).values
    assert [(i, False) for i in (0, 4)] in symmetric_groups(total, 8)
    one_input = from_rule(3, lambda x: x == 0b101).values
    assert symmetric_groups(one_input, 3) == [[(0, False), (1, True), (2, False)]]
    assert symmetric_groups(one_input, 3, leave_out=0b010) == [[(0, False), (2, False)]]


@given(tables(max_inputs=6, max_outputs=2))
def test_every_pair_of_a_group_may_be_swapped(case: tuple[int, list[list[int]]]) -> None:
    inputs, rows = case
    for group in symmetric_groups(columns_of(inputs, rows), inputs):
        for (i, one), (j, two) in combinations(group, 2):
            for row in rows:
                assert all(row[x] == row[swapped(x, i, j, one != two)] for x in range(1 << inputs))


def test_independent_outputs_modulo_affine_functions() -> None:
    x = np.arange(16)
    ab, cd = (x & 1) & (x >> 1 & 1), (x >> 2 & 1) & (x >> 3 & 1)
    rows = [ab ^ (x & 1), cd ^ 1, ab ^ cd, x >> 3 & 1]
    forms = algebraic_normal_form(columns_of(4, [row.tolist() for row in rows]), 4)
    assert independent_nonlinear(forms, 4) == 2


@given(permutations(0, 4))
def test_cycles_against_following_each_element(images: list[int]) -> None:
    found = cycle_structure(np.array(images))
    lengths = []
    for start in range(len(images)):
        at, length = images[start], 1
        while at != start:
            at, length = images[at], length + 1
        lengths.append(length)
    assert sum(length * count for length, count in found.cycles) == len(images)
    for length, count in found.cycles:
        assert lengths.count(length) == length * count
    # The parity is that of the number of inversions (common practice).
    inversions = sum(a > b for a, b in combinations(images, 2))
    assert found.odd == (inversions % 2 == 1)
    power = list(range(len(images)))
    for _ in range(found.order):
        power = [images[p] for p in power]
    assert power == list(range(len(images)))


def test_long_permutations_are_walked_alike() -> None:
    size = 1 << 18
    x = np.arange(size)
    assert cycle_structure((x + 4) % size).cycles == ((size // 4, 4),)
    assert cycle_structure(x ^ 5) == CycleStructure(((2, size // 2),))


def test_what_is_no_permutation_is_refused() -> None:
    assert not is_permutation(np.array([0, 0]))
    assert not is_permutation(np.array([0, 2]))
    assert not is_permutation(np.array([], dtype=np.int64))
    with pytest.raises(ValueError, match="each number below the length must occur once"):
        cycle_structure(np.array([1, 1]))
