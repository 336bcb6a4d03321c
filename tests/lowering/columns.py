"""Lowered circuits on many states at once, one chosen branch of measurements, for the tests of this room."""

from __future__ import annotations

import cmath
from collections.abc import Callable

import numpy as np

from revsynth.cascade import Cascade
from revsynth.circuit.model import Circuit, Kind
from tests.slow_simulator import condition_holds, matrix, run_cascade


def run(circuit: Circuit, columns: np.ndarray, outcome: Callable[[int], int] = lambda _: 0) -> np.ndarray:
    """The columns (shape 2**qubits, many) after the circuit; measurement number i gives outcome(i).

    Columns are not rescaled after a measurement, so their lengths are the square roots of the branch weights.
    """
    state = columns.astype(complex)
    index = np.arange(len(state))
    bits = [0] * circuit.bits
    measured = 0
    for op in circuit:
        if not condition_holds(circuit, op, bits):
            continue
        holds = np.ones(len(state), dtype=bool)
        for control in op.controls:
            holds &= ((index >> (control >> 1)) & 1) == 1 - (control & 1)
        if op.kind is Kind.GPHASE:
            state[holds] *= cmath.exp(1j * op.angles[0])
            continue
        side = (index >> op.targets[0]) & 1
        if op.kind is Kind.MEASURE:
            bits[op.bit] = outcome(measured)
            measured += 1
            state[side != bits[op.bit]] = 0
            continue
        m = matrix(op.kind, op.angles)
        low = index[holds & (side == 0)]
        high = low | (1 << op.targets[0])
        state[low], state[high] = (
            m[0, 0] * state[low] + m[0, 1] * state[high],
            m[1, 0] * state[low] + m[1, 1] * state[high],
        )
    return state


def expected(cascade: Cascade, starts: np.ndarray, qubits: int) -> np.ndarray:
    """Columns of what the cascade makes of basis states, scratch in 0."""
    columns = np.zeros((1 << qubits, len(starts)), dtype=complex)
    for column, start in enumerate(starts.tolist()):
        after, sign = run_cascade(cascade, start)
        columns[after, column] = sign
    return columns


def check(circuit: Circuit, cascade: Cascade, zero_lines: tuple[int, ...] = (), seed: int = 0) -> None:
    """The circuit does what the cascade does, phases and clean scratch included, in several branches.

    zero_lines: lines that start in 0. Branches: all outcomes 0, all 1, alternating, two random ones; each
    must have the weight 2**-measurements whatever the input.
    """
    starts = np.arange(1 << cascade.lines)
    for line in zero_lines:
        starts = starts[(starts >> line) & 1 == 0]
    before = np.zeros((1 << circuit.qubits, len(starts)), dtype=complex)
    before[starts, np.arange(len(starts))] = 1
    wanted = expected(cascade, starts, circuit.qubits)
    measured = int((circuit.kind == Kind.MEASURE).sum())
    rng = np.random.default_rng(seed)
    randoms = [rng.integers(0, 2, measured).tolist() for _ in range(2)]
    branches = [[0] * measured]
    if measured:
        branches += [[1] * measured, [i % 2 for i in range(measured)], *randoms]
    for branch in branches:
        got = run(circuit, before, branch.__getitem__)
        assert np.abs(got - wanted * 2 ** (-measured / 2)).max() < 1e-9
