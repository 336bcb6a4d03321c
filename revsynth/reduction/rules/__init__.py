"""The rules of reduction. A new rule is one new module and one line in `RULES`."""

from __future__ import annotations

from revsynth.reduction.rules.exchange import EXCHANGE
from revsynth.reduction.rules.merging import MERGING
from revsynth.reduction.rules.model import Rule
from revsynth.reduction.rules.moving import MOVING
from revsynth.reduction.rules.passing import PASSING
from revsynth.reduction.rules.swapping import SWAPPING

__all__ = ["MOST_APART", "RULES", "Rule"]

RULES: tuple[Rule, ...] = (MERGING, EXCHANGE, PASSING, SWAPPING, MOVING)
"""In the order in which they are tried."""

MOST_APART = 2
"""Two gates on one target whose controls differ at more lines than this: no rule does more than swap them."""
