"""Blocks of plans, and what they take."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from itertools import product

import numpy as np

from revsynth.cascade.model import PHASE
from revsynth.logic.network import Network
from revsynth.options import Oracle
from revsynth.synthesis.interface import Block
from revsynth.synthesis.scratch import homes, linear_state
from revsynth.synthesis.scratch.blocks import block_of, cnots
from revsynth.synthesis.scratch.landing import Landing, landed
from revsynth.synthesis.scratch.orders import Rule, ordered
from revsynth.synthesis.scratch.plan import COMPUTE, act_ands, hold_everything
from revsynth.synthesis.scratch.planner import Found
from revsynth.synthesis.scratch.sheet import Sheet
from revsynth.synthesis.scratch.units import Units, cuts_of_ands, selected, units_of

LAZY_ANDS = 3_000
"""Up to so many ANDs the invertible linear state is tried, whose work grows with their square."""
FEW_ANDS = (300, 1_000)
"""Up to so many ANDs eight, or four, ways to look ahead are tried instead of one."""


@dataclass(frozen=True)
class Point:
    """What a plan takes: lines of the cascade (`qubits`), ANDs computed, CNOTs, and T gates.

    t_measured: 4 an AND computed, erasures free. t_unitary: 4 for an AND on a clean line and for each
    erasure, 7 for a product added to an output that may hold 1. A phase oracle's CZ costs none.
    """

    qubits: int
    ands: int
    cnots: int
    t_measured: int
    t_unitary: int
    plan: str


@dataclass(frozen=True)
class Realised:
    """A block and how many ANDs of it are computed, and added straight to outputs."""

    block: Block
    ands: int
    acts: int

    def point(self, oracle: Oracle) -> Point:
        """What it takes."""
        cascade = self.block.cascade
        products = (np.diff(cascade.offset) == 2) & (cascade.target != PHASE)
        scratch = int(np.count_nonzero(products)) - self.acts
        return Point(
            cascade.lines,
            self.ands + self.acts,
            cnots(self.block),
            4 * (self.ands + self.acts),
            4 * scratch + (7 if oracle == "bit" else 4) * self.acts,
            self.block.method.partition(", ")[2],
        )


def held(
    network: Network, oracle: Oracle, positive: bool = False, thresholds: Sequence[int] = (2, 3)
) -> list[Realised]:
    """Every AND held until the mirror, sums placed in different ways; fewest CNOTs first.

    thresholds: sums that so many others use get lines of their own; more of them take fewer CNOTs.
    """
    phase = oracle == "phase"

    def prepared(units: Units) -> tuple[Units, Landing]:
        if oracle in ("fresh", "compute"):
            return landed(units, keep=oracle == "compute")
        return units, Landing()

    def realised(units: Units, sheet: Sheet, name: str) -> Realised:
        block = block_of(sheet, units, oracle, f"network, {name}", positive)
        return Realised(block, units.ands, act_ands(units, phase))

    found: list[Realised] = []
    for threshold in thresholds:
        units, landing = prepared(units_of(network, threshold))
        sheet = homes.carry_out(units, hold_everything(units).operations, landing, phase)
        found.append(realised(units, sheet, "hold"))
    for cut in cuts_of_ands(network) if network.ands <= LAZY_ANDS else ():
        trials: list[Realised] = []
        for rule, look_ahead, hinted in _trials(network.ands):
            moved = cut if rule == "given" else selected(cut, ordered(cut, rule))
            units, landing = prepared(moved)
            operations = hold_everything(units).operations
            sheet = linear_state.carry_out(units, operations, landing, phase, look_ahead, hinted)
            trials.append(realised(units, sheet, "lazy"))
        found.append(min(trials, key=lambda one: cnots(one.block)))
    return sorted(found, key=lambda one: (cnots(one.block), one.block.cascade.lines))


def _trials(ands: int) -> list[tuple[Rule, int, bool]]:
    """Order, look-ahead, and whether hints are followed: more of them where they take no time."""
    if ands > FEW_ANDS[1]:
        return [("given", linear_state.LOOK_AHEAD, False)]
    rules: tuple[Rule, ...] = ("given", "large")
    found: list[tuple[Rule, int, bool]] = []
    for rule, hinted in product(rules, (False, True)):
        found.append((rule, linear_state.LOOK_AHEAD, hinted))
    if ands <= FEW_ANDS[0]:
        for rule, look_ahead in product(rules, (24, 200)):
            found.append((rule, look_ahead, True))
    return found


def planned(found: Found, oracle: Oracle, positive: bool = False) -> list[Realised]:
    """The block or blocks of a plan, fewest CNOTs first; `compute` has no mirror and keeps what is held."""
    units, landing = found.variant.units, found.variant.landing
    name, operations = f"network, {found.plan.name}", found.plan.operations
    if oracle == "compute":
        sheet = homes.carry_out_once(units, operations)
        block = block_of(sheet, units, oracle, name, positive, mirrored=False)
        computed = sum(1 for one in operations if one % 3 == COMPUTE and units.is_and(one // 3))
        return [Realised(block, computed, act_ands(units, phase=False))]
    engines = [homes.carry_out]
    if units.ands <= LAZY_ANDS and len(units) == units.ands:
        engines.append(linear_state.carry_out)
    result = []
    for carry_out in engines:
        sheet = carry_out(units, operations, landing, oracle == "phase")
        block = block_of(sheet, units, oracle, name, positive)
        result.append(Realised(block, found.plan.ands, act_ands(units, oracle == "phase")))
    return sorted(result, key=lambda one: (cnots(one.block), one.block.cascade.lines))
