"""The bit-sliced engine compiled: the same rules as `bitsliced`, for circuits large enough to pay for it.

It finds the final states only. Where there is something to explain (which outcome, which record), `bitsliced`
runs the same lanes again and says it. Importing this module imports numba.
"""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
from numpy.typing import NDArray

from revsynth.circuit.model import Condition
from revsynth.verification.bitsliced import CrowdedError
from revsynth.verification.branch_kernels import (
    CROWDED,
    GOOD,
    MORE_ROWS,
    MORE_SLOTS,
    NOT_UNIFORM,
    REVEALS,
    ROOM,
)
from revsynth.verification.branches import NotUniformError
from revsynth.verification.classical import Column
from revsynth.verification.kernels import run_script
from revsynth.verification.outcome import Final, Finals
from revsynth.verification.plan import deaths
from revsynth.verification.row_kernels import (
    BIT_WORDS,
    BITS,
    BRANCH_SPACE,
    COLUMN,
    COUNT,
    FREE,
    FREE_ROWS,
    FREE_SLOTS,
    HALVES,
    HEADER,
    MEMBERS,
    MOST_BRANCHES,
    MOST_RUNS,
    OPENED,
    PHASE,
    QUBITS,
    RANDOM,
    REFS,
    RUN_SPACE,
    RUNS,
    RUNS_BEFORE,
    SLOTS,
)
from revsynth.verification.steps import ANGLE, FLIP, HADAMARD, MEASURE, Steps, starts

MOST_BYTES = 1 << 28
"""Memory for the rows of one block of lanes; a circuit that needs more is left to another engine."""
CACHE_BYTES = 1 << 20
"""Blocks are chosen so that a row a qubit, and some more, take so much: they stay near the processor."""
SMALLEST_BITS, LARGEST_BITS = 12, 16
"""Limits to the number of lanes of a block, as powers of two."""


class RevealsSomewhereError(Exception):
    """A measurement gives an input away; `bitsliced` can say which and how."""


def block_bits(qubits: int) -> int:
    """How many lanes a block should have, as a power of two."""
    bits = LARGEST_BITS
    while bits > SMALLEST_BITS and (qubits + ROOM) << (bits - 3) > CACHE_BYTES:
        bits -= 1
    return bits


class Compiled:
    """The compiled engine for one circuit."""

    def __init__(self, steps: Steps, qubits: int, bits: int, conditions: Sequence[Condition]) -> None:
        """Raises ValueError for a qubit, bit or condition out of range: the kernel would not notice."""
        _check(steps, qubits, bits, conditions)
        rows = (steps.act, steps.target, steps.amount, steps.condition, steps.bit)
        self._steps = np.stack([row.astype(np.int32) for row in rows], axis=1)
        self._offset = steps.offset
        self._literal = steps.literal.astype(np.int64)
        self._rule = _rule(conditions)
        self._deaths = np.array(deaths(steps, conditions), dtype=np.int64).reshape(-1, 2)
        constant = (steps.act == ANGLE) & (np.diff(steps.offset) == 0)
        self._angle = float(steps.angle[constant & (steps.condition < 0)].sum())
        self._fits = not (constant & (steps.condition >= 0)).any()
        self._bits = bits

    def run(self, start: Sequence[Column], lanes: int, *, most_branches: int, most_runs: int) -> Finals:
        """The final states of all records, without the records.

        start: one column a qubit over `lanes` lanes. Raises NotUniformError and CrowdedError as
        `run_bitsliced` does, and RevealsSomewhereError.
        """
        if not self._fits:
            raise NotUniformError
        pool, st = _machine(start, lanes, self._bits, most_branches, most_runs)
        while True:
            status = run_script(pool, st, self._steps, self._offset, self._literal, self._rule, self._deaths)
            if status == GOOD:
                return _finals(pool, st, lanes, self._angle)
            if status == MORE_ROWS:
                pool, st = _with_more_rows(pool, st)
            elif status == MORE_SLOTS:
                st = _with_more_slots(st)
            elif status == CROWDED:
                raise CrowdedError
            elif status == REVEALS:
                raise RevealsSomewhereError
            else:
                assert status == NOT_UNIFORM
                raise NotUniformError


def _check(steps: Steps, qubits: int, bits: int, conditions: Sequence[Condition]) -> None:
    guarded = [literal for condition in conditions for guard in condition for literal in guard.bits]
    for name, numbers, below in (
        ("literal", steps.literal, 2 * qubits),
        ("target", steps.target[(steps.act == FLIP) | (steps.act >= HADAMARD)], qubits),
        ("bit", steps.bit[steps.act == MEASURE], bits),
        ("bit of a condition", np.array(guarded, dtype=np.int64), 2 * bits),
        ("condition", steps.condition[steps.condition >= 0], len(conditions)),
    ):
        if len(numbers) and not (numbers.min() >= 0 and numbers.max() < below):
            raise ValueError(f"a {name} is out of range: it must be at least 0 and below {below}")


def _rule(conditions: Sequence[Condition]) -> NDArray[np.int64]:
    """Conditions as `holds` reads them."""
    places: list[int] = []
    rest: list[int] = []
    for condition in conditions:
        places.append(len(conditions) + len(rest))
        rest.append(len(condition))
        for guard in condition:
            rest += [int(guard.expected), len(guard.bits), *guard.bits]
    return np.array([*places, *rest], dtype=np.int64)


_TABLES = (REFS, FREE, COLUMN, OPENED, PHASE, HALVES, SLOTS, MEMBERS, COUNT, BITS)


