"""Orders that let neighbours share products: the function stays, the T count falls."""

from __future__ import annotations

import pytest
from hypothesis import given
from hypothesis import strategies as st

from revsynth.cascade import PHASE, Cascade, Gate
from revsynth.cascade.price import cascade_t
from revsynth.circuit.cost import measure
from revsynth.circuit.model import Circuit
from revsynth.lowering import lower, sharing, variants
from revsynth.lowering.fan_out import Unit, units_of
from revsynth.lowering.sharing import arrange, order_units
from revsynth.synthesis.interface import Block
from tests.lowering.columns import check
from tests.lowering.test_fan_out import as_cascade
from tests.slow_simulator import run_cascade
from tests.strategies import cascades


def lowered(cascade: Cascade, uncompute: str = "measured", most: int | None = None) -> Circuit:
    """For the aim T."""
    block = Block(cascade, "test", cascade.lines)
    registers = [("a", cascade.lines)]
    return lower(block, registers, oracle="phase", gates="clifford+t", uncompute=uncompute, max_qubits=most)


@given(cascades(max_lines=5, max_gates=20, phase=True))
def test_an_order_of_units_keeps_the_function(cascade):
    ordered = order_units(units_of(cascade), cascade.lines)
    assert sorted(ordered) == sorted(units_of(cascade))
    joined = as_cascade(cascade.lines, ordered)
    assert all(run_cascade(joined, x) == run_cascade(cascade, x) for x in range(1 << cascade.lines))


def test_long_runs_are_ordered_window_by_window(monkeypatch):
    monkeypatch.setattr(sharing, "WINDOW", 4)
    numbers = (0, 9, 1, 8, 3, 12, 7, 15, 2)
    units = [Unit(tuple(2 * line + (i >> line & 1) for line in range(4)), ()) for i in numbers]
    assert sorted(order_units(units, 4)) == sorted(units)


def test_literals_beyond_one_word():
    near = [Unit((0, 2, 100), ()), Unit((4, 6, 8), ()), Unit((0, 10, 100), ())]
    assert order_units(near, 60) == [near[0], near[2], near[1]]


@given(
    st.sets(st.integers(0, 11)),
    st.permutations(range(12)),
    st.sets(st.integers(0, 5)),
    st.sets(st.integers(0, 11)),
)
def test_arranging_is_a_permutation(literals, previous, changed, following):
    for shape in ("tree", "ladder"):
        assert sorted(arrange(sorted(literals), previous, changed, following, shape)) == sorted(literals)


def test_arranging_keeps_what_the_neighbour_did():
    assert arrange([0, 2, 4, 6, 9], [6, 9, 2, 11], set(), {0}, "ladder") == [6, 9, 2, 0, 4]
    assert arrange([0, 2, 4, 6], [6, 11, 2, 0], set(), set(), "tree") == [4, 6, 2, 0]
    assert arrange([0, 2, 4, 6], [6, 4, 2, 0], {3}, set(), "tree") == [4, 6, 2, 0]
    assert arrange([0, 2, 4, 6], [6, 4, 2, 0], {2}, {2, 4}, "ladder") == [6, 2, 4, 0]


def test_a_shared_product_is_paid_once():
    """Two signs on four literals that differ in the last: 4(k - 2) T each, 8 for both together."""
    cascade = Cascade.from_gates(5, [Gate(PHASE, (0, 2, 4, 6)), Gate(PHASE, (0, 2, 4, 8))])
    assert cascade_t(cascade, "measured") == 16
    assert measure(lowered(cascade)).t == 8
    check(lowered(cascade), cascade)


def test_sharing_pays_on_a_sum_of_products():
    """A fixed pseudo-random sum of 40 products on eight lines: at least a quarter less than gate by gate."""
    state, gates = 1, []
    for _ in range(40):
        state = state * 6364136223846793005 % 2**64
        digits = [(state >> (33 + 2 * line)) & 3 for line in range(8)]
        gates.append(Gate(PHASE, tuple(2 * line + (d & 1) for line, d in enumerate(digits) if d)))
    cascade = Cascade.from_gates(8, gates)
    for uncompute in ("unitary", "measured"):
        circuit = lowered(cascade, uncompute)
        assert measure(circuit).t < 0.75 * cascade_t(cascade, uncompute)
        if circuit.qubits <= 11:
            check(circuit, cascade)


@given(cascade=cascades(max_lines=5, max_gates=10, phase=True))
def test_large_and_small_cascades_go_the_same_way(cascade):
    """With the limits at 0 every cascade counts as large: one variant, the same function."""
    with pytest.MonkeyPatch.context() as patch:
        patch.setattr(variants, "SMALL", -1)
        patch.setattr(variants, "MIDDLING", -1)
        once = lowered(cascade)
    tried = lowered(cascade)
    check(once, cascade)
    assert measure(tried).t <= measure(once).t
