"""The plan with the fewest ANDs within a number of scratch lines, out of several families of plans.

A network is cut into units in several ways and orders (`Variant`); for each there is the plan that holds
everything, one level of checkpoints filled to the budget, greedy pebbling, and nested checkpoints. In all of
them an AND that is erased once before the mirror costs one more, so with N ANDs and B lines no plan has fewer
than N + (N - B); where that is reached, nothing further is tried.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from functools import cached_property
from itertools import product

from revsynth.logic.network import Network
from revsynth.options import Effort, Oracle
from revsynth.synthesis.scratch.checkpoints import (
    Range,
    Shape,
    blocks,
    checkpointed,
    filled_bounds,
    nested,
    one_level_ands,
)
from revsynth.synthesis.scratch.game import Game
from revsynth.synthesis.scratch.landing import Landing, landed
from revsynth.synthesis.scratch.orders import RULES, Rule, ordered
from revsynth.synthesis.scratch.pebbles import POLICIES, pebble
from revsynth.synthesis.scratch.plan import Plan, hold_everything, plan_of
from revsynth.synthesis.scratch.units import Units, cuts_of_ands, selected, units_of, with_tails

SMALL_ANDS = 3_000
"""Up to so many ANDs all cuts and orders are tried, above only those that keep sums on lines."""
WORK: dict[Effort, int] = {"low": 40_000, "normal": 160_000, "high": 2_000_000}
"""Units that trial plans may go through for one budget; a few plans are tried in any case."""
FILLS = 48
"""Ways to fill one level of checkpoints that are looked at, for each variant."""


@dataclass(frozen=True)
class Variant:
    """One way to cut the network into units, with what lands on outputs."""

    units: Units
    landing: Landing

    @cached_property
    def game(self) -> Game:
        """The pebble game of the units."""
        return Game.of(self.units, self.landing)

    @property
    def scratch(self) -> int:
        """Lines that holding everything takes."""
        return len(self.units) - len(self.landing.lines)

    def plan(self, operations: list[int], name: str) -> Plan:
        """The plan, checked and counted."""
        return plan_of(self.units, operations, name, self.landing.lines)


@dataclass(frozen=True)
class Found:
    """A plan of a variant."""

    variant: Variant
    plan: Plan

    @property
    def key(self) -> tuple[int, int, int]:
        """What is better is smaller: ANDs, then operations, then lines."""
        return self.plan.ands, len(self.plan.operations), self.plan.peak


class Planner:
    """Plans of one network in one oracle form (`phase`, `bit`, `fresh`, or `compute` without landing)."""

    def __init__(self, network: Network, oracle: Oracle, effort: Effort, seed: int) -> None:
        self.network = network
        self.oracle = oracle
        self.effort = effort
        self.seed = seed
        self._nested: dict[int, list[tuple[int, int, Range]]] = {}

    @cached_property
    def variants(self) -> list[Variant]:
        """The cuts and orders that are tried."""
        small = self.network.ands <= SMALL_ANDS
        cuts: list[Units] = []
        for units in self._cuts(small):
            # Without XORs to speak of, the ways to cut are one and the same.
            if not any(units == other for other in cuts):
                cuts.append(units)
        rules: list[tuple[Rule, int]] = [(rule, 0) for rule in (RULES if small else ("given", "large"))]
        if small and self.effort == "high":
            rules.extend(("any", self.seed + i) for i in range(8))
        found: list[Variant] = []
        for units in cuts:
            known: set[tuple[int, ...]] = set()
            for rule, seed in rules:
                order = ordered(units, rule, seed)
                if tuple(order) in known:
                    continue
                known.add(tuple(order))
                moved = units if rule == "given" else selected(units, order)
                if self.oracle == "fresh":
                    found.append(Variant(*landed(moved, keep=False)))
                else:
                    found.append(Variant(moved, Landing()))
        return found

    def _cuts(self, small: bool) -> Iterator[Units]:
        if small:
            yield from cuts_of_ands(self.network)
        yield with_tails(units_of(self.network, 2))
        if not small:
            yield with_tails(units_of(self.network, 3))

    def best(self, scratch: int) -> list[Found]:
        """The best plans found within so many scratch lines, the best first; none where none was found."""
        if scratch < 0:
            return []
        found: list[Found] = []
        for variant in self.variants:
            if variant.scratch <= scratch:
                plan = hold_everything(variant.units, variant.landing.lines)
                found.append(Found(variant, plan))
        if not found:
            found = self._one_level(scratch)
            if not self._is_least(found, scratch):
                found.extend(self._pebbled(scratch, found))
            large = self.network.ands > SMALL_ANDS
            if not (found and large) and not self._is_least(found, scratch):
                found.extend(self._several_levels(scratch))
        return sorted(found, key=lambda one: one.key)[:3]

    def _is_least(self, found: list[Found], scratch: int) -> bool:
        """Whether a plan reaches the bound of the variants whose units are all ANDs; never without such."""
        bound = min(
            (
                v.units.ands + max(0, v.scratch - scratch)
                for v in self.variants
                if v.units.ands == len(v.units)
            ),
            default=0,
        )
        return any(one.plan.ands <= bound for one in found)

    def _one_level(self, scratch: int) -> list[Found]:
        """One level of blocks, filled to different marks."""
        candidates: list[tuple[int, int, list[int]]] = []
        step = max(1, scratch // FILLS)
        for number, variant in enumerate(self.variants):
            best: tuple[int, int, list[int]] | None = None
            for fill in range(scratch, 0, -step):
                bounds = filled_bounds(variant.game, scratch, fill)
                if bounds is not None:
                    ands = one_level_ands(variant.game, bounds)
                    if best is None or ands < best[0]:
                        best = (ands, number, bounds)
            if best is not None:
                candidates.append(best)
        found = []
        for _, number, bounds in sorted(candidates)[:3]:
            variant = self.variants[number]
            plan = variant.plan(checkpointed(variant.game, blocks(bounds)), "checkpoints")
            if plan.peak <= scratch:
                found.append(Found(variant, plan))
        return found

    def _pebbled(self, scratch: int, found: list[Found]) -> list[Found]:
        """Greedy pebbling with all policies and several seeds, as far as the work goes."""
        work = WORK[self.effort]
        least = min((one.plan.ands for one in found), default=1 << 60)
        result: list[Found] = []
        for round_ in range(1 << 10):
            for variant in self.variants:
                if len(variant.units) > 2 * SMALL_ANDS:
                    return result
                for policy in POLICIES:
                    if policy == "any" and round_ == 0:
                        continue
                    operations = pebble(variant.game, scratch, policy, self.seed + round_)
                    work -= len(variant.units) if operations is None else len(operations)
                    if operations is not None:
                        plan = variant.plan(operations, "pebbles")
                        if plan.ands < least:
                            least = plan.ands
                            result.append(Found(variant, plan))
                            if self._is_least(result, scratch):
                                return result
                    if work < 0:
                        return result
            if round_ == 0 and not result:
                return result
        return result

    def _several_levels(self, scratch: int) -> list[Found]:
        """Nested checkpoints; what each costs is worked out once for all budgets."""
        fitting: list[tuple[int, int, int, Range]] = []
        for number in range(len(self.variants)):
            for peak, ands, whole in self.nested(number):
                if peak <= scratch:
                    fitting.append((ands, peak, number, whole))
        found = []
        for _, _, number, whole in sorted(fitting, key=lambda row: row[:3])[:2]:
            variant = self.variants[number]
            found.append(
                Found(variant, variant.plan(checkpointed(variant.game, whole), "nested checkpoints"))
            )
        return found

    def least_scratch(self) -> int:
        """The fewest scratch lines for which a plan is known (nested checkpoints, or holding everything)."""
        held = min(variant.scratch for variant in self.variants)
        rows = [self.nested(number)[:1] for number in range(len(self.variants))]
        return min([held, *(row[0][0] for row in rows if row)])

    def nested(self, number: int) -> list[tuple[int, int, Range]]:
        """(lines, ANDs, blocks) of nested checkpoints of a variant that no other of them beats in both."""
        if number not in self._nested:
            variant = self.variants[number]
            size = len(variant.units)
            trials = max(6, WORK[self.effort] // (2 * len(self.variants) * max(1, size)))
            rows: list[tuple[int, int, Range]] = []
            for shape in shapes(size, trials):
                whole = nested(variant.game, shape)
                plan = variant.plan(checkpointed(variant.game, whole), "nested checkpoints")
                rows.append((plan.peak, plan.ands, whole))
            self._nested[number] = best_of_both(rows)
        return self._nested[number]


def shapes(size: int, most: int) -> list[Shape]:
    """At most `most` shapes for that many units, spread over what makes sense."""
    found: list[Shape] = []
    for levels in (2, 3, 1, 4):
        for parts in product((2, 3, 4, 6), repeat=levels):
            count = 1
            for part in parts:
                count *= part
            if count <= size:
                found.extend(
                    Shape(parts, ratio, slack) for slack in (0.15, 0.3) for ratio in (1.0, 0.8, 0.65)
                )
    if len(found) <= most:
        return found
    # A step without a common factor with the length of a cycle, so that all kinds come up.
    step = next(step for step in range(len(found) // most, 0, -1) if step == 1 or step % 6 in (1, 5))
    return found[::step][:most]


def best_of_both(rows: list[tuple[int, int, Range]]) -> list[tuple[int, int, Range]]:
    """Rows (lines, ANDs, ...) that no other row beats in both, fewest lines first."""
    kept: list[tuple[int, int, Range]] = []
    for row in sorted(rows, key=lambda row: row[:2]):
        if not kept or row[1] < kept[-1][1]:
            kept.append(row)
    return kept
