"""Any circuit of the model, exactly where it is Clifford+T: a list of (input, basis state, amplitude).

The general engine behind `bitsliced`: rows of all inputs together in numpy arrays, brought together again by
sorting after every Hadamard. Measurements make runs as in `bitsliced`. Widths beyond 64 qubits take several
words a row. Memory and time grow with the basis states that an input is spread over.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace
from typing import Any

import numpy as np
from numpy.typing import NDArray

from revsynth.verification.amplitudes import Exact, Floating, Rows
from revsynth.verification.classical import Column
from revsynth.verification.outcome import (
    Bits,
    Final,
    Finals,
    Outcome,
    Record,
    RevealsError,
    TooLargeError,
    holds,
    with_bit,
)
from revsynth.verification.plan import Plan
from revsynth.verification.steps import ANGLE, FLIP, HADAMARD, MEASURE, RESET, TURN, Step

MOST_ROWS = 1 << 21
"""Rows of all runs together; a row takes about 100 bytes while it is sorted."""
MOST_RUNS = 1 << 10
"""Records of outcomes that are followed side by side."""

Arithmetic = type[Exact] | type[Floating]


@dataclass(frozen=True)
class _Run:
    """Rows of one record: lane (rows,), key (rows, words) with qubit q at bit q % 64 of word q // 64."""

    lane: NDArray[np.int64]
    key: NDArray[np.uint64]
    amplitude: Rows
    halves: int
    bits: Bits
    record: Record = ()
    angle: float = 0.0


def run_sparse(
    plan: Plan,
    start: Sequence[Column],
    lanes: int,
    *,
    exact: bool,
    most_rows: int | None = None,
    most_runs: int | None = None,
) -> Finals:
    """The final states of all records.

    start: one column a qubit over `lanes` lanes, the last one the reference input. most_rows, most_runs:
    limits in place of MOST_ROWS and MOST_RUNS. Raises TooLargeError at the limits and RevealsError where the
    chance of an outcome depends on the input.
    """
    arithmetic: Arithmetic = Exact if exact else Floating
    first = _Run(np.arange(lanes, dtype=np.int64), _keys(start, lanes), arithmetic.ones(lanes), 0, 0)
    runs = [first]
    random = False
    for index, step in enumerate(plan.steps):
        after: list[_Run] = []
        for run in runs:
            if step.condition >= 0 and not holds(plan.conditions[step.condition], run.bits):
                after.append(run)
            elif step.act in (MEASURE, RESET):
                parts = _measure(run, step, lanes, arithmetic)
                random = random or len(parts) > 1
                after.extend(parts)
            else:
                after.append(_act(run, step, arithmetic))
        runs = after
        if len(runs) > 1 and index in plan.live:
            runs = _merge(runs, plan.live[index], arithmetic)
        _check_limits(runs, most_rows or MOST_ROWS, most_runs or MOST_RUNS)
    return Finals([_final(run, len(start), lanes, arithmetic) for run in runs], random)


def _check_limits(runs: Sequence[_Run], most_rows: int, most_runs: int) -> None:
    if len(runs) > most_runs:
        raise TooLargeError(f"more than {most_runs} records of measurement outcomes differ at one time")
    rows = sum(len(run.lane) for run in runs)
    if rows > most_rows:
        raise TooLargeError(f"more than {most_rows} basis states at one time")


