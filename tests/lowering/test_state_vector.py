"""Lowered circuits in qulacs, a general-purpose state-vector simulator from PyPI, driven gate by gate."""

from __future__ import annotations

import os

os.environ.setdefault("OMP_NUM_THREADS", "1")

import numpy as np
import pytest
import qulacs
from qulacs.gate import CNOT, CZ, P0, P1, TOFFOLI, H, S, Sdag, T, Tdag, X, Z, to_matrix_gate

from revsynth.cascade import PHASE, Cascade, Gate
from revsynth.circuit.model import Circuit, Kind, Op
from revsynth.lowering import lower
from revsynth.synthesis.interface import Block
from tests.slow_simulator import run_cascade

SINGLE = {Kind.X: X, Kind.Z: Z, Kind.H: H, Kind.S: S, Kind.SDG: Sdag, Kind.T: T, Kind.TDG: Tdag}


def gate_of(op: Op) -> qulacs.QuantumGateBase:
    """The gate of that library for an operation of a lowered circuit."""
    controls = [control >> 1 for control in op.controls]
    target = op.targets[0]
    if not controls:
        return SINGLE[op.kind](target)
    if len(controls) == 1:
        return (CNOT if op.kind is Kind.X else CZ)(controls[0], target)
    if op.kind is Kind.X:
        return TOFFOLI(controls[0], controls[1], target)
    gate = to_matrix_gate(Z(target))
    for control in controls:
        gate.add_control_qubit(control, 1)
    return gate


def run(circuit: Circuit, vector: np.ndarray, rng: np.random.Generator) -> np.ndarray:
    """One branch with random outcomes; the vector keeps the length that the branch leaves it."""
    state = qulacs.QuantumState(circuit.qubits)
    state.load(vector)
    bits = [0] * circuit.bits
    sign = 1
    for op in circuit:
        if op.condition >= 0 and not bits[circuit.conditions[op.condition][0].bits[0] >> 1]:
            continue
        if op.kind is Kind.GPHASE:
            sign = -sign
        elif op.kind is Kind.MEASURE:
            bits[op.bit] = int(rng.integers(2))
            (P1 if bits[op.bit] else P0)(op.targets[0]).update_quantum_state(state)
        else:
            gate_of(op).update_quantum_state(state)
    return sign * state.get_vector()


def random_cascade(lines: int, gates: int, rng: np.random.Generator, phase: bool) -> Cascade:
    """Gates of up to `lines` lines, both polarities."""
    made = []
    for _ in range(gates):
        target = int(rng.integers(PHASE if phase else 0, lines))
        chosen = [line for line in range(lines) if line != target and rng.random() < 0.6]
        made.append(Gate(target, tuple(2 * line + int(rng.integers(2)) for line in chosen)))
    return Cascade.from_gates(lines, made)


@pytest.mark.parametrize("most", [None, 9, 10, 12])
@pytest.mark.parametrize("phase", [False, True])
@pytest.mark.parametrize("uncompute", ["unitary", "measured"])
@pytest.mark.parametrize("gates", ["toffoli", "clifford+t"])
def test_a_superposition_of_all_inputs_ends_as_it_should(gates, uncompute, phase, most):
    """Eight lines, random amplitudes on all 256 inputs, up to twelve qubits."""
    rng = np.random.default_rng(5)
    for _ in range(4):
        cascade = random_cascade(8, 12, rng, phase)
        block = Block(cascade, "test", 8)
        most = most or 12
        circuit = lower(
            block, [("a", 8)], oracle="inplace", gates=gates, uncompute=uncompute, max_qubits=most
        )
        amplitudes = rng.normal(size=256) + 1j * rng.normal(size=256)
        amplitudes /= np.linalg.norm(amplitudes)
        vector = np.zeros(1 << circuit.qubits, dtype=complex)
        vector[:256] = amplitudes
        wanted = np.zeros_like(vector)
        for x in range(256):
            y, sign = run_cascade(cascade, x)
            wanted[y] = sign * amplitudes[x]
        measured = int((circuit.kind == Kind.MEASURE).sum())
        got = run(circuit, vector, rng) * 2 ** (measured / 2)
        assert np.abs(got - wanted).max() < 1e-9
