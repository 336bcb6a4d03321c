"""Judging lifted circuits by tables, for tests: small enough to go through every start and outcome."""

from __future__ import annotations

import numpy as np

from revsynth.circuit.model import Circuit
from revsynth.logic.function import Function
from revsynth.logic.truth_table import unpack
from revsynth.verification.lifting import Account, Lifted, NotClosedError, account, lift, start_of
from revsynth.verification.matching import Roles
from tests.verification.slow_verdict import histories


def tabulate(lifted: Lifted, literals: list[int]) -> np.ndarray:
    """Rows of bits, (literals, 2**variables), variable 0 the lowest bit of the column number."""
    variables = len(lifted.variables)
    size = 1 << variables
    cases = np.arange(max(size, 64))
    columns = [np.packbits((cases >> v & 1).astype(np.uint8), bitorder="little") for v in range(variables)]
    words = np.array([column.view(np.uint64) for column in columns]).reshape(variables, max(size, 64) // 64)
    values = lifted.export(literals).simulate(words.astype(np.uint64))
    return np.unpackbits(values.view(np.uint8), axis=1, bitorder="little", count=size)


def verdict(circuit: Circuit, roles: Roles, function: Function) -> bool | None:
    """Whether lifting shows that a circuit does what is demanded of a function without free values."""
    start, variables = start_of(roles, circuit.qubits)
    try:
        lifted = lift(circuit, start, variables)
    except NotClosedError:
        return None
    return judge(lifted, account(lifted, roles), roles, function)


def judge(lifted: Lifted, found: Account, roles: Roles, function: Function) -> bool:
    """Go through all starts and outcomes."""
    wanted = np.array([unpack(row, function.inputs) for row in function.values], dtype=np.uint8)
    kept = [literal for _, literal in found.kept]
    claims = [claim.literal for claim in found.claims]
    table = tabulate(lifted, [*found.outputs, *kept, *claims, found.sign])
    by_input = table.reshape(len(table), -1, 1 << function.inputs)
    if any(
        len(set(row.tolist())) > 1 for rows in by_input[len(found.outputs) :][: len(kept)] for row in rows.T
    ):
        return False
    for claim, row in zip(found.claims, table[len(found.outputs) + len(kept) :], strict=False):
        if (row != (row[0] if claim.constant else 0)).any():
            return False
    if roles.oracle == "phase":
        return bool((by_input[-1] ^ wanted[0] == by_input[-1][0, 0] ^ wanted[0][0]).all())
    return bool((by_input[: len(wanted)] == wanted[:, np.newaxis]).all())


def check_against_states(circuit: Circuit, start: list[int], variables: int) -> bool:
    """Compare a lifting with states of the slow simulator; False where the lifting does not close."""
    try:
        lifted = lift(circuit, start, variables)
    except NotClosedError:
        return False
    if len(lifted.variables) > variables:
        return False
    literals = [value.literal for value in lifted.values]
    conditions = [*lifted.steady, *(literal for _, literal in (*lifted.revealed, *lifted.outcome_signs))]
    table = tabulate(lifted, [*start_bits(start, variables), *literals, lifted.sign, *conditions])
    begin, end = table[: len(start)], table[len(start) : 2 * len(start)]
    sign, held = table[2 * len(start)], table[2 * len(start) + 1 :]
    uniform = all((row == row[0]).all() for row in held)
    random = any(value.paths for value in lifted.values)
    constant = np.exp(1j * (lifted.sixteenths * np.pi / 8 + lifted.radians))
    scale: dict[tuple[int, ...], complex] = {}
    seen_ends = set()
    for case in range(1 << variables):
        vector = np.zeros(1 << circuit.qubits, dtype=complex)
        vector[sum(int(bit) << qubit for qubit, bit in enumerate(begin[:, case]))] = 1
        wanted = sum(int(bit) << qubit for qubit, bit in enumerate(end[:, case]))
        records = histories(circuit, vector)
        for record, state in records.items():
            support = np.flatnonzero(np.abs(state) > 1e-9)
            seen_ends.add((case, *support.tolist()))
            if not uniform or random:
                continue
            assert support.tolist() == [wanted]
            amplitude = state[wanted] * (-1.0) ** int(sign[case])
            assert abs(amplitude - scale.setdefault(record, amplitude)) < 1e-9
            if len(records) == 1:
                assert abs(amplitude - constant) < 1e-9
    if random:
        assert len(seen_ends) > 1 << variables
    elif not uniform:
        assert not _uniform(circuit, begin, end, sign)
    return True


def start_bits(start: list[int], variables: int) -> list[int]:
    """Literals of the start, which are those of `lift`'s graph too."""
    assert all(literal >> 1 <= variables for literal in start)
    return start


def _uniform(circuit: Circuit, begin: np.ndarray, end: np.ndarray, sign: np.ndarray) -> bool:
    """Whether, by states, the circuit gives one basis state and a sign, the same for every record."""
    weight: dict[tuple[int, ...], float] = {}
    scale: dict[tuple[int, ...], complex] = {}
    for case in range(begin.shape[1]):
        vector = np.zeros(1 << circuit.qubits, dtype=complex)
        vector[sum(int(bit) << qubit for qubit, bit in enumerate(begin[:, case]))] = 1
        records = histories(circuit, vector)
        if weight and set(records) != set(weight):
            return False
        for record, state in records.items():
            norm = float(np.linalg.norm(state))
            if abs(weight.setdefault(record, norm) - norm) > 1e-9:
                return False
            amplitude = complex(state[np.argmax(np.abs(state))]) * (-1.0) ** int(sign[case])
            if abs(amplitude - scale.setdefault(record, amplitude)) > 1e-9:
                return False
    return True
