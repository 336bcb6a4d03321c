"""Which gates count as Clifford: against the definition, by matrices."""

from __future__ import annotations

import itertools
import math

import numpy as np
import pytest

from revsynth.circuit.clifford import Class, classify
from revsynth.circuit.model import ANGLES, TARGETS, Circuit, CircuitBuilder, Kind
from tests.slow_simulator import unitary

PAULIS = [np.eye(2), np.array([[0, 1], [1, 0]]), np.array([[0, -1j], [1j, 0]]), np.diag([1, -1])]
GRID = [*(eighths * math.pi / 4 for eighths in (0, 1, 2, 3, 4, 6, 8, -2)), 0.3]


def is_clifford(matrix: np.ndarray, qubits: int) -> bool:
    """Whether every Pauli matrix on one qubit goes to a product of Pauli matrices, by definition."""
    products = [np.array([[1.0]])]
    for _ in range(qubits):
        products = [np.kron(p, product) for p in PAULIS for product in products]
    for place in range(qubits):
        for pauli in PAULIS[1:]:
            there = np.kron(np.eye(1 << (qubits - place - 1)), np.kron(pauli, np.eye(1 << place)))
            image = matrix @ there @ matrix.conj().T
            overlaps = [abs(np.trace(product.conj().T @ image)) / (1 << qubits) for product in products]
            if max(overlaps) < 1 - 1e-6:
                return False
    return True


def one_gate(kind: Kind, controls: int, angles: tuple[float, ...]) -> Circuit:
    """The gate alone on as few qubits as it touches."""
    builder = CircuitBuilder()
    builder.add_register("q", controls + TARGETS[kind])
    targets = range(controls, controls + TARGETS[kind])
    builder.add(kind, targets, [2 * c for c in range(controls)], angles)
    return builder.build()


UNITARY_KINDS = [kind for kind in Kind if kind not in (Kind.MEASURE, Kind.RESET)]


@pytest.mark.parametrize("kind", UNITARY_KINDS, ids=lambda kind: kind.name)
def test_what_counts_as_clifford_is_clifford_and_nothing_else_is(kind):
    free = {Class.CLIFFORD, Class.CX, Class.CZ}
    for controls in range(4 - TARGETS[kind]):
        for angles in itertools.product(GRID, repeat=ANGLES[kind]):
            if len(angles) == 3 and controls > 1 and angles[1] != angles[2]:
                continue
            found = classify(kind, controls + TARGETS[kind], angles)
            size = controls + TARGETS[kind]
            assert (found in free) == is_clifford(unitary(one_gate(kind, controls, angles)), size), (
                controls,
                angles,
            )


def test_a_t_is_a_t_by_any_name():
    for kind in (Kind.P, Kind.RZ):
        for odd in (-3, -1, 1, 3, 5, 9):
            assert classify(kind, 1, (odd * math.pi / 4,)) is Class.T
        assert classify(kind, 1, (math.pi / 8,)) is Class.ROTATION
        assert classify(kind, 2, (math.pi / 4,)) is Class.OTHER
    assert classify(Kind.GPHASE, 1, (math.pi / 4,)) is Class.T
    assert classify(Kind.RX, 1, (math.pi / 4,)) is Class.ROTATION


def test_doubly_controlled_x_and_z_are_toffolis_and_more_is_other():
    assert classify(Kind.X, 3, ()) is Class.TOFFOLI
    assert classify(Kind.Z, 3, ()) is Class.TOFFOLI
    assert classify(Kind.GPHASE, 3, (math.pi,)) is Class.TOFFOLI
    assert classify(Kind.X, 4, ()) is Class.OTHER
    assert classify(Kind.SWAP, 3, ()) is Class.OTHER
    assert classify(Kind.T, 2, ()) is Class.OTHER
    assert classify(Kind.MEASURE, 1, ()) is Class.CLIFFORD