def _state(rows: int, slots: int, sizes: dict[int, int]) -> NDArray[np.int64]:
    """The array `st` of `row_kernels` for so many rows and slots, all tables 0 but the stacks of free ones.

    sizes: values for QUBITS, BRANCH_SPACE, RUN_SPACE, BIT_WORDS, MOST_BRANCHES and MOST_RUNS.
    """
    qubits, runs = sizes[QUBITS], sizes[RUN_SPACE]
    widths = (
        rows,
        rows,
        slots * qubits,
        3 * slots * qubits,
        3 * slots,
        slots,
        slots,
        runs * sizes[BRANCH_SPACE],
        runs,
        runs * sizes[BIT_WORDS],
    )
    offset = starts(widths) + HEADER
    st = np.zeros(offset[-1], dtype=np.int64)
    st[list(sizes)] = list(sizes.values())
    st[list(_TABLES)] = offset[:-1]
    st[st[OPENED] : st[PHASE]] = -1
    return st


def _machine(
    start: Sequence[Column], lanes: int, bits: int, most_branches: int, most_runs: int
) -> tuple[NDArray[np.uint64], NDArray[np.int64]]:
    """Rows and state: one run of one branch. Lanes that fill up the last word do as the last lane does."""
    qubits, words = len(start), (lanes + 63) // 64
    rows, slots = qubits + 4 * ROOM, 4
    st = _state(
        rows,
        slots,
        {
            QUBITS: qubits,
            BRANCH_SPACE: 2 * most_branches + 2,
            RUN_SPACE: 2 * most_runs + 2,
            BIT_WORDS: (bits + 31) // 32,
            MOST_BRANCHES: most_branches,
            MOST_RUNS: most_runs,
        },
    )
    pool = np.empty((rows, words), dtype=np.uint64)
    pool[0] = 0
    pool[1] = ~np.uint64(0)
    used = 2
    filling = ((1 << (64 * words - lanes)) - 1) << lanes
    for qubit, value in enumerate(start):
        full = value | filling if value >> (lanes - 1) & 1 else value
        if full in (0, (1 << 64 * words) - 1):
            st[st[COLUMN] + qubit] = full & 1
        else:
            pool[used] = np.frombuffer(full.to_bytes(8 * words, "little"), dtype="<u8")
            st[st[COLUMN] + qubit] = used
            used += 1
    st[st[REFS] : st[REFS] + used] = 1
    _add_free(st, FREE_ROWS, FREE, used, rows)
    _add_free(st, FREE_SLOTS, SLOTS, 1, slots)
    st[RUNS] = st[RUNS_BEFORE] = 1
    st[st[COUNT]] = 1
    return pool, st


def _add_free(st: NDArray[np.int64], number: int, table: int, begin: int, end: int) -> None:
    """Put begin ... end - 1 on top of a stack of free ones, the lowest last."""
    place = st[table] + st[number]
    st[place : place + end - begin] = np.arange(end - 1, begin - 1, -1)
    st[number] += end - begin


def _with_more_rows(
    pool: NDArray[np.uint64], st: NDArray[np.int64]
) -> tuple[NDArray[np.uint64], NDArray[np.int64]]:
    """Twice the rows; raises CrowdedError beyond MOST_BYTES."""
    rows, words = pool.shape
    if 2 * rows * words * 8 > MOST_BYTES:
        raise CrowdedError
    more = np.empty((2 * rows, words), dtype=np.uint64)
    more[:rows] = pool
    larger = _resized(st, 2 * rows, int(st[MEMBERS] - st[SLOTS]))
    _add_free(larger, FREE_ROWS, FREE, rows, 2 * rows)
    return more, larger


def _with_more_slots(st: NDArray[np.int64]) -> NDArray[np.int64]:
    """Twice the slots."""
    slots = int(st[MEMBERS] - st[SLOTS])
    larger = _resized(st, int(st[FREE] - st[REFS]), 2 * slots)
    _add_free(larger, FREE_SLOTS, SLOTS, slots, 2 * slots)
    return larger


def _resized(st: NDArray[np.int64], rows: int, slots: int) -> NDArray[np.int64]:
    """The same state with longer tables."""
    sizes = (QUBITS, BRANCH_SPACE, RUN_SPACE, BIT_WORDS)
    larger = _state(rows, slots, {place: int(st[place]) for place in sizes})
    kept = [place for place in range(HEADER) if place not in _TABLES]
    larger[kept] = st[kept]
    ends = [*st[list(_TABLES[1:])].tolist(), len(st)]
    for table, end in zip(_TABLES, ends, strict=True):
        width = end - int(st[table])
        larger[larger[table] : larger[table] + width] = st[st[table] : end]
    return larger


def _finals(pool: NDArray[np.uint64], st: NDArray[np.int64], lanes: int, angle: float) -> Finals:
    found = []
    inside = (1 << lanes) - 1
    qubits = int(st[QUBITS])
    for run in range(int(st[RUNS])):
        slot = int(st[st[MEMBERS] + run * st[BRANCH_SPACE]])
        opened = st[st[OPENED] + 3 * slot * qubits : st[OPENED] + 3 * (slot + 1) * qubits]
        if st[st[COUNT] + run] != 1 or (opened >= 0).any():
            raise NotUniformError
        rows = st[st[COLUMN] + slot * qubits : st[COLUMN] + (slot + 1) * qubits].tolist()
        planes = st[st[PHASE] + 3 * slot : st[PHASE] + 3 * slot + 3].tolist()
        known: dict[int, Column] = {0: 0, 1: inside}
        for row in sorted({*rows, *planes} - known.keys()):
            known[row] = int.from_bytes(pool[row].astype("<u8").tobytes(), "little") & inside
        low, middle, high = (known[row] for row in planes)
        found.append(Final([known[row] for row in rows], (low, middle, high), angle))
    return Finals(found, bool(st[RANDOM]))
