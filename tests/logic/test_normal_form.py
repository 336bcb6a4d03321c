"""Normal forms: involution, evaluation, polarities, degrees; SymPy and PyEDA as independent references."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from revsynth.logic.normal_form import (
    EXHAUSTIVE_INPUTS,
    algebraic_normal_form,
    best_polarity,
    count_by_size,
    degree,
    essential_inputs,
    evaluate_fixed_polarity,
    fixed_polarity,
    turn_variable,
)
from revsynth.logic.truth_table import first_inputs, unpack
from tests.logic.tables import columns_of, from_rule, random_column, tables


@given(tables(max_inputs=9, max_outputs=2))
def test_the_normal_form_of_the_normal_form_is_the_function(case: tuple[int, list[list[int]]]) -> None:
    inputs, rows = case
    columns = columns_of(inputs, rows)
    forms = algebraic_normal_form(columns, inputs)
    assert np.array_equal(algebraic_normal_form(forms, inputs), columns)


@given(tables(max_inputs=7), st.data())
def test_each_coefficient_is_the_xor_of_the_values_below_it(
    case: tuple[int, list[list[int]]], data: st.DataObject
) -> None:
    inputs, rows = case
    coefficients = unpack(algebraic_normal_form(columns_of(inputs, rows), inputs)[0], inputs)
    product = data.draw(st.integers(0, (1 << inputs) - 1))
    below = [rows[0][x] for x in range(1 << inputs) if x & product == x]
    assert coefficients[product] == sum(below) % 2


@given(tables(max_inputs=8, max_outputs=2), st.data())
def test_a_fixed_polarity_form_evaluates_to_the_function(
    case: tuple[int, list[list[int]]], data: st.DataObject
) -> None:
    inputs, rows = case
    columns = columns_of(inputs, rows)
    polarity = data.draw(st.integers(0, (1 << inputs) - 1))
    coefficients = fixed_polarity(columns, inputs, polarity)
    assert np.array_equal(evaluate_fixed_polarity(coefficients, inputs, polarity), columns)
    x = data.draw(st.integers(0, (1 << inputs) - 1))
    for row, table in enumerate(rows):
        # A product of the literals in c holds where every one of them is 1.
        holding = [c for c in first_inputs(coefficients[row], 1 << inputs) if (x ^ polarity) & c == c]
        assert len(holding) % 2 == table[x]


@pytest.mark.parametrize("inputs", [0, 1, 3, 6, 7, 9])
def test_the_best_polarity_is_the_best_of_all(inputs: int) -> None:
    column = random_column(inputs, seed=inputs)[None]
    prices = [10 + k * k for k in range(inputs + 1)]

    def price(polarity: int) -> int:
        counts = count_by_size(fixed_polarity(column, inputs, polarity), inputs)
        return int(counts @ np.array(prices))

    polarity, coefficients = best_polarity(column, inputs, prices)
    assert price(polarity) == min(price(p) for p in range(1 << inputs))
    assert np.array_equal(coefficients, fixed_polarity(column, inputs, polarity))


def test_beyond_exhaustive_search_no_single_turn_helps() -> None:
    inputs = EXHAUSTIVE_INPUTS + 1
    column = random_column(inputs, seed=3)[None]
    polarity, coefficients = best_polarity(column, inputs, [1] * (inputs + 1))
    here = count_by_size(coefficients, inputs).sum()
    for index in range(inputs):
        turned = coefficients.copy()
        turn_variable(turned, index)
        assert count_by_size(turned, inputs).sum() >= here
    assert np.array_equal(evaluate_fixed_polarity(coefficients, inputs, polarity), column)


def test_a_product_in_two_rows_is_counted_once() -> None:
    columns = columns_of(2, [[0, 0, 0, 1], [0, 1, 0, 0]])  # ab, a + ab
    forms = algebraic_normal_form(columns, 2)
    assert count_by_size(forms, 2).tolist() == [0, 1, 1]
    assert count_by_size(forms[0], 2).tolist() == [0, 0, 1]


def test_no_rows_at_all() -> None:
    nothing = np.zeros((0, 1), dtype=np.uint64)
    polarity, coefficients = best_polarity(nothing, 3, [1, 1, 1, 1])
    assert polarity == 0
    assert coefficients.shape == (0, 1)


def test_a_polarity_beyond_the_inputs_is_refused() -> None:
    with pytest.raises(ValueError, match="polarity 4 has bits beyond the 2 inputs"):
        fixed_polarity(np.zeros((1, 1), dtype=np.uint64), 2, 4)


def test_turning_needs_a_contiguous_array() -> None:
    with pytest.raises(ValueError, match="a contiguous array is needed"):
        turn_variable(np.zeros((4, 4), dtype=np.uint64)[:, ::2], 6)


# Facts of the trade (common practice): majority of three is ab + ac + bc; the degree of parity is 1; a
# function has full degree exactly when it has an odd number of ones; a product of all n inputs has degree n.


def test_majority_of_three() -> None:
    form = algebraic_normal_form(from_rule(3, lambda x: np.bitwise_count(x) >= 2).values, 3)
    assert first_inputs(form[0], 9) == [0b011, 0b101, 0b110]


@pytest.mark.parametrize("inputs", [1, 5, 6, 8])
def test_degrees_of_known_functions(inputs: int) -> None:
    def degree_of(rule) -> int:  # type: ignore[no-untyped-def]
        return degree(algebraic_normal_form(from_rule(inputs, rule).values, inputs), inputs)

    assert degree_of(lambda x: x == (1 << inputs) - 1) == inputs
    assert degree_of(lambda x: np.bitwise_count(x) % 2 == 1) == 1
    assert degree_of(lambda x: x < 0) == 0
    assert degree_of(lambda x: x >= 0) == 0


@given(tables(max_inputs=8))
def test_full_degree_means_an_odd_number_of_ones(case: tuple[int, list[list[int]]]) -> None:
    inputs, rows = case
    form = algebraic_normal_form(columns_of(inputs, rows), inputs)
    full = inputs > 0 and degree(form, inputs) == inputs
    assert inputs == 0 or full == (sum(rows[0]) % 2 == 1)


def test_the_degree_of_the_hidden_bit_of_a_weight() -> None:
    """Bit k of the weight of n bits is the elementary symmetric function of degree 2**k (Lucas' theorem)."""
    for k in range(3):
        form = algebraic_normal_form(from_rule(7, lambda x, k=k: np.bitwise_count(x) >> k & 1).values, 7)
        products = first_inputs(form[0], 200)
        assert products == [c for c in range(128) if c.bit_count() == 1 << k]


@given(tables(max_inputs=8))
def test_essential_inputs_are_those_that_change_the_value(case: tuple[int, list[list[int]]]) -> None:
    inputs, rows = case
    found = essential_inputs(algebraic_normal_form(columns_of(inputs, rows), inputs), inputs)
    for i in range(inputs):
        assert bool(found >> i & 1) == any(rows[0][x] != rows[0][x ^ 1 << i] for x in range(1 << inputs))


@pytest.mark.parametrize("inputs", [1, 2, 4, 6])
def test_sympy_has_the_same_coefficients(inputs: int) -> None:
    """SymPy (sympy.logic.boolalg.anf_coeffs): coefficients in the order of the table's rows."""
    from sympy.logic.boolalg import anf_coeffs

    table = unpack(random_column(inputs, seed=40 + inputs), inputs).tolist()
    ours = unpack(algebraic_normal_form(columns_of(inputs, [table]), inputs)[0], inputs).tolist()
    assert anf_coeffs(table) == ours


def test_sympy_reads_our_normal_form_as_the_same_function() -> None:
    """SymPy (ANFform) from the truth table, with the variables named from the most significant bit on."""
    from sympy import symbols
    from sympy.logic.boolalg import And, ANFform, Xor, true

    names = symbols("x4 x3 x2 x1 x0")
    table = unpack(random_column(5, seed=5), 5).tolist()
    form = first_inputs(algebraic_normal_form(columns_of(5, [table]), 5)[0], 32)
    ours = [And(*(names[4 - i] for i in range(5) if c >> i & 1)) if c else true for c in form]
    assert ANFform(names, table) == Xor(*ours, remove_true=False)


def test_pyeda_evaluates_our_normal_form_to_the_same_table() -> None:
    """PyEDA evaluates the exclusive sum of products point by point."""
    from pyeda.boolalg.bfarray import exprvars
    from pyeda.boolalg.expr import And, Xor

    table = unpack(random_column(4, seed=8), 4).tolist()
    form = first_inputs(algebraic_normal_form(columns_of(4, [table]), 4)[0], 16)
    x = exprvars("x", 4)
    expression = Xor(*(And(*(x[i] for i in range(4) if c >> i & 1)) for c in form))
    assert expression.support == set(x)
    theirs = [int(expression.restrict({x[i]: n >> i & 1 for i in range(4)})) for n in range(16)]
    assert theirs == table


@pytest.mark.slow
def test_twenty_four_inputs_go_through() -> None:
    column = random_column(24, seed=1)[None]
    form = algebraic_normal_form(column, 24)
    assert np.array_equal(algebraic_normal_form(form, 24), column)
