"""Files mean the same matrix as the circuit, phase included, for the slow simulator and for qulacs."""

from __future__ import annotations

import os
import random

import numpy as np
import pytest
from hypothesis import given

from revsynth.circuit.model import Circuit, CircuitBuilder, Kind
from revsynth.errors import UsageError
from revsynth.qasm import prepare, read, write
from tests.qasm.circuits import UNITARY, circuits, close
from tests.slow_simulator import unitary


@given(circuits(kinds=UNITARY, max_qubits=4, max_gates=6, conditional=False))
def test_openqasm3_files_are_exact(circuit: Circuit) -> None:
    assert close(unitary(read(write(prepare(circuit, "openqasm3"))).circuit), unitary(circuit))


@given(circuits(kinds=UNITARY, max_qubits=4, max_gates=6, max_controls=2, negative=False, conditional=False))
def test_openqasm2_files_are_exact_where_they_can_be_written(circuit: Circuit) -> None:
    try:
        prepared = prepare(circuit, "openqasm2")
    except UsageError:
        return
    assert close(unitary(read(write(prepared, format="openqasm2")).circuit), unitary(circuit))


@pytest.mark.parametrize("format", ["openqasm2", "plain"])
@pytest.mark.parametrize("controls", [0, 1, 2])
@pytest.mark.parametrize("kind", UNITARY)
def test_every_rewriting_is_exact(kind: Kind, controls: int, format: str) -> None:
    """What each format takes of every kind, and that it stays the same matrix."""
    builder = CircuitBuilder()
    builder.add_register("a", 4)
    targets = {Kind.SWAP: (3, 1), Kind.GPHASE: ()}.get(kind, (3,))
    angles = {Kind.U: (0.3, -1.2, 2.2)}.get(kind, (0.7,) if kind in (10, 11, 12, 13, 16) else ())
    builder.add(kind, targets, [(), (4,), (4, 0)][controls], angles)
    circuit = builder.build()
    taken = True
    try:
        prepared = prepare(circuit, format)
    except UsageError:
        taken = False
    assert taken == ((kind.name, controls) in HELD[format])
    if taken:
        text = write(prepared, format=format)
        assert close(unitary(read(text).circuit), unitary(circuit))


_ONE = ["X", "Z", "H", "S", "SDG", "T", "TDG", "SX", "SXDG", "SWAP"]
HELD = {
    "openqasm2": {(name, 0) for name in [*_ONE, "Y", "P", "RX", "RY", "RZ", "U", "GPHASE"]}
    | {(name, 1) for name in [*_ONE, "Y", "P", "RX", "RY", "RZ", "GPHASE"]}
    | {("X", 2), ("Y", 2), ("Z", 2), ("GPHASE", 2)},
    "plain": {(name, 0) for name in [*_ONE, "Y"]} | {("X", 1), ("Y", 1), ("Z", 1)},
}


@pytest.mark.parametrize("format", ["openqasm2", "plain"])
@pytest.mark.parametrize("eighth", range(-9, 10))
def test_phases_by_eighths_of_a_turn_need_clifford_and_t_alone(eighth: int, format: str) -> None:
    builder = CircuitBuilder()
    builder.add_register("a", 2)
    builder.add(Kind.GPHASE, (), (), (eighth * np.pi / 4,))
    builder.add(Kind.SX, (1,))
    if format == "plain":
        builder.add(Kind.P, (1,), (), (eighth * np.pi / 4,))
    circuit = builder.build()
    prepared = prepare(circuit, format)
    assert close(unitary(prepared), unitary(circuit))
    assert all(op.kind in (Kind.X, Kind.Z, Kind.H, Kind.S, Kind.SDG, Kind.T, Kind.TDG) for op in prepared)


def test_a_state_vector_simulator_of_general_purpose_agrees() -> None:
    """qulacs, driven gate by gate by the names and operands in the text; it knows nothing of our model."""
    os.environ.setdefault("OMP_NUM_THREADS", "1")
    import qulacs

    rng = random.Random(11)
    builder = CircuitBuilder()
    builder.add_register("a", 4)
    builder.add_register("work", 3)
    for _ in range(300):
        qubits = rng.sample(range(7), 4)
        kind = rng.choice([Kind.X, Kind.X, Kind.Z, Kind.H, Kind.S, Kind.TDG, Kind.T, Kind.SDG])
        controls = [2 * qubit + rng.randrange(2) for qubit in qubits[1 : 1 + rng.randrange(4)]]
        builder.add(kind, qubits[:1], controls)
    text = write(prepare(builder.build(), "openqasm3"))
    state = qulacs.QuantumState(7)
    state.set_Haar_random_state(3)
    before = state.get_vector()
    matrices = {
        "x": qulacs.gate.X, "z": qulacs.gate.Z, "h": qulacs.gate.H, "s": qulacs.gate.S,
        "sdg": qulacs.gate.Sdag, "t": qulacs.gate.T, "tdg": qulacs.gate.Tdag,
    }  # fmt: skip
    for line in text.splitlines()[4:]:
        *modifiers, gate = line.rstrip(";").split(" @ ")
        name, _, operands = gate.partition(" ")
        polarities: list[int] = []
        for modifier in modifiers:
            count = int(modifier[5:-1]) if "(" in modifier else 1
            polarities += [int(not modifier.startswith("neg"))] * count
        numbers = [
            {"a": 0, "work": 4}[entry.partition("[")[0]] + int(entry.partition("[")[2][:-1])
            for entry in operands.split(", ")
        ]
        inside = 0 if name in matrices else len(name) - len(name.lstrip("c"))
        polarities += [1] * inside
        applied = qulacs.gate.to_matrix_gate(matrices[name[inside:]](numbers[-1]))
        for qubit, polarity in zip(numbers, polarities, strict=False):
            applied.add_control_qubit(qubit, polarity)
        applied.update_quantum_state(state)
    assert np.allclose(state.get_vector(), unitary(read(text).circuit) @ before, atol=1e-9)
