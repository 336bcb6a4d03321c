"""Cubes and exclusive sums as data."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given

from revsynth.logic.cube_codes import CodeSpace, decode, encode
from revsynth.logic.cubes import Cube, ExclusiveSum
from revsynth.logic.normal_form import fixed_polarity
from revsynth.logic.truth_table import unpack_values
from tests.logic.tables import columns_of, slow_value, sums, tables


@given(sums(max_inputs=8))
def test_evaluation_agrees_with_cube_by_cube(cubes: ExclusiveSum) -> None:
    values = unpack_values(cubes.evaluate(), cubes.inputs)
    assert values.tolist() == [slow_value(cubes, x) for x in range(1 << cubes.inputs)]


@given(sums())
def test_putting_in_order_joins_equal_cubes_and_keeps_the_function(cubes: ExclusiveSum) -> None:
    ordered = cubes.in_order()
    assert np.array_equal(ordered.evaluate(), cubes.evaluate())
    places = [(cube.care, cube.value) for cube in ordered]
    assert len(set(places)) == len(places)
    assert all(cube.feeds for cube in ordered)
    assert ordered.sizes().tolist() == sorted(ordered.sizes().tolist())


@given(sums())
def test_codes_are_decoded_to_the_same_cubes(cubes: ExclusiveSum) -> None:
    again = decode(encode(cubes), cubes.inputs, cubes.outputs)
    assert list(again) == list(cubes)


def test_the_code_is_as_documented() -> None:
    cubes = ExclusiveSum.of(3, 2, [Cube(care=0b011, value=0b001, feeds=0b10)])
    # input 2 absent (11), input 1 negated (01), input 0 plain (10), below the outputs 10
    assert encode(cubes).tolist() == [0b10_11_01_10]
    assert CodeSpace(3, [5, 6, 7, 8]).price(encode(cubes)).tolist() == [7]
    assert Cube(0b011, 0b001).text(3) == "10-"


@given(tables(max_inputs=6, max_outputs=3))
def test_cubes_of_a_fixed_polarity_form_are_the_function(case: tuple[int, list[list[int]]]) -> None:
    inputs, rows = case
    columns = columns_of(inputs, rows)
    polarity = (0b101101 >> 1) & ((1 << inputs) - 1)
    cubes = ExclusiveSum.from_coefficients(fixed_polarity(columns, inputs, polarity), inputs, polarity)
    assert np.array_equal(cubes.evaluate(), columns)


def test_prices_count_a_shared_cube_once() -> None:
    cubes = ExclusiveSum.of(2, 2, [Cube(0b11, 0b01, 0b11), Cube(0, 0, 0b01)])
    assert cubes.price([1, 10, 100]) == 101


def test_limits_say_what_would_be_right() -> None:
    with pytest.raises(ValueError, match="at most 64 outputs, not 65"):
        ExclusiveSum.of(1, 65, [])
    with pytest.raises(ValueError, match="24 inputs and 17 outputs do not fit a 64-bit code"):
        encode(ExclusiveSum.of(24, 17, []))
