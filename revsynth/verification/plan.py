"""The steps of a circuit with what the engines need to know about its classical bits."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from revsynth.circuit.model import Condition
from revsynth.verification.elementary import HADAMARD, MEASURE, RESET, Step
from revsynth.verification.order import bits_read

MOST_LIVE = 256
"""With more bits still to be read, runs are not compared: they would hardly agree in all of them."""


@dataclass(frozen=True)
class Plan:
    """Steps, and for those after which runs may become one: the bits that are still read later."""

    steps: Sequence[Step]
    conditions: Sequence[Condition]
    live: dict[int, tuple[int, ...]]


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
