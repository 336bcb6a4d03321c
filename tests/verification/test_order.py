"""Another order of the steps is the same circuit, and keeps fewer branches open."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from revsynth.circuit.model import Circuit, CircuitBuilder, Guard, Kind
from revsynth.verification.bitsliced import CrowdedError, run_bitsliced
from revsynth.verification.elementary import Step, elementary
from revsynth.verification.order import close_early
from revsynth.verification.plan import plan
from tests.slow_simulator import unitary
from tests.verification.test_elementary import as_circuit
from tests.verification.textbook import register_circuit


@st.composite
def unitary_circuits(draw: st.DrawFn) -> Circuit:
    c = CircuitBuilder()
    c.add_register("q", 4)
    for _ in range(draw(st.integers(1, 14))):
        kind = draw(st.sampled_from((Kind.X, Kind.X, Kind.H, Kind.H, Kind.T, Kind.Z)))
        order = draw(st.permutations(range(4)))
        count = draw(st.integers(0, 2)) if kind in (Kind.X, Kind.Z) else 0
        c.add(kind, order[:1], [2 * q + draw(st.integers(0, 1)) for q in order[1 : 1 + count]])
    return c.build()


@given(unitary_circuits())
def test_the_unitary_stays(circuit: Circuit) -> None:
    steps = elementary(circuit)
    reordered = close_early(steps, circuit.qubits, ())
    assert sorted(reordered) == sorted(steps)
    np.testing.assert_allclose(
        unitary(as_circuit(reordered, 4)), unitary(as_circuit(steps, 4)), atol=1e-10, rtol=0
    )


def side_by_side(pairs: int) -> Circuit:
    """T-depth-one style pieces side by side: open qubits that control others, so branches multiply."""
    c = register_circuit(("a", pairs), ("t", pairs))
    layers: list[list[tuple[Kind, int, tuple[int, ...]]]] = [[] for _ in range(5)]
    for i in range(pairs):
        a, t = i, pairs + i
        layers[0].append((Kind.H, t, ()))
        layers[1].append((Kind.X, a, (2 * t,)))
        layers[2].append((Kind.Z, a, ()))
        layers[3].append((Kind.X, a, (2 * t,)))
        layers[4].append((Kind.H, t, ()))
    for layer in layers:
        for kind, target, controls in layer:
            c.add(kind, (target,), controls)
    return c.build()


def run(steps: list[Step], circuit: Circuit, most: int) -> None:
    made = plan(steps, circuit.conditions)
    half = circuit.qubits // 2
    run_bitsliced(made, [0b01] * half + [0] * half, 0b11, most_branches=most, most_runs=most)


def test_fewer_branches_are_open_at_once() -> None:
    circuit = side_by_side(10)
    steps = elementary(circuit)
    with pytest.raises(CrowdedError):
        run(steps, circuit, 512)
    run(close_early(steps, circuit.qubits, ()), circuit, 2)


def test_measurements_are_corrected_before_the_next_one() -> None:
    """Ten measurements in one layer, ten corrections in the next."""
    c = register_circuit(("a", 10), ("work", 10), bits=10)
    for i in range(10):
        c.cx(i, 10 + i)
    for i in range(10):
        c.h(10 + i)
    for i in range(10):
        c.measure(10 + i, i)
    for i in range(10):
        c.z(i, condition=(Guard((2 * i,)),))
        c.x(10 + i, condition=(Guard((2 * i,)),))
    circuit = c.build()
    steps = elementary(circuit)
    with pytest.raises(CrowdedError):
        run(steps, circuit, 512)
    run(close_early(steps, circuit.qubits, circuit.conditions), circuit, 2)
