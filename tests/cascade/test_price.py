"""The estimate of T gates against the published counts."""

from __future__ import annotations

import pytest
from hypothesis import given
from hypothesis import strategies as st

from revsynth.cascade import PHASE, Cascade, Gate
from revsynth.cascade.price import cascade_t, gate_t
from revsynth.options import Uncompute
from tests.strategies import cascades


@pytest.mark.parametrize("uncompute", ["unitary", "measured"])
@pytest.mark.parametrize("controls", [0, 1])
def test_not_and_cnot_are_free(controls: int, uncompute: Uncompute) -> None:
    assert gate_t(controls, uncompute) == 0


@pytest.mark.parametrize(("controls", "t"), [(2, 7), (3, 15), (4, 23), (5, 31), (10, 71)])
def test_unitary(controls: int, t: int) -> None:
    """Toffoli 7 (Gosset, Kothari, et al., arXiv 1308.4134); clean chains 15, 23, 31, 71 after merging.

    8k - 9: Maslov, Phys. Rev. A 93, 2016; the chain values as in Amy, Maslov, Mosca, IEEE TCAD 33(10), 2014.
    """
    assert gate_t(controls, "unitary") == t


@pytest.mark.parametrize(("controls", "t"), [(2, 4), (3, 8), (5, 16), (64, 252)])
def test_measured(controls: int, t: int) -> None:
    """4 T an AND: Jones 2013; Gidney, Quantum 2, 2018."""
    assert gate_t(controls, "measured") == t


def test_a_phase_costs_as_the_not_of_one_control_less() -> None:
    """Z on one of its literals, the others as controls: a controlled Z has no target (common practice)."""
    gates = [Gate(PHASE), Gate(PHASE, (0,)), Gate(PHASE, (0, 2)), Gate(PHASE, (0, 2, 4)), Gate(3, (0, 2, 4))]
    prices = [cascade_t(Cascade.from_gates(4, [gate]), "unitary") for gate in gates]
    assert prices == [0, 0, 0, 7, 15]


@given(cascades(phase=True), st.sampled_from(("unitary", "measured")))
def test_a_cascade_costs_what_its_gates_cost(cascade: Cascade, uncompute: Uncompute) -> None:
    wanted = sum(gate_t(len(gate.controls) - (gate.target == PHASE), uncompute) for gate in cascade)
    assert cascade_t(cascade, uncompute) == wanted
    assert cascade_t(cascade + cascade, uncompute) == 2 * wanted
