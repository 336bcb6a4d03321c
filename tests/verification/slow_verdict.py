"""The verdict by definition, one input and one record of outcomes at a time, with the slow simulator.

For every record of measurement and reset outcomes the (unnormalised) state of every input must be one
constant times the sign wanted times the basis state wanted; what is free must depend on the input alone.
"""

from __future__ import annotations

from collections.abc import Iterator

import numpy as np

from revsynth.circuit.model import Circuit, Kind, Op
from revsynth.logic.function import Function
from revsynth.logic.truth_table import unpack
from revsynth.verification.matching import Roles
from tests.slow_simulator import apply, condition_holds

History = tuple[int, ...]


def histories(circuit: Circuit, vector: np.ndarray) -> dict[History, np.ndarray]:
    """The unnormalised state for every record of outcomes, those of resets included."""
    branches: list[tuple[History, list[int], np.ndarray]] = [((), [0] * circuit.bits, vector.astype(complex))]
    for op in circuit:
        after = []
        for record, bits, state in branches:
            if not condition_holds(circuit, op, bits):
                after.append((record, bits, state))
            elif op.kind in (Kind.MEASURE, Kind.RESET):
                for outcome in (0, 1):
                    here = ((np.arange(state.size) >> op.targets[0]) & 1) == outcome
                    part = np.where(here, state, 0)
                    if np.linalg.norm(part) < 1e-9:
                        continue
                    new = list(bits)
                    if op.kind is Kind.MEASURE:
                        new[op.bit] = outcome
                    elif outcome:
                        part = apply(Op(Kind.X, (), op.targets), part)
                    after.append(((*record, outcome), new, part))
            else:
                after.append((record, bits, apply(op, state)))
        branches = after
    found: dict[History, np.ndarray] = {}
    for record, _, state in branches:
        found[record] = state
    return found


def starts(circuit: Circuit, roles: Roles, inputs: int) -> Iterator[tuple[int, int]]:
    """(input, basis state to start in), every starting value of outputs and lent qubits."""
    loose = (*(roles.outputs if roles.oracle == "bit" else ()), *roles.lent)
    preset = sum(value << qubit for qubit, value in roles.preset)
    for x in range(1 << inputs):
        state = preset | sum((x >> i & 1) << qubit for i, qubit in enumerate(roles.inputs))
        for y in range(1 << len(loose)):
            yield x, state | sum((y >> i & 1) << qubit for i, qubit in enumerate(loose))


def slow_verdict(circuit: Circuit, roles: Roles, function: Function) -> bool:
    """Whether the circuit does what is demanded, up to one constant phase a record."""
    values = [unpack(row, function.inputs) for row in function.values]
    cares = [unpack(row, function.inputs) for row in function.care]
    blocks = roles.oracle in ("inplace", "embedded")
    free_seen: dict[tuple[int, int], int] = {}
    weight: dict[History, float] = {}
    scale: dict[History, complex] = {}
    ends: list[tuple[int, History, complex, bool]] = []
    for x, start in starts(circuit, roles, function.inputs):
        if blocks and not any(care[x] for care in cares):
            continue
        vector = np.zeros(1 << circuit.qubits, dtype=complex)
        vector[start] = 1
        found = histories(circuit, vector)
        if weight and set(found) != set(weight):
            return False
        for record, state in found.items():
            norm = float(np.linalg.norm(state))
            if abs(weight.setdefault(record, norm) - norm) > 1e-9:
                return False
            support = np.flatnonzero(np.abs(state) > 1e-9)
            if len(support) != 1:
                return False
            end = int(support[0])
            if not _end_is_right(circuit, roles, x, start, end, values, cares, free_seen):
                return False
            ends.append((x, record, complex(state[end]), roles.oracle == "phase" and not cares[0][x]))
    for sign_free in (False, True):
        for x, record, amplitude, free in ends:
            if free != sign_free:
                continue
            wanted = -1 if roles.oracle == "phase" and values[0][x] else 1
            ratio = amplitude / scale.setdefault(record, wanted * amplitude)
            if free:
                if min(abs(ratio - 1), abs(ratio + 1)) > 1e-9:
                    return False
                got = int(ratio.real < 0)
                if free_seen.setdefault((-1, x), got) != got:
                    return False
            elif abs(ratio - wanted) > 1e-9:
                return False
    return True


def _end_is_right(
    circuit: Circuit,
    roles: Roles,
    x: int,
    start: int,
    end: int,
    values: list[np.ndarray],
    cares: list[np.ndarray],
    free_seen: dict[tuple[int, int], int],
) -> bool:
    for qubit in range(circuit.qubits):
        before, after = start >> qubit & 1, end >> qubit & 1
        if qubit in roles.outputs:
            number = roles.outputs.index(qubit)
            base = before if roles.oracle == "bit" else 0
            if cares[number][x]:
                if after != int(values[number][x]) ^ base:
                    return False
            elif free_seen.setdefault((qubit, x), after ^ base) != after ^ base:
                return False
        elif qubit in (*roles.kept, *roles.leftover):
            if free_seen.setdefault((qubit, x), after) != after:
                return False
        elif after != before:
            return False
    return True
