"""What a rule is."""

from __future__ import annotations

from collections.abc import Callable, Iterable
from dataclasses import dataclass

from revsynth.reduction.masks import Masked


@dataclass(frozen=True)
class Rule:
    """A rewriting of neighbouring gates.

    `rewrite` takes exactly `size` gates and yields every sequence that the rule puts in their place. All of
    these compute the same function, phases included. A rule need not look at cost or at what controls are
    allowed: the caller drops what is worse. `source` is where the rule is published, or how it follows.
    """

    name: str
    size: int
    source: str
    rewrite: Callable[[Masked], Iterable[Masked]]
