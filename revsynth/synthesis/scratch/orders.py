"""Topological orders of units that keep what belongs together close together."""

from __future__ import annotations

import random
from typing import Literal

from revsynth.synthesis.scratch.units import Units

Rule = Literal["given", "first", "last", "large", "small", "any"]
RULES: tuple[Rule, ...] = ("given", "first", "last", "large", "small")
"""How a depth-first order chooses among the operands of a unit; `given` keeps the order there is."""


def ordered(units: Units, rule: Rule, seed: int = 0) -> list[int]:
    """A depth-first order from the acts down: the operands of a unit by the rule, then the unit.

    first, last: by their numbers; large, small: by how many units are below them; any: by chance.
    """
    if rule == "given":
        return list(range(len(units)))
    reads = units.unit_reads()
    rank = _ranks(units, reads, rule, seed)
    done = [False] * len(units)
    order: list[int] = []
    for act in sorted(units.acts, key=lambda act: max(act.reads)):
        goals = sorted({v - units.inputs for v in act.reads if v >= units.inputs}, key=rank.__getitem__)
        stack = [(unit, False) for unit in reversed(goals)]
        while stack:
            unit, ready = stack.pop()
            if done[unit]:
                continue
            if ready:
                done[unit] = True
                order.append(unit)
                continue
            stack.append((unit, True))
            below = sorted((other for other in reads[unit] if not done[other]), key=rank.__getitem__)
            stack.extend((other, False) for other in reversed(below))
    return order


def _ranks(units: Units, reads: list[tuple[int, ...]], rule: Rule, seed: int) -> list[float]:
    """The smaller the sooner."""
    if rule == "first":
        return [float(unit) for unit in range(len(units))]
    if rule == "last":
        return [float(-unit) for unit in range(len(units))]
    if rule == "any":
        draw = random.Random(f"order {seed}")
        return [draw.random() for _ in range(len(units))]
    weight = [1.0] * len(units)
    for unit, below in enumerate(reads):
        # Shared parts count several times; the weight is only a guide.
        weight[unit] = min(1.0 + sum(weight[other] for other in below), 1e9)
    return [-w for w in weight] if rule == "large" else weight
