"""The rules put to work on neighbouring gates, with what is worse or not allowed left out.

The answers are kept for a while: a search meets the same few gates again and again.
"""

from __future__ import annotations

from functools import lru_cache
from typing import NamedTuple

from revsynth.cascade.price import Uncompute
from revsynth.options import Controls
from revsynth.reduction.masks import Masked, negatives, weigh
from revsynth.reduction.rules import RULES

KEPT = 1 << 15
"""How many windows' answers are kept."""


class Change(NamedTuple):
    """Gates to put in the place of some others, and what that adds to the literals.

    `cheaper`: fewer gates or fewer T (and more of neither); otherwise both stay the same.
    """

    gates: Masked
    cheaper: bool
    literals: int


@lru_cache(maxsize=KEPT)
def changes(gates: Masked, controls: Controls, uncompute: Uncompute) -> tuple[Change, ...]:
    """All that the rules of this size make of the gates, the cheapest first; nothing with more gates or T.

    With `positive` controls nothing with more negative ones than before.
    """
    before = weigh(gates, uncompute)
    limit = negatives(gates)
    found: dict[Masked, tuple[int, int, int]] = {}
    for rule in RULES:
        if rule.size != len(gates):
            continue
        for after in rule.rewrite(gates):
            weight = weigh(after, uncompute)
            if weight.gates > before.gates or weight.t > before.t or after in found or after == gates:
                continue
            if controls == "positive" and negatives(after) > limit:
                continue
            found[after] = weight
    ranked = sorted(found.items(), key=lambda item: item[1])
    return tuple(
        Change(after, weight[:2] != before[:2], weight[2] - before.literals) for after, weight in ranked
    )


def improvement(gates: Masked, controls: Controls, uncompute: Uncompute) -> Masked | None:
    """The cheapest that one rule makes of the gates, or None where no rule makes them cheaper."""
    for change in changes(gates, controls, uncompute):
        if change.cheaper or change.literals < 0:
            return change.gates
    return None
