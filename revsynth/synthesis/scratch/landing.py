"""Products that are computed right on output lines promised to be 0, and stay there."""

from __future__ import annotations

from dataclasses import dataclass, field

from revsynth.synthesis.scratch.plan import COMPUTE, Operation
from revsynth.synthesis.scratch.units import Act, Sum, Units


@dataclass(frozen=True)
class Landing:
    """lines: unit -> the output line it is computed on; rest: what the mirror XORs to it in its stead.

    keep: the products that land nowhere stay too, each on a line of its own.
    """

    lines: dict[int, int] = field(default_factory=dict)
    rest: dict[int, Sum] = field(default_factory=dict)
    keep: bool = False

    def line_of(self, unit: int) -> int | None:
        """The output line of a unit that lands on one."""
        return self.lines.get(unit)

    def rest_at(self, operation: Operation) -> Sum:
        """What must be at hand when the operation is done, besides what it reads."""
        index, kind = divmod(operation, 3)
        return self.rest.get(index, ()) if kind == COMPUTE and self.rest else ()


def landed(units: Units, keep: bool) -> tuple[Units, Landing]:
    """For outputs in 0: the last product of an output is computed on the output line, where it stays.

    Such a unit must be computed once and never erased. Returns the units with the acts that are left, and the
    landing. keep: see `Landing`.
    """
    n = units.inputs
    with_product = {output for act in units.acts if act.right for output in act.outputs}
    lines: dict[int, int] = {}
    rest: dict[int, Sum] = {}
    acts: list[Act] = []
    for act in units.acts:
        last = act.left[-1] - n
        output = act.outputs[0]
        if act.right or last < 0 or not units.is_and(last) or last in lines or output in with_product:
            acts.append(act)
            continue
        lines[last] = n + output
        rest[last] = tuple(sorted(set(act.left[:-1]) ^ set(units.tail[last])))
        if len(act.outputs) > 1:
            acts.append(Act(act.outputs[1:], act.left))
    return (
        Units(n, units.left, units.right, units.tail, units.flips, acts, units.constants, units.hints),
        Landing(lines, rest, keep),
    )