def _keys(start: Sequence[Column], lanes: int) -> NDArray[np.uint64]:
    words = max(1, (len(start) + 63) // 64)
    key = np.zeros((lanes, words), dtype=np.uint64)
    for qubit, column in enumerate(start):
        if column:
            key[:, qubit >> 6] |= _bits_of(column, lanes).astype(np.uint64) << np.uint64(qubit & 63)
    return key


def _bits_of(column: Column, lanes: int) -> NDArray[np.uint8]:
    data = np.frombuffer(column.to_bytes((lanes + 7) // 8, "little"), dtype=np.uint8)
    return np.unpackbits(data, bitorder="little", count=lanes)


def _column_of(bits: NDArray[Any]) -> Column:
    return int.from_bytes(np.packbits(bits.astype(np.uint8), bitorder="little").tobytes(), "little")


def _bit(key: NDArray[np.uint64], qubit: int) -> NDArray[np.bool_]:
    return (key[:, qubit >> 6] >> np.uint64(qubit & 63) & np.uint64(1)).astype(bool)


def _where(key: NDArray[np.uint64], literals: Sequence[int]) -> NDArray[np.bool_]:
    found = np.ones(len(key), dtype=bool)
    for literal in literals:
        found &= _bit(key, literal >> 1) != bool(literal & 1)
    return found


def _act(run: _Run, step: Step, arithmetic: Arithmetic) -> _Run:
    if step.act == HADAMARD:
        return _hadamard(run, step.target, arithmetic)
    where = _where(run.key, step.literals)
    if step.act == FLIP:
        key = run.key.copy()
        key[where, step.target >> 6] ^= np.uint64(1 << (step.target & 63))
        return replace(run, key=key)
    if step.act == ANGLE and not step.literals:
        return replace(run, angle=run.angle + step.angle)
    amplitude = run.amplitude.copy()
    if step.act == TURN:
        amplitude[where] = arithmetic.turned(amplitude[where], step.amount)
    else:
        amplitude[where] = arithmetic.rotated(amplitude[where], step.angle)
    return replace(run, amplitude=amplitude)


def _hadamard(run: _Run, qubit: int, arithmetic: Arithmetic) -> _Run:
    """Rows that differ in the qubit alone give sum and difference."""
    word, bit = qubit >> 6, np.uint64(1 << (qubit & 63))
    value = _bit(run.key, qubit)
    key = run.key.copy()
    key[:, word] &= ~bit
    order = _sorted(run.lane, key)
    lane, key, value = run.lane[order], key[order], value[order]
    plus = run.amplitude[order]
    minus = plus.copy()
    minus[value] *= -1
    heads = np.flatnonzero(_new_group(lane, key))
    amplitude = np.concatenate([np.add.reduceat(plus, heads), np.add.reduceat(minus, heads)])
    other = key[heads].copy()
    other[:, word] |= bit
    kept = arithmetic.nonzero(amplitude)
    amplitude, halves = arithmetic.halved(amplitude[kept], run.halves)
    return replace(
        run,
        lane=np.concatenate([lane[heads], lane[heads]])[kept],
        key=np.concatenate([key[heads], other])[kept],
        amplitude=amplitude,
        halves=halves,
    )


def _sorted(lane: NDArray[np.int64], key: NDArray[np.uint64]) -> NDArray[np.intp]:
    return np.lexsort((*key.T, lane))


def _new_group(lane: NDArray[np.int64], key: NDArray[np.uint64]) -> NDArray[np.bool_]:
    new = np.ones(len(lane), dtype=bool)
    new[1:] = (lane[1:] != lane[:-1]) | (key[1:] != key[:-1]).any(axis=1)
    return new


def _measure(run: _Run, step: Step, lanes: int, arithmetic: Arithmetic) -> list[_Run]:
    """The runs of the outcomes that can occur; their weights must be the same in every lane."""
    value = _bit(run.key, step.target)
    parts: list[tuple[int, NDArray[np.bool_], Rows]] = []
    for outcome, chosen in ((0, ~value), (1, value)):
        weights = arithmetic.weights(run.amplitude[chosen], run.lane[chosen], lanes)
        wrong = arithmetic.differs(weights, weights[-1])
        if wrong.any():
            single = bool((np.bincount(run.lane, minlength=lanes) == 1).all())
            raise RevealsError(step.source, _column_of(wrong), run.record, certain=single)
        amplitude = arithmetic.kept(run.amplitude[chosen], weights[-1])
        if amplitude is not None:
            parts.append((outcome, chosen, amplitude))
    return [_part(run, step, *part, certain=len(parts) == 1) for part in parts]


def _part(
    run: _Run, step: Step, outcome: int, chosen: NDArray[np.bool_], amplitude: Rows, *, certain: bool
) -> _Run:
    key, bits = run.key[chosen], run.bits
    if step.act == MEASURE:
        bits = with_bit(bits, step.bit, outcome)
    elif outcome:
        key[:, step.target >> 6] ^= np.uint64(1 << (step.target & 63))
    record = run.record if certain else (*run.record, Outcome(step.source, outcome))
    return replace(run, lane=run.lane[chosen], key=key, amplitude=amplitude, bits=bits, record=record)


def _merge(runs: Sequence[_Run], live: Sequence[int], arithmetic: Arithmetic) -> list[_Run]:
    """Make runs one that agree in the bits still read and, up to a constant factor, in the state.

    Only runs with the same basis states in the same lanes are compared, so the time is linear in the rows
    unless many runs differ in their amplitudes alone.
    """
    kept: list[_Run] = []
    alike: dict[tuple[Bits, bytes, bytes], list[int]] = {}
    read = sum(1 << bit for bit in live)
    for run in map(_in_order, runs):
        places = alike.setdefault((run.bits & read, run.lane.tobytes(), run.key.tobytes()), [])
        for index in places:
            other = kept[index]
            if arithmetic.proportional(run.amplitude, other.amplitude):
                common = tuple(a for a, b in zip(run.record, other.record, strict=False) if a == b)
                kept[index] = replace(other, record=common)
                break
        else:
            places.append(len(kept))
            kept.append(run)
    return kept


def _in_order(run: _Run) -> _Run:
    order = _sorted(run.lane, run.key)
    return replace(run, lane=run.lane[order], key=run.key[order], amplitude=run.amplitude[order])


def _final(run: _Run, qubits: int, lanes: int, arithmetic: Arithmetic) -> Final:
    """Lanes with one row give columns and phases relative to the reference lane, the last one."""
    shown = arithmetic.visible(run.amplitude)
    run = _in_order(replace(run, lane=run.lane[shown], key=run.key[shown], amplitude=run.amplitude[shown]))
    count = np.bincount(run.lane, minlength=lanes)
    first = np.cumsum(count) - count
    key, amplitude = run.key[first], run.amplitude[first]
    eighths = arithmetic.eighths(amplitude, amplitude[-1:])
    numbers = arithmetic.complex(amplitude)
    angles = np.angle(numbers)

    def mixed_qubits(lane: int) -> list[int]:
        rows = run.key[first[lane] : first[lane] + count[lane]]
        return [q for q in range(qubits) if len(set(_bit(rows, q).tolist())) > 1]

    planes = [_column_of((eighths >= 0) & ((eighths >> plane) & 1).astype(bool)) for plane in range(3)]
    return Final(
        columns=[_column_of(_bit(key, qubit)) for qubit in range(qubits)],
        phases=(planes[0], planes[1], planes[2]),
        angle=float(angles[-1]) + run.angle,
        record=run.record,
        superposed=_column_of(count > 1),
        strange=_column_of(eighths < 0),
        phase_of=lambda lane: float(angles[lane] - angles[-1]),
        mixed_qubits=mixed_qubits,
    )
