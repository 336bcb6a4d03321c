"""The rules put to work on neighbouring gates, with what is worse or not allowed left out."""

from __future__ import annotations

from functools import lru_cache
from operator import itemgetter
from typing import NamedTuple

from revsynth.options import Controls, Uncompute
from revsynth.reduction.masks import Masked, Weight, negatives, weigh
from revsynth.reduction.rules import RULES

KEPT = 1 << 15
"""How many answers are kept before all are forgotten."""

SIZES = tuple(sorted({rule.size for rule in RULES}))
"""How many neighbouring gates the rules look at."""

_REWRITES = {size: [rule.rewrite for rule in RULES if rule.size == size] for size in SIZES}


class Change(NamedTuple):
    """Gates to put in the place of some others, and what that adds to the literals.

    `cheaper`: fewer gates or fewer T (and more of neither); otherwise both stay the same.
    """

    gates: Masked
    cheaper: bool
    literals: int


class Rewriter:
    """The rules under one setting. Answers are kept in `known`: a search meets the same few gates again.

    may_turn: whether controls may become negative.
    """

    def __init__(self, controls: Controls, uncompute: Uncompute) -> None:
        self.uncompute = uncompute
        self.may_turn = controls == "mixed"
        self.known: dict[Masked, tuple[Change, ...]] = {}

    def changes(self, gates: Masked) -> tuple[Change, ...]:
        """All that the rules of this size make of the gates, the cheapest first, of either polarity.

        Nothing with more gates or more T.
        """
        found = self.known.get(gates)
        if found is None:
            if len(self.known) >= KEPT:
                self.known.clear()
            found = self.known[gates] = self._changes(gates)
        return found

    def improvement(self, gates: Masked) -> Masked | None:
        """The cheapest that one rule makes of the gates, or None where no rule makes them cheaper."""
        for change in self.changes(gates):
            if (change.cheaper or change.literals < 0) and self.allows(change.gates, gates):
                return change.gates
        return None

    def allows(self, after: Masked, before: Masked) -> bool:
        """Whether controls that wait for 0 are allowed, or no more of them than before."""
        return self.may_turn or negatives(after) <= negatives(before)

    def _changes(self, gates: Masked) -> tuple[Change, ...]:
        results = dict.fromkeys(after for rewrite in _REWRITES[len(gates)] for after in rewrite(gates))
        if not results:
            return ()
        before = weigh(gates, self.uncompute)
        found: list[tuple[Weight, Change]] = []
        for after in results:
            weight = weigh(after, self.uncompute)
            if weight.gates > before.gates or weight.t > before.t or after == gates:
                continue
            literals = weight.literals - before.literals
            found.append((weight, Change(after, weight[:2] != before[:2], literals)))
        found.sort(key=itemgetter(0))
        return tuple(change for _, change in found)


@lru_cache(maxsize=4)
def rewriter(controls: Controls, uncompute: Uncompute) -> Rewriter:
    """The rewriter of a setting, shared by all cascades."""
    return Rewriter(controls, uncompute)
