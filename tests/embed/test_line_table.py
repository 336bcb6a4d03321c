"""Tables of what states must become: gates, pairs of states, further lines; and columns over few lines."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from revsynth.embed.line_table import LineTable, beside, spread_up, turned
from revsynth.embed.support import on_fewest_lines, over_all_lines
from revsynth.logic.truth_table import ones, pack, unpack
from tests.logic.tables import random_function


def table_of(lines: int, seed: int, outputs: int = 2, free: float = 0.2) -> LineTable:
    function = random_function(lines, seed=seed, outputs=outputs, free=free)
    return LineTable(lines, tuple(range(outputs)), function.values, function.care)


@given(st.integers(1, 8), st.integers(0, 99), st.data())
def test_a_gate_moves_what_sits_in_the_states(lines: int, seed: int, data: st.DataObject) -> None:
    table = table_of(lines, seed)
    line = data.draw(st.integers(0, lines - 1))
    state = np.arange(1 << lines)
    some = data.draw(st.integers(0, (1 << lines) - 1)) & ~(1 << line)
    condition = np.random.default_rng(seed).integers(0, 2, 1 << lines)[state & some]
    before = [unpack(row, lines) for row in (*table.values, *table.fixed)]
    assert (
        unpack(turned(table.values[0], lines, line), lines).tolist()
        == before[0][state ^ (1 << line)].tolist()
    )
    check_profiles(table)
    looked_at = on_fewest_lines(pack(condition), ones(lines), lines)[0]
    table.apply(line, pack(condition), looked_at)
    source = state ^ (condition << line)
    for row, old in zip((*table.values, *table.fixed), before, strict=True):
        assert unpack(row, lines).tolist() == old[source].tolist()
    check_profiles(table)


def check_profiles(table: LineTable) -> None:
    state = np.arange(1 << table.lines)
    for row in range(len(table.outputs)):
        values, fixed = unpack(table.values[row], table.lines), unpack(table.fixed[row], table.lines)
        for line in range(table.lines):
            partner = state ^ (1 << line)
            both = (fixed & fixed[partner]).astype(bool) & (state < partner)
            assert table.clashes(row)[line] == np.count_nonzero(both & (values == values[partner]))
            assert table.changes(row)[line] == np.count_nonzero(both & (values != values[partner]))


@given(st.integers(2, 8), st.integers(0, 99), st.data())
def test_turning_a_line_by_what_is_asked_for_makes_it_the_output(
    lines: int, seed: int, data: st.DataObject
) -> None:
    line = data.draw(st.integers(0, lines - 1))
    state = np.arange(1 << lines)
    random = np.random.default_rng(seed)
    rest = random.integers(0, 2, 1 << lines)[state & ~(1 << line)]
    fixed = random.integers(0, 4, 1 << lines) > 0
    wanted = (rest ^ (state >> line & 1)) * fixed
    table = LineTable(lines, (7,), pack(wanted)[None], pack(fixed)[None])
    values, matters = (unpack(column, lines) for column in table.turning(0, line))
    assert np.array_equal(values * matters, rest * matters)
    assert np.all(matters[fixed] == 1)
    assert table.drop(0) == 7
    assert not table.outputs


def test_an_output_that_clashes_has_no_such_condition() -> None:
    table = LineTable(1, (4,), pack(np.array([1, 1]))[None], pack(np.array([1, 1]))[None])
    with pytest.raises(ValueError, match="output 4 is no line 0 turned by the others"):
        table.turning(0, 0)


@given(st.integers(1, 7), st.integers(0, 99))
def test_further_lines_hold_functions_and_all_else_is_free(inputs: int, seed: int) -> None:
    function, held = (
        random_function(inputs, seed=seed, outputs=2, free=0.2),
        random_function(inputs, seed=seed + 1, outputs=2),
    )
    values, fixed = beside(function.values, function.care, inputs, held.values)
    one, other = (unpack(row, inputs) for row in held.values)
    for row in range(2):
        wide, care = unpack(values[row], inputs + 2), unpack(fixed[row], inputs + 2)
        for state in range(1 << (inputs + 2)):
            x = state & ((1 << inputs) - 1)
            if state >> inputs == one[x] + 2 * other[x]:
                assert wide[state] == unpack(function.values[row], inputs)[x]
                assert care[state] == unpack(function.care[row], inputs)[x]
            else:
                assert wide[state] == care[state] == 0
    assert unpack(spread_up(function.values[0], inputs, inputs + 2), inputs + 2).tolist() == (
        unpack(function.values[0], inputs).tolist() * 4
    )


@given(st.integers(1, 8), st.integers(0, 99), st.sampled_from([0.0, 0.3, 0.9]))
def test_columns_over_the_lines_they_need(lines: int, seed: int, free: float) -> None:
    function = random_function(lines, seed=seed, free=free)
    kept, values, fixed = on_fewest_lines(function.values[0], function.care[0], lines)
    assert list(kept) == sorted(set(kept))
    wide, care = (unpack(over_all_lines(column, kept, lines), lines) for column in (values, fixed))
    known = unpack(function.care[0], lines).astype(bool)
    assert np.all(care[known] == 1)
    assert np.array_equal(wide[known], unpack(function.values[0], lines)[known])


def test_a_line_without_effect_is_left_out() -> None:
    state = np.arange(1 << 8)
    column = pack((state >> 7) & (state >> 2) & 1)
    kept, values, fixed = on_fewest_lines(column, pack(np.ones(1 << 8)), 8)
    assert kept == (2, 7)
    assert unpack(values, 2).tolist() == [0, 0, 0, 1]
    assert unpack(fixed, 2).tolist() == [1, 1, 1, 1]
