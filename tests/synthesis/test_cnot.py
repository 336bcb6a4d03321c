"""CNOT circuits for linear maps, and the linear algebra under the recognition of affine functions."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from revsynth.logic.truth_table import unpack
from revsynth.synthesis.affine import CaredHull, Echelon, evaluate_form, sparser
from revsynth.synthesis.cnot import (
    addition_tree,
    cnot_circuit,
    eliminate,
    inverse_rows,
    place_nots,
    transposed,
)
from tests.synthesis.checks import from_table


@st.composite
def invertible_maps(draw: st.DrawFn, max_lines: int = 8) -> list[int]:
    """A product of random row additions and a wire permutation."""
    lines = draw(st.integers(1, max_lines))
    rows = [1 << line for line in draw(st.permutations(range(lines)))]
    line = st.integers(0, lines - 1)
    for source, target in draw(st.lists(st.tuples(line, line), max_size=40)):
        if source != target:
            rows[target] ^= rows[source]
    return rows


def applied(steps: list[tuple[int, int]], state: int) -> int:
    for control, target in steps:
        state ^= ((state >> control) & 1) << target
    return state


def product(rows: list[int], state: int) -> int:
    return sum(((row & state).bit_count() & 1) << line for line, row in enumerate(rows))


@given(invertible_maps())
def test_the_circuit_is_the_map(rows: list[int]) -> None:
    for steps in (cnot_circuit(rows), eliminate(rows)):
        for line in range(len(rows)):
            assert applied(steps, 1 << line) == product(rows, 1 << line)
    assert len(cnot_circuit(rows)) <= len(eliminate(rows))
    assert len(eliminate(rows)) <= len(rows) ** 2


@given(invertible_maps())
def test_inverse_and_transpose(rows: list[int]) -> None:
    lines = len(rows)
    backwards = inverse_rows(rows)
    assert all(product(backwards, product(rows, 1 << line)) == 1 << line for line in range(lines))
    assert transposed(transposed(rows, lines), lines) == rows


@given(st.integers(2, 7), st.data())
def test_wire_permutations_take_three_cnots_a_swap(lines: int, data: st.DataObject) -> None:
    order = data.draw(st.permutations(range(lines)))
    cycles = 0
    seen: set[int] = set()
    for start in range(lines):
        cycles += start not in seen
        while start not in seen:
            seen.add(start)
            start = order[start]
    assert len(cnot_circuit([1 << line for line in order])) == 3 * (lines - cycles)


def test_all_invertible_maps_of_three_lines_are_near_their_optimum() -> None:
    """168 maps, optimum by breadth-first search; at most 6 CNOTs are ever needed (recomputed here)."""
    best = {(1, 2, 4): 0}
    layer = [(1, 2, 4)]
    while layer:
        following = []
        for rows in layer:
            for control in range(3):
                for target in range(3):
                    after = list(rows)
                    after[target] ^= rows[control]
                    if control != target and tuple(after) not in best:
                        best[tuple(after)] = best[rows] + 1
                        following.append(tuple(after))
        layer = following
    assert len(best) == 168
    assert max(best.values()) == 6
    found = {rows: len(cnot_circuit(rows)) for rows in best}
    assert all(found[rows] >= best[rows] for rows in best)
    assert sum(found.values()) <= 1.05 * sum(best.values())


def test_a_map_that_loses_a_line_is_refused() -> None:
    for make in (cnot_circuit, eliminate, inverse_rows):
        with pytest.raises(ValueError, match="not invertible"):
            make([1, 1])


@given(invertible_maps(max_lines=6), st.data())
def test_nots_may_go_anywhere_they_are_few(rows: list[int], data: st.DataObject) -> None:
    constant = data.draw(st.integers(0, (1 << len(rows)) - 1))
    steps = cnot_circuit(rows)
    position, mask = place_nots(steps, constant)
    assert mask.bit_count() <= constant.bit_count()
    for state in range(1 << len(rows)):
        half = applied(steps[:position], state) ^ mask
        assert applied(steps[position:], half) == applied(steps, state) ^ constant


@given(st.lists(st.integers(0, 255), min_size=1, max_size=5), st.booleans())
def test_addition_trees_add_every_form_and_never_cost_more_than_one_by_one(
    forms: list[int], fresh: bool
) -> None:
    plan = addition_tree(forms, fresh=fresh)
    assert sorted(output for output, _, _ in plan) == list(range(len(forms)))
    done: dict[int, int] = {}
    cost = 0
    for output, parent, rest in plan:
        done[output] = rest if parent is None else done[parent] ^ rest
        cost += rest.bit_count() + (0 if parent is None else 1 if fresh else 2)
    assert [done[output] for output in range(len(forms))] == forms
    assert cost <= sum(form.bit_count() for form in forms)


@given(st.lists(st.integers(0, 63), max_size=8), st.integers(0, 63))
def test_echelon(vectors: list[int], other: int) -> None:
    echelon = Echelon()
    added = [vector for vector in vectors if echelon.add(vector)]
    span = {0}
    for vector in added:
        assert vector not in span
        span |= {one ^ vector for one in span}
    assert len(span) == 1 << len(echelon)
    rest, combination = echelon.reduce(other)
    total = rest
    for index, vector in enumerate(added):
        if (combination >> index) & 1:
            total ^= vector
    assert total == other
    assert (rest == 0) == (other in span)


@given(st.integers(1, 7), st.data())
def test_hull(inputs: int, data: st.DataObject) -> None:
    care = data.draw(st.lists(st.integers(0, 1), min_size=1 << inputs, max_size=1 << inputs))
    if data.draw(st.booleans()):
        care = [one if x & 3 == 1 else 0 for x, one in enumerate(care)]
    function = from_table(inputs, 1, [0] * (1 << inputs), care=care)
    hull = CaredHull(inputs, function.care[0])
    assert len(hull.points) + len(hull.vanishing) == inputs + 1
    assert all(care[point] for point in hull.points)
    for form in hull.vanishing:
        column = unpack(evaluate_form(form, inputs), inputs)
        assert not np.any(column[np.array(care, dtype=bool)])
    form = data.draw(st.integers(0, (2 << inputs) - 1))
    shorter = sparser(form, hull.vanishing)
    differ = unpack(evaluate_form(form ^ shorter, inputs), inputs)
    assert not np.any(differ[np.array(care, dtype=bool)])
    assert shorter.bit_count() <= form.bit_count()
