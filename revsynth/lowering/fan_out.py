"""Gates with the same controls and different targets are done once and copied by CNOTs.

t2 ^= t1, t1 ^= p, t2 ^= t1 changes both targets by p; so every product is paid for once. Gates are brought
together where they commute with all that lies between (common practice: a NOT on t commutes with gates that
do not wait for t and whose targets it does not wait for).
"""

from __future__ import annotations

from collections.abc import Iterable
from typing import NamedTuple

from revsynth.cascade.model import PHASE, Gate


class Unit(NamedTuple):
    """One product on several targets; a phase gate has no target. Control literals ascend."""

    controls: tuple[int, ...]
    targets: tuple[int, ...]


def units_of(gates: Iterable[Gate]) -> list[Unit]:
    """Each gate for itself."""
    return [Unit(gate.controls, () if gate.target == PHASE else (gate.target,)) for gate in gates]


def gather_units(lines: int, gates: Iterable[Gate]) -> list[Unit]:
    """Join gates of two or more controls with an earlier one of the same controls where they may move."""
    targets: list[list[int]] = []
    controls: list[tuple[int, ...]] = []
    latest: dict[tuple[int, ...], int] = {}
    changed = [-1] * lines
    read = [-1] * lines
    for target, literals in gates:
        place = latest.get(literals, -1) if len(literals) >= 2 and target != PHASE else -1
        if (
            place >= 0
            and target not in targets[place]
            and read[target] <= place
            and all(changed[c >> 1] <= place for c in literals)
        ):
            targets[place].append(target)
        else:
            place = len(targets)
            targets.append([] if target == PHASE else [target])
            controls.append(literals)
            if target != PHASE and len(literals) >= 2:
                latest[literals] = place
        # Times are unit numbers; a joined gate counts as late as the newest unit, which only forbids more.
        now = len(targets) - 1
        if target != PHASE:
            changed[target] = now
        for control in literals:
            read[control >> 1] = now
    return [Unit(c, tuple(t)) for c, t in zip(controls, targets, strict=True)]
