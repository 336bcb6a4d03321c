"""Blocks of plans, and what they take."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass

import numpy as np

from revsynth.cascade.model import PHASE
from revsynth.logic.network import Network
from revsynth.options import Oracle
from revsynth.synthesis.interface import Block
from revsynth.synthesis.scratch import homes, linear_state
from revsynth.synthesis.scratch.blocks import block_of, cnots
from revsynth.synthesis.scratch.landing import Landing, landed
from revsynth.synthesis.scratch.plan import act_ands, hold_everything
from revsynth.synthesis.scratch.planner import Found
from revsynth.synthesis.scratch.sheet import Sheet
from revsynth.synthesis.scratch.units import Units, units_of, with_tails, without_sums

LAZY_ANDS = 3_000
"""Up to so many ANDs the invertible linear state is tried, whose work grows with their square."""


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


def held(network: Network, oracle: Oracle, positive: bool = False) -> list[Realised]:
    """Every AND held until the mirror, sums placed in different ways; fewest CNOTs first."""

    def prepared(units: Units) -> tuple[Units, Landing]:
        if oracle in ("fresh", "compute"):
            return landed(units, keep=oracle == "compute")
        return units, Landing()

    def realised(units: Units, landing: Landing, sheet: Sheet, name: str) -> Realised:
        block = block_of(sheet, units, oracle, f"network, {name}", positive)
        return Realised(block, units.ands, act_ands(units, oracle == "phase"))

    phase = oracle == "phase"
    found: list[Realised] = []
    for threshold in (2, 3):
        units, landing = prepared(units_of(network, threshold))
        sheet = homes.carry_out(units, hold_everything(units).operations, landing, phase)
        found.append(realised(units, landing, sheet, "hold"))
    for cut in _cuts_without_sums(network):
        units, landing = prepared(cut)
        operations = hold_everything(units).operations
        for hinted in (False, True) if units.hints else (False,):
            sheet = linear_state.carry_out(units, operations, landing, phase, hinted=hinted)
            found.append(realised(units, landing, sheet, "lazy"))
    return sorted(found, key=lambda one: (cnots(one.block), one.block.cascade.lines))


def _cuts_without_sums(network: Network) -> Iterator[Units]:
    if network.ands <= LAZY_ANDS:
        try:
            yield units_of(network, None)
            yield without_sums(with_tails(units_of(network, 2)))
        except OverflowError:
            return


def planned(found: Found, oracle: Oracle, positive: bool = False) -> list[Realised]:
    """The block or blocks of a plan, fewest CNOTs first."""
    units, landing = found.variant.units, found.variant.landing
    engines = [homes.carry_out]
    if units.ands <= LAZY_ANDS and len(units) == units.ands:
        engines.append(linear_state.carry_out)
    result = []
    for carry_out in engines:
        sheet = carry_out(units, found.plan.operations, landing, oracle == "phase")
        block = block_of(sheet, units, oracle, f"network, {found.plan.name}", positive)
        result.append(Realised(block, found.plan.ands, act_ands(units, oracle == "phase")))
    return sorted(result, key=lambda one: (cnots(one.block), one.block.cascade.lines))
