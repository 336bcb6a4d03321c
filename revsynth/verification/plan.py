"""The steps of a circuit with what the engines need to know about its classical bits."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from revsynth.circuit.model import Condition
from revsynth.verification.order import bits_read
from revsynth.verification.steps import HADAMARD, MEASURE, RESET, Step, Steps

MOST_LIVE = 256
"""With more bits still to be read, runs are not compared: they would hardly agree in all of them."""


@dataclass(frozen=True)
class Plan:
    """Steps, and for those after which runs may become one: the bits that are still read later."""

    steps: Sequence[Step]
    conditions: Sequence[Condition]
    live: dict[int, tuple[int, ...]]


def deaths(steps: Steps, conditions: Sequence[Condition]) -> list[tuple[int, int]]:
    """(step, bit) in order: after that step, which reads or writes the bit, nobody reads what it holds."""
    reads = [sorted({literal >> 1 for guard in guards for literal in guard.bits}) for guards in conditions]
    touching = np.flatnonzero((steps.condition >= 0) | (steps.act == MEASURE))
    rows = zip(
        touching.tolist(),
        *(a[touching].tolist() for a in (steps.act, steps.condition, steps.bit)),
        strict=True,
    )
    live: set[int] = set()
    found: list[tuple[int, int]] = []
    for index, act, condition, bit in reversed(list(rows)):
        read = reads[condition] if condition >= 0 else []
        touched = {*read, bit} if act == MEASURE else read
        found.extend((index, other) for other in sorted(touched, reverse=True) if other not in live)
        if act == MEASURE and condition < 0:
            live.discard(bit)
        live.update(read)
    return found[::-1]


def plan(steps: Sequence[Step], conditions: Sequence[Condition]) -> Plan:
    """Find which bits are read later, where runs may be compared."""
    live: set[int] = set()
    found: dict[int, tuple[int, ...]] = {}
    measured = any(step.act in (MEASURE, RESET) for step in steps)
    for index in range(len(steps) - 1, -1 if measured else len(steps), -1):
        step = steps[index]
        compared = step.condition >= 0 or step.act in (HADAMARD, MEASURE, RESET)
        if compared and len(live) <= MOST_LIVE:
            found[index] = tuple(sorted(live))
        if step.act == MEASURE and step.condition < 0:
            live.discard(step.bit)
        live.update(bits_read(step, conditions))
    return Plan(steps, conditions, found)
