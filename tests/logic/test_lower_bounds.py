"""Lower bounds: against brute force on small functions, published values, and circuits that are built."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

import revsynth
from revsynth.logic.flat_directions import flat_directions
from revsynth.logic.function import Function
from revsynth.logic.lower_bounds import and_bound, lower_bound, t_bound
from revsynth.logic.normal_form import algebraic_normal_form, degree
from revsynth.logic.truth_table import pack, pack_values
from revsynth.options import Oracle


def function(inputs: int, outputs: int, values: list[int], care: list[int] | None = None) -> Function:
    numbers = np.array(values, dtype=np.int64)
    mask = np.full(len(values), (1 << outputs) - 1) if care is None else np.array(care, dtype=np.int64)
    return Function(
        inputs, outputs, pack_values(numbers & mask, outputs), pack_values(mask, outputs), pack(mask != 0)
    )


@st.composite
def tables(draw: st.DrawFn) -> tuple[int, list[list[int]]]:
    """Inputs, and tables that are often built from few variables after a linear map."""
    inputs = draw(st.integers(0, 5))
    size = 1 << inputs
    if draw(st.booleans()) or inputs < 2:
        bits = st.lists(st.integers(0, 1), min_size=size, max_size=size)
        return inputs, draw(st.lists(bits, min_size=1, max_size=3))
    masks = draw(st.lists(st.integers(0, size - 1), min_size=1, max_size=4))
    rows = draw(st.lists(st.integers(0, (1 << (1 << len(masks))) - 1), min_size=1, max_size=2))
    found = []
    for row in rows:
        keys = [sum(((x & m).bit_count() & 1) << i for i, m in enumerate(masks)) for x in range(size)]
        found.append([row >> key & 1 for key in keys])
    return inputs, found


@given(tables(), st.integers(0, 3))
def test_flat_directions_by_trying_all(case: tuple[int, list[list[int]]], most: int) -> None:
    inputs, rows = case
    flat = 0
    for a in range(1 << inputs):
        derivatives = [[row[x] ^ row[x ^ a] for x in range(1 << inputs)] for row in rows]
        columns = np.array([pack(np.array(d, dtype=np.uint8)) for d in derivatives])
        flat += degree(algebraic_normal_form(columns, inputs), inputs) <= most
    columns = np.array([pack(np.array(row, dtype=np.uint8)) for row in rows])
    assert 1 << flat_directions(columns, inputs, most) == flat


def nullity(state: np.ndarray) -> int:
    """Qubits less the logarithm of how many Paulis, up to sign, fix the state: by trying all 4^q."""
    size = len(state)
    index = np.arange(size)
    fixed = 0
    for a in range(size):
        for b in range(size):
            signs = 1 - 2 * (np.bitwise_count(index & b) & 1).astype(int)
            overlap = abs(float(np.dot(state[index ^ a], signs * state)))
            fixed += overlap > 1 - 1e-9
    return (size.bit_length() - 1) - (fixed.bit_length() - 1)


@given(st.integers(1, 4).flatmap(lambda n: st.tuples(st.just(n), st.integers(0, (1 << (1 << n)) - 1))))
def test_the_bound_of_a_phase_oracle_is_the_nullity_of_its_state(case: tuple[int, int]) -> None:
    """Definition: Beverland, Campbell, Howard, Kliuchnikov 2020, section on stabilizer nullity."""
    inputs, table = case
    values = [table >> x & 1 for x in range(1 << inputs)]
    state = (1 - 2 * np.array(values)) / (1 << inputs) ** 0.5
    assert t_bound(function(inputs, 1, values), "phase")[0] == nullity(state)


@given(st.lists(st.integers(0, 3), min_size=8, max_size=8))
def test_the_bound_of_a_subroutine_is_the_nullity_of_its_state(values: list[int]) -> None:
    """Three inputs, two outputs: the sum over x of |x>|f(x)>."""
    state = np.zeros(32)
    for x, value in enumerate(values):
        state[x | value << 3] = 8**-0.5
    oracles: tuple[Oracle, ...] = ("bit", "fresh", "compute", "embedded")
    wanted = nullity(state)
    for oracle in oracles:
        assert t_bound(function(3, 2, values), oracle)[0] == wanted


@pytest.mark.parametrize("controls", range(2, 12))
def test_a_gate_with_k_controls(controls: int) -> None:
    """At least k + 1 T gates: Beverland, Campbell, Howard, Kliuchnikov 2020 (from memory)."""
    last = (1 << controls + 1) - 1
    phase = function(controls + 1, 1, [int(x == last) for x in range(last + 1)])
    assert t_bound(phase, "phase")[0] == controls + 1
    if controls < 8:
        flip = function(controls, 1, [int(x == last >> 1) for x in range(last + 1 >> 1)])
        assert t_bound(flip, "bit")[0] == controls + 1
        assert and_bound(flip)[0] == controls - 1


def test_clifford_circuits_need_none() -> None:
    """CZ, CNOT and X only: quadratic phases, such as the majority of three; affine maps."""
    assert t_bound(function(3, 1, [0, 0, 0, 1, 0, 1, 1, 1]), "phase")[0] == 0
    assert t_bound(function(3, 3, [x ^ x >> 1 ^ 5 for x in range(8)]), "inplace")[0] == 0
    assert and_bound(function(3, 1, [(x & 5).bit_count() & 1 for x in range(8)]))[0] == 0


def test_the_reasons_of_and_counts() -> None:
    """x mod 5 = 0 on four bits needs one AND: recomputed from Turan, Peralta, LightSec 2014."""
    fives = function(4, 1, [int(x % 5 == 0) for x in range(16)])
    assert and_bound(fives) == (1, "exact, by affine class (Turan, Peralta 2014)")
    seven = function(7, 1, [int(x == 127) for x in range(128)])
    assert and_bound(seven) == (6, "degree 7: at least degree - 1 (Schnorr 1988)")
    square = function(3, 6, [x * x for x in range(8)])
    found = and_bound(square)
    assert found == (4, "4 output bits are independent modulo affine functions: an AND for each")


def test_free_values_count_only_where_all_fillings_can_be_tried() -> None:
    """Where x = 3 is free a conjunction of two may be the constant 0."""
    free = function(2, 1, [0, 0, 0, 0], [1, 1, 1, 0])
    found = lower_bound(free, "phase", "unitary")
    assert found is not None
    assert (found.t, found.ands) == (None, 0)
    assert "over all ways to fill in" in found.ands_why
    assert found.to_json() is None
    assert lower_bound(function(6, 1, [0] * 64, [1] * 63 + [0]), "phase", "unitary") is None


def test_what_is_too_large_or_no_predicate_has_no_bound() -> None:
    assert t_bound(function(3, 2, [0] * 8), "phase") == (None, "")
    with pytest.raises(ValueError, match="at most 16 inputs"):
        flat_directions(np.zeros((1, 1 << 11), dtype=np.uint64), 17, 1)
    with pytest.raises(ValueError, match="a degree from 0 on"):
        flat_directions(np.zeros((1, 1), dtype=np.uint64), 2, -1)


@pytest.mark.parametrize("uncompute", ["unitary", "measured"])
@pytest.mark.parametrize(
    ("where", "widths"),
    [("a == 7", {"a": 3}), ("a * b == 6", {"a": 3, "b": 2}), ("popcount(a) >= 3", {"a": 5})],
)
def test_no_circuit_that_is_built_beats_its_bound(where: str, widths: dict[str, int], uncompute: str) -> None:
    for oracle in ("phase", "bit", "fresh"):
        built = revsynth.build(revsynth.predicate(where, inputs=widths), oracle=oracle, uncompute=uncompute)
        table = built._built.understanding.tabulated
        assert table is not None
        found = lower_bound(table, oracle, "unitary")  # type: ignore[arg-type]
        assert found is not None
        assert found.t is not None
        assert built.cost["t"] is not None
        assert 0 < found.t <= built.cost["t"]


def test_json_has_the_bound_beside_the_result() -> None:
    built = revsynth.build(revsynth.predicate("a == 7", inputs={"a": 3}), oracle="phase")
    found = built.to_json()["lower_bound"]
    assert (found["t"], found["ands"]) == (3, 2)
    assert "3 of 3 input directions" in found["why"]
    assert revsynth.build(built.spec, gates="toffoli").lower_bound is None
