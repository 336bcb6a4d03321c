"""Plans: in which order units are computed, erased early, and acted upon.

A plan is the forward run; its mirror image, without the acts, comes behind it and leaves all scratch clean.
So an AND that is computed c times and erased e times in the forward run is computed c + e times in all.
An operation is the integer 3 * index + kind.
"""

from __future__ import annotations

from collections.abc import Collection, Sequence
from dataclasses import dataclass

from revsynth.synthesis.scratch.units import Units

COMPUTE, ERASE, ACT = 0, 1, 2
Operation = int


@dataclass(frozen=True)
class Plan:
    """operations: the forward run; peak: most scratch lines in use at once; ands: ANDs computed, those of the
    mirror included, but not those of acts (see `act_ands`).
    """

    name: str
    operations: list[Operation]
    peak: int
    ands: int


def plan_of(
    units: Units, operations: list[Operation], name: str, landing: Collection[int] = frozenset()
) -> Plan:
    """Count a plan's peak and ANDs; raises AssertionError where it does not work (a defect).

    landing: units that are computed on output lines; they take no scratch and must not be erased.
    """
    no_scratch = frozenset(landing)
    cost = [1 if left else 0 for left in units.left]
    needed = units.unit_reads()
    acts = [[v - units.inputs for v in act.reads if v >= units.inputs] for act in units.acts]
    held = [False] * len(units)
    acted = [False] * len(units.acts)
    count = peak = ands = 0
    for operation in operations:
        index, kind = divmod(operation, 3)
        reads = acts[index] if kind == ACT else needed[index]
        if not all(held[unit] for unit in reads):
            raise AssertionError(f"operation {operation} of plan '{name}' reads what is not there")
        if kind == ACT:
            acted[index] = True
            continue
        if held[index] != (kind == ERASE):
            raise AssertionError(f"operation {operation} of plan '{name}' comes twice")
        held[index] = kind == COMPUTE
        ands += cost[index]
        if index in no_scratch:
            if kind == ERASE:
                raise AssertionError(f"plan '{name}' erases what has landed on an output")
            continue
        count += 1 if kind == COMPUTE else -1
        peak = max(peak, count)
    if not all(acted):
        raise AssertionError(f"plan '{name}' forgets an output")
    return Plan(name, operations, peak, ands)


def act_ands(units: Units, phase: bool) -> int:
    """ANDs of the acts that cost T: none in a phase oracle, where they are CZ gates."""
    return 0 if phase else sum(1 for act in units.acts if act.right)


def acts_by_place(units: Units) -> list[list[int]]:
    """Acts to be done at the start (item 0) or right after unit k (item k + 1).

    The sums of an output come no earlier than its first product, which then finds the output line in 0.
    """
    n = units.inputs
    place = [max((v - n + 1 for v in act.reads if v >= n), default=0) for act in units.acts]
    first: dict[int, int] = {}
    for act, spot in zip(units.acts, place, strict=True):
        if act.right:
            for output in act.outputs:
                first[output] = min(first.get(output, spot), spot)
    result: list[list[int]] = [[] for _ in range(len(units) + 1)]
    for number, (act, spot) in enumerate(zip(units.acts, place, strict=True)):
        if not act.right:
            spot = max([spot, *(first[output] for output in act.outputs if output in first)])
        result[spot].append(number)
    return result


def hold_everything(units: Units, landing: Collection[int] = frozenset()) -> Plan:
    """Every unit once, none erased before the mirror."""
    acts = acts_by_place(units)
    operations = [3 * act + ACT for act in acts[0]]
    for unit in range(len(units)):
        operations.append(3 * unit + COMPUTE)
        if acts[unit + 1]:
            operations.extend(3 * act + ACT for act in acts[unit + 1])
    return Plan("hold", operations, len(units) - len(landing), units.ands)


def reads_of(units: Units, operation: Operation) -> Sequence[int]:
    """The variables an operation needs, its own unit included where it is erased."""
    index, kind = divmod(operation, 3)
    if kind == ACT:
        return units.acts[index].reads
    if kind == ERASE:
        return (*units.reads(index), units.inputs + index)
    return units.reads(index)
