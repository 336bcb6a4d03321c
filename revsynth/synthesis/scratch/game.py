"""The pebble game of a network's units: who reads whom, what costs T, what takes a scratch line."""

from __future__ import annotations

from dataclasses import dataclass

from revsynth.synthesis.scratch.landing import Landing
from revsynth.synthesis.scratch.plan import acts_by_place
from revsynth.synthesis.scratch.units import Units


@dataclass(frozen=True)
class Game:
    """What the planners need to know of the units: reads[k] and readers[k] ascending, acts after each unit.

    last_read[k]: the last unit at or after which unit k is read by a unit or an act, -1 for none; `size` for
    units that land on an output line (see `landing`), which take no scratch (weight 0) and are never erased.
    """

    size: int
    cost: list[int]
    reads: list[tuple[int, ...]]
    readers: list[list[int]]
    acts: list[list[int]]
    act_reads: list[tuple[int, ...]]
    last_read: list[int]
    weight: list[int]

    @classmethod
    def of(cls, units: Units, landing: Landing) -> Game:
        """The game of the units in their order."""
        n = units.inputs
        reads = units.unit_reads()
        for unit, rest in landing.rest.items():
            reads[unit] = tuple(sorted({*reads[unit], *(v - n for v in rest if v >= n)}))
        readers: list[list[int]] = [[] for _ in reads]
        for unit, needed in enumerate(reads):
            for other in needed:
                readers[other].append(unit)
        acts = acts_by_place(units)
        act_reads = [tuple(sorted({v - n for v in act.reads if v >= n})) for act in units.acts]
        last_read = [row[-1] if row else -1 for row in readers]
        for place, there in enumerate(acts):
            for act in there:
                for unit in act_reads[act]:
                    last_read[unit] = max(last_read[unit], place - 1)
        weight = [1] * len(reads)
        for unit in landing.lines:
            last_read[unit], weight[unit] = len(reads), 0
        cost = [1 if left else 0 for left in units.left]
        return cls(len(reads), cost, reads, readers, acts, act_reads, last_read, weight)
