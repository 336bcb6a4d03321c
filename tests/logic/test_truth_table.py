"""Packed truth tables: one bit order everywhere, checked against plain Python integers."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from revsynth.logic.truth_table import (
    count_ones,
    first_inputs,
    last_word_mask,
    ones,
    pack,
    pack_values,
    unpack,
    unpack_values,
    variable,
    words_for,
    zeros,
)

bits = st.integers(0, 9).flatmap(lambda n: st.lists(st.integers(0, 1), min_size=1 << n, max_size=1 << n))


@pytest.mark.parametrize(("inputs", "words"), [(0, 1), (1, 1), (6, 1), (7, 2), (10, 16), (24, 1 << 18)])
def test_how_many_words(inputs: int, words: int) -> None:
    assert words_for(inputs) == words
    assert zeros(inputs).shape == (words,)
    assert ones(inputs).shape == (words,)


@pytest.mark.parametrize(
    ("inputs", "mask"), [(0, 1), (1, 3), (3, 0xFF), (5, 0xFFFFFFFF), (6, 2**64 - 1), (20, 2**64 - 1)]
)
def test_valid_bits_of_a_word(inputs: int, mask: int) -> None:
    assert int(last_word_mask(inputs)) == mask
    assert count_ones(ones(inputs)) == 1 << inputs
    assert count_ones(zeros(inputs)) == 0


@given(bits)
def test_input_x_is_bit_x(table: list[int]) -> None:
    inputs = len(table).bit_length() - 1
    column = pack(np.array(table, dtype=np.uint8))
    assert column.dtype == np.uint64
    assert column.shape == (words_for(inputs),)
    as_integer = sum(int(word) << 64 * index for index, word in enumerate(column))
    assert as_integer == sum(bit << x for x, bit in enumerate(table))
    assert unpack(column, inputs).tolist() == table
    assert count_ones(column) == sum(table)
    assert np.array_equal(pack(np.array(table, dtype=bool)), column)


@given(bits, st.integers(0, 20))
def test_the_first_inputs_with_value_1(table: list[int], limit: int) -> None:
    column = pack(np.array(table, dtype=np.uint8))
    assert first_inputs(column, limit) == [x for x, bit in enumerate(table) if bit][:limit]


@pytest.mark.parametrize("inputs", [1, 3, 6, 7, 9])
def test_a_variable_is_its_bit_of_the_input(inputs: int) -> None:
    for index in range(inputs):
        column = variable(inputs, index)
        assert unpack(column, inputs).tolist() == [(x >> index) & 1 for x in range(1 << inputs)]
        assert not np.any(column & ~last_word_mask(inputs))


@given(st.integers(0, 8), st.integers(0, 63), st.data())
def test_values_and_their_columns(inputs: int, width: int, data: st.DataObject) -> None:
    """A function that changes under bit reversal comes back: column 0 is the least significant bit."""
    top = (1 << width) - 1
    values = data.draw(st.lists(st.integers(0, top), min_size=1 << inputs, max_size=1 << inputs))
    columns = pack_values(np.array(values, dtype=np.int64), width)
    assert columns.shape == (width, words_for(inputs))
    for bit in range(width):
        assert unpack(columns[bit], inputs).tolist() == [(value >> bit) & 1 for value in values]
    assert unpack_values(columns, inputs).tolist() == values


def test_only_the_low_bits_are_packed_and_negative_numbers_are_two_s_complement() -> None:
    columns = pack_values(np.array([-1, -2, 5, 8]), 3)
    assert unpack_values(columns, 2).tolist() == [7, 6, 5, 0]


@pytest.mark.parametrize("shape", [(3,), (2, 2), (0,)])
def test_tables_of_another_length_are_refused(shape: tuple[int, ...]) -> None:
    with pytest.raises(ValueError) as error:
        pack(np.zeros(shape, dtype=np.uint8))
    assert str(error.value) == f"a truth table needs 2**n entries in one row, not shape {shape}"


@pytest.mark.parametrize("index", [-1, 3])
def test_variables_that_do_not_exist(index: int) -> None:
    with pytest.raises(ValueError, match=f"variable {index} of 3 inputs does not exist"):
        variable(3, index)


def test_values_of_too_many_columns_are_refused() -> None:
    with pytest.raises(ValueError, match="64 columns do not fit a 64-bit integer"):
        unpack_values(np.zeros((64, 1), dtype=np.uint64), 3)
