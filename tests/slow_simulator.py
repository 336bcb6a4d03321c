"""The slow, obvious reference: one gate at a time, one state at a time, textbook matrices.

Every fast simulator is tested against this one. Bit 0 / line 0 / qubit 0 is the least significant.
"""

from __future__ import annotations

import cmath
import math

import numpy as np

from revsynth.cascade import PHASE, Cascade
from revsynth.circuit.model import Circuit, Kind, Op


def run_cascade(cascade: Cascade, state: int) -> tuple[int, int]:
    """The state after the cascade and its sign, +1 or -1."""
    sign = 1
    for gate in cascade:
        holds = all((state >> (c >> 1)) & 1 == 1 - (c & 1) for c in gate.controls)
        if holds and gate.target == PHASE:
            sign = -sign
        elif holds:
            state ^= 1 << gate.target
    return state, sign


def matrix(kind: Kind, angles: tuple[float, ...] = ()) -> np.ndarray:
    """The textbook matrix of a one-qubit kind."""
    w = cmath.exp(1j * math.pi / 4)
    fixed = {
        Kind.X: [[0, 1], [1, 0]],
        Kind.Y: [[0, -1j], [1j, 0]],
        Kind.Z: [[1, 0], [0, -1]],
        Kind.H: [[math.sqrt(0.5), math.sqrt(0.5)], [math.sqrt(0.5), -math.sqrt(0.5)]],
        Kind.S: [[1, 0], [0, 1j]],
        Kind.SDG: [[1, 0], [0, -1j]],
        Kind.T: [[1, 0], [0, w]],
        Kind.TDG: [[1, 0], [0, w.conjugate()]],
        Kind.SX: [[(1 + 1j) / 2, (1 - 1j) / 2], [(1 - 1j) / 2, (1 + 1j) / 2]],
        Kind.SXDG: [[(1 - 1j) / 2, (1 + 1j) / 2], [(1 + 1j) / 2, (1 - 1j) / 2]],
    }
    if kind in fixed:
        return np.array(fixed[kind], dtype=complex)
    a = angles[0]
    if kind is Kind.P:
        return np.diag([1, cmath.exp(1j * a)])
    if kind is Kind.RZ:
        return np.diag([cmath.exp(-0.5j * a), cmath.exp(0.5j * a)])
    cos, sin = math.cos(a / 2), math.sin(a / 2)
    if kind is Kind.RX:
        return np.array([[cos, -1j * sin], [-1j * sin, cos]])
    if kind is Kind.RY:
        return np.array([[cos, -sin], [sin, cos]], dtype=complex)
    if kind is Kind.U:
        _, phi, lam = angles
        return np.array(
            [
                [cos, -cmath.exp(1j * lam) * sin],
                [cmath.exp(1j * phi) * sin, cmath.exp(1j * (phi + lam)) * cos],
            ]
        )
    raise AssertionError(kind)


def apply(op: Op, vector: np.ndarray) -> np.ndarray:
    """One unitary operation on a state vector, index bit q the value of qubit q."""
    index = np.arange(vector.size)
    holds = np.ones(vector.size, dtype=bool)
    for control in op.controls:
        holds &= ((index >> (control >> 1)) & 1) == 1 - (control & 1)
    after = vector.copy()
    if op.kind is Kind.GPHASE:
        after[holds] *= cmath.exp(1j * op.angles[0])
    elif op.kind is Kind.SWAP:
        a, b = op.targets
        differ = ((index >> a) & 1) != ((index >> b) & 1)
        partner = np.where(differ, index ^ (1 << a) ^ (1 << b), index)
        after[holds] = vector[partner[holds]]
    else:
        m = matrix(op.kind, op.angles)
        bit = (index >> op.targets[0]) & 1
        other = index ^ (1 << op.targets[0])
        here, there = m[bit[holds], bit[holds]], m[bit[holds], 1 - bit[holds]]
        after[holds] = here * vector[holds] + there * vector[other[holds]]
    return after


def condition_holds(circuit: Circuit, op: Op, bits: list[int]) -> bool:
    """Whether the operation's `if` lets it act, given the classical bits."""
    if op.condition < 0:
        return True
    return all(
        all(bits[b >> 1] == 1 - (b & 1) for b in guard.bits) == guard.expected
        for guard in circuit.conditions[op.condition]
    )


def run_circuit(circuit: Circuit, vector: np.ndarray) -> list[tuple[tuple[int, ...], np.ndarray]]:
    """Every branch of measurement outcomes: (classical bits, unnormalised state). RESET branches too."""
    branches = [([0] * circuit.bits, vector.astype(complex))]
    for op in circuit:
        after = []
        for bits, state in branches:
            if not condition_holds(circuit, op, bits):
                after.append((bits, state))
            elif op.kind in (Kind.MEASURE, Kind.RESET):
                for outcome in (0, 1):
                    keep = ((np.arange(state.size) >> op.targets[0]) & 1) == outcome
                    part = np.where(keep, state, 0)
                    if np.linalg.norm(part) < 1e-12:
                        continue
                    new_bits = list(bits)
                    if op.kind is Kind.MEASURE:
                        new_bits[op.bit] = outcome
                    elif outcome:
                        part = apply(Op(Kind.X, (), op.targets), part)
                    after.append((new_bits, part))
            else:
                after.append((bits, apply(op, state)))
        branches = after
    return [(tuple(bits), state) for bits, state in branches]


def unitary(circuit: Circuit) -> np.ndarray:
    """The matrix of a circuit without measurement, column x the image of basis state x."""
    size = 1 << circuit.qubits
    columns = []
    for x in range(size):
        vector = np.zeros(size, dtype=complex)
        vector[x] = 1
        columns.append(run_circuit(circuit, vector)[0][1])
    return np.stack(columns, axis=1)
