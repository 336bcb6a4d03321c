"""Clifford+T with measurements, for all inputs at once: runs of branches.

A *run* is what happens for one record of measurement outcomes: its classical bits and its branches. An
uncertain measurement makes two runs, and both are followed; their chances must not depend on the input.
Two runs that differ by one constant phase, in bits that nobody reads any more, are one run again, so twenty
measurements one after the other do not make a million runs. Every lane is an input for which something is
demanded, the last one the reference input, so "the same in all lanes" means the same as for the reference.
"""

from __future__ import annotations

from collections.abc import Sequence

from revsynth.verification.branches import (
    Branch,
    NotUniformError,
    distinct,
    expanded,
    flip,
    hadamard,
    turn,
)
from revsynth.verification.classical import Column
from revsynth.verification.outcome import (
    Bits,
    Final,
    Finals,
    Outcome,
    Record,
    RevealsError,
    holds,
    same_bits,
    with_bit,
)
from revsynth.verification.phases import chosen, constant, difference
from revsynth.verification.plan import Plan
from revsynth.verification.steps import ANGLE, FLIP, HADAMARD, MEASURE, RESET, TURN, Step


class CrowdedError(Exception):
    """More branches or runs than allowed: a better order of the steps or another engine may do."""


class _Run:
    """One record of outcomes so far."""

    __slots__ = ("angle", "bits", "branches", "record")

    def __init__(self, branches: list[Branch], bits: Bits, angle: float, record: Record) -> None:
        self.branches = branches
        self.bits = bits
        self.angle = angle
        self.record = record


def run_bitsliced(
    plan: Plan, start: Sequence[Column], ones: Column, *, most_branches: int, most_runs: int
) -> Finals:
    """The final states of all records.

    start: one column a qubit; ones: the column with 1 in every lane. Raises NotUniformError and
    CrowdedError where this engine cannot follow, RevealsError where an outcome depends on the input.
    """
    runs = [_Run([Branch(list(start))], 0, 0.0, ())]
    random = False
    for index, step in enumerate(plan.steps):
        if step.condition < 0 and step.act < MEASURE:
            for run in runs:
                _act(run, step, ones, most_branches)
        else:
            runs, split = _guarded(runs, step, plan, ones, most_branches)
            random = random or split
        if len(runs) > 1 and index in plan.live:
            runs = _merge(runs, plan.live[index], ones)
            if len(runs) > most_runs:
                raise CrowdedError
    return Finals([_final(run) for run in runs], random)


def _guarded(
    runs: list[_Run], step: Step, plan: Plan, ones: Column, most_branches: int
) -> tuple[list[_Run], bool]:
    """A step under a condition, or a measurement: the runs after it, and whether one was split."""
    after: list[_Run] = []
    split = False
    for run in runs:
        if step.condition >= 0 and not holds(plan.conditions[step.condition], run.bits):
            after.append(run)
        elif step.act in (MEASURE, RESET):
            parts = _measure(run, step, ones)
            split = split or len(parts) > 1
            after.extend(parts)
        else:
            _act(run, step, ones, most_branches)
            after.append(run)
    return after, split


def _act(run: _Run, step: Step, ones: Column, most_branches: int) -> None:
    act, literals, target, amount, angle, *_ = step
    if act == FLIP:
        run.branches = flip(run.branches, target, literals, ones)
    elif act == TURN:
        run.branches = turn(run.branches, amount, literals, ones)
    elif act == HADAMARD:
        run.branches = hadamard(run.branches, target, ones)
    else:
        assert act == ANGLE
        if literals:
            raise NotUniformError
        run.angle += angle
    if len(run.branches) > most_branches:
        raise CrowdedError


def _measure(run: _Run, step: Step, ones: Column) -> list[_Run]:
    """The runs of both outcomes, or the one that is certain."""
    qubit = step.target
    run.branches = expanded(run.branches, qubit, ones)
    columns = [branch.columns[qubit] for branch in run.branches]
    for value, column in ((0, 0), (1, ones)):
        if all(c == column for c in columns):
            return [_with_outcome(run, run.branches, step, value, certain=True, ones=ones)]
    if len(columns) == 1:
        reference = ones if columns[0] >> (ones.bit_length() - 1) else 0
        raise RevealsError(step.source, columns[0] ^ reference, run.record, certain=True)
    if not distinct(run.branches, ones):
        raise NotUniformError
    if all(column in (0, ones) for column in columns):
        parts = [[branch for branch in run.branches if branch.columns[qubit] == c] for c in (0, ones)]
    else:
        parts = [_side(run.branches, qubit, value, ones) for value in (0, 1)]
    return [
        _with_outcome(run, part, step, value, certain=False, ones=ones) for value, part in enumerate(parts)
    ]


def _side(branches: Sequence[Branch], qubit: int, value: int, ones: Column) -> list[Branch]:
    """Of two equally heavy branches that differ on the qubit in every lane: the side with that value."""
    if len(branches) != 2:
        raise NotUniformError
    one, other = branches
    if one.halves != other.halves or one.open.keys() != other.open.keys():
        raise NotUniformError
    here = one.columns[qubit] ^ (0 if value else ones)
    if one.columns[qubit] ^ other.columns[qubit] != ones:
        raise NotUniformError
    columns = [b if a is b else b ^ (here & (a ^ b)) for a, b in zip(one.columns, other.columns, strict=True)]
    opened = {q: chosen(here, phases, other.open[q]) for q, phases in one.open.items()}
    return [Branch(columns, chosen(here, one.phases, other.phases), one.halves, opened)]


def _with_outcome(
    run: _Run, branches: list[Branch], step: Step, value: int, *, certain: bool, ones: Column
) -> _Run:
    bits = run.bits
    if step.act == MEASURE:
        bits = with_bit(bits, step.bit, value)
    elif value:
        flip(branches, step.target, (), ones)
    record = run.record if certain else (*run.record, Outcome(step.source, value))
    return _Run(branches, bits, run.angle, record)


def _merge(runs: list[_Run], live: Sequence[int], ones: Column) -> list[_Run]:
    """Make runs one that agree in the bits still read and, up to a constant phase, in the state."""
    kept: list[_Run] = []
    for run in runs:
        for other in kept:
            if same_bits(run.bits, other.bits, live) and _same_state(run, other, ones):
                _join(other, run)
                break
        else:
            kept.append(run)
    return kept


def _join(kept: _Run, gone: _Run) -> None:
    """The record of both is what they have in common."""
    common = [a for a, b in zip(kept.record, gone.record, strict=False) if a == b]
    kept.record = tuple(common)


def _same_state(one: _Run, other: _Run, ones: Column) -> bool:
    if len(one.branches) != len(other.branches):
        return False
    left = list(other.branches)
    turns = set()
    shifts = set()
    for branch in one.branches:
        match = next((b for b in left if b.columns == branch.columns and b.open == branch.open), None)
        if match is None:
            return False
        left.remove(match)
        shifts.add(branch.halves - match.halves)
        turns.add(constant(difference(branch.phases, match.phases, ones), ones))
    return len(turns) == 1 and None not in turns and len(shifts) == 1


def _final(run: _Run) -> Final:
    if len(run.branches) != 1 or run.branches[0].open:
        raise NotUniformError
    branch = run.branches[0]
    return Final(branch.columns, branch.phases, run.angle, run.record)
