"""Hypothesis strategies for circuits and helpers that several tests of this room share."""

from __future__ import annotations

import cmath
import math
from collections.abc import Callable, Sequence

import numpy as np
from hypothesis import strategies as st

from revsynth.circuit.model import ANGLES, TARGETS, Circuit, CircuitBuilder, Guard, Kind

H3 = 'OPENQASM 3.0;\ninclude "stdgates.inc";\n'
H2 = 'OPENQASM 2.0;\ninclude "qelib1.inc";\n'

UNITARY = tuple(kind for kind in Kind if kind not in (Kind.MEASURE, Kind.RESET))
PLAIN = ((Kind.H, 0), (Kind.X, 0), (Kind.Z, 0), (Kind.S, 0), (Kind.SDG, 0), (Kind.T, 0), (Kind.TDG, 0))

angles = st.one_of(
    st.sampled_from(
        [math.pi, -math.pi, math.pi / 2, math.pi / 4, -3 * math.pi / 4, 5 * math.pi / 7, 0.0, 1e-9]
    ),
    st.builds(lambda k, d: k * math.pi / d, st.integers(-99, 99), st.integers(1, 64)),
    st.floats(-1e6, 1e6, allow_nan=False),
)


@st.composite
def conditions(draw: st.DrawFn, bits: int) -> tuple[Guard, ...]:
    """A condition of one or two guards on any literals."""
    literal = st.integers(0, 2 * bits - 1)
    guard = st.builds(Guard, st.lists(literal, min_size=1, max_size=3).map(tuple), st.booleans())
    return tuple(draw(st.lists(guard, min_size=1, max_size=2)))


@st.composite
def circuits(
    draw: st.DrawFn,
    kinds: Sequence[Kind] = tuple(Kind),
    max_qubits: int = 5,
    max_gates: int = 20,
    max_controls: int = 4,
    negative: bool = True,
    conditional: bool = True,
    min_qubits: int = 1,
) -> Circuit:
    """A circuit over one to three registers, with bits where it measures."""
    builder = CircuitBuilder()
    qubits = draw(st.integers(min_qubits, max_qubits))
    for name in ("a", "k_", "cell_0"):
        if builder.qubits < qubits:
            builder.add_register(name, draw(st.integers(1, qubits - builder.qubits)))
    if builder.qubits < qubits:
        builder.add_register("work", qubits - builder.qubits)
    builder.add_bits("seen", 3)
    for _ in range(draw(st.integers(0, max_gates))):
        kind = draw(st.sampled_from([kind for kind in kinds if TARGETS[kind] <= builder.qubits]))
        order = draw(st.permutations(range(builder.qubits)))
        targets = order[: TARGETS[kind]]
        others = order[TARGETS[kind] :]
        count = (
            0 if kind in (Kind.MEASURE, Kind.RESET) else draw(st.integers(0, min(max_controls, len(others))))
        )
        controls = [2 * qubit + (draw(st.booleans()) if negative else 0) for qubit in others[:count]]
        condition = draw(conditions(3)) if conditional and draw(st.booleans()) else ()
        builder.add(
            kind,
            targets,
            controls,
            tuple(draw(angles) for _ in range(ANGLES[kind])),
            condition,
            draw(st.integers(0, 2)) if kind is Kind.MEASURE else -1,
        )
    return builder.build()


def operator(qubits: int, act: Callable[[int], dict[int, complex]]) -> np.ndarray:
    """The matrix whose column x is `act(x)`, amplitudes by basis state; bit q of a state is qubit q."""
    matrix = np.zeros((1 << qubits, 1 << qubits), dtype=complex)
    for column in range(1 << qubits):
        for row, amplitude in act(column).items():
            matrix[row, column] += amplitude
    return matrix


def embedded(
    matrix: Sequence[Sequence[complex]], target: int, controls: Sequence[int], qubits: int
) -> np.ndarray:
    """A 2 x 2 matrix on `target`, where all control literals hold (2 * qubit, + 1 waits for 0)."""

    def act(state: int) -> dict[int, complex]:
        if not all((state >> (control >> 1)) & 1 == 1 - (control & 1) for control in controls):
            return {state: 1}
        value = state >> target & 1
        cleared = state & ~(1 << target)
        return {cleared: matrix[0][value], cleared | 1 << target: matrix[1][value]}

    return operator(qubits, act)


def close(one: np.ndarray, other: np.ndarray) -> bool:
    """Equal to 1e-9, phases included."""
    return bool(np.allclose(one, other, atol=1e-9, rtol=0))


def close_up_to_phase(one: np.ndarray, other: np.ndarray) -> bool:
    """Equal to 1e-9 up to one constant phase."""
    overlap = np.vdot(other, one)
    phase = overlap / abs(overlap) if abs(overlap) > 1e-12 else 1
    return close(one, phase * other)


def u_matrix(theta: float, phi: float, lam: float) -> list[list[complex]]:
    """U with a real upper left entry (arXiv 2104.14722)."""
    cos, sin = math.cos(theta / 2), math.sin(theta / 2)
    return [
        [cos, -cmath.exp(1j * lam) * sin],
        [cmath.exp(1j * phi) * sin, cmath.exp(1j * (phi + lam)) * cos],
    ]
