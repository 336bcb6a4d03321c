"""From a cascade to a cheaper one that does the same: the passes in turn, until none of them gains."""

from __future__ import annotations

from collections.abc import Callable

from revsynth.cascade.model import Cascade
from revsynth.errors import UsageError
from revsynth.options import CHOICES, Controls, Uncompute
from revsynth.reduction.lookback import Look, look_back
from revsynth.reduction.masks import Masks, masked, unmasked
from revsynth.reduction.optimal_runs import Runs, replace_runs, whole_optimum
from revsynth.reduction.rewriting import Rewriter, rewriter
from revsynth.reduction.stretches import WIDE, in_stretches
from revsynth.reduction.windows import Search, search_windows

Progress = Callable[[str], None]

LOOK = Look(reach=32, between=8)

SEARCHES: tuple[tuple[int, Search], ...] = (
    (64, Search(width=10, reach=32, forms=300, step=1)),
    (1_000, Search(width=8, reach=24, forms=200, step=3)),
    (6_000, Search(width=6, reach=16, forms=100, step=2)),
    (100_000, Search(width=4, reach=12, forms=10, step=1)),
)
"""How far cascades of up to so many gates are searched: about a second of work, then less a gate."""
FAST = Search(width=3, reach=8, forms=1, step=1)
"""How far longer ones are."""
RUNS: tuple[tuple[int, int, Runs], ...] = (
    (1_000, WIDE, Runs(lines=3, reach=24, shortest=3, longest=16, choices=4)),
    (6_000, WIDE, Runs(lines=3, reach=12, shortest=3, longest=12, choices=2)),
    (150, 6, Runs(lines=4, reach=16, shortest=4, longest=6, choices=4)),
)
"""In cascades of up to so many gates on up to so many lines: how far runs go. Short runs on four lines gain
little on more lines, and their table takes a tenth of a second to find."""
NOTABLE = 1_000
"""Gates from which on a search says that it is at work."""


def silent(_: str) -> None:
    """A progress that says nothing."""


def reduce(
    cascade: Cascade,
    *,
    controls: Controls = "mixed",
    uncompute: Uncompute = "unitary",
    progress: Progress = silent,
) -> Cascade:
    """A cascade of the same function, signs included, on the same lines, that costs no more.

    Cost is (gates, T by `cascade.price` with this `uncompute`, control literals), compared in this order, and
    neither gates nor T ever rise. The same cascade comes back where nothing is gained, so a second call
    changes nothing. `controls="positive"` brings in no negative control; those that are there may stay.
    Time is about proportional to the gates; it does not depend on the lines that a gate does not touch.

    Raises UsageError for unknown `controls` or `uncompute`.
    """
    for name, value in (("controls", controls), ("uncompute", uncompute)):
        if value not in CHOICES[name]:
            raise UsageError(f"{name} {value!r} is not one of {', '.join(CHOICES[name])}")
    rules = rewriter(controls, uncompute)

    def work(gates: list[Masks], total: int) -> tuple[list[Masks], bool]:
        return _settle(gates, total, rules, controls, progress)

    if cascade.lines >= WIDE:
        return in_stretches(cascade, work)
    original = masked(cascade)
    optimum = whole_optimum(original, cascade.lines, controls, uncompute)
    if optimum is not None:
        return cascade if optimum is original else unmasked(cascade.lines, optimum)
    gates, changed = work(original, len(cascade))
    return unmasked(cascade.lines, gates) if changed else cascade


def _settle(
    gates: list[Masks], total: int, rules: Rewriter, controls: Controls, progress: Progress
) -> tuple[list[Masks], bool]:
    """The passes in turn until none gains on what the others left; and whether any did.

    `total` is the length of the whole cascade, which decides how far to search.
    """
    original = gates
    new: list[bool] = [True] * len(gates)
    search: Search | None = None
    while True:
        gates, new = look_back(gates, new, LOOK, rules)
        reached = next(
            (found for most, found in SEARCHES if total + len(gates) - len(original) <= most), FAST
        )
        if reached is not search:
            search = reached
            new = [True] * len(gates)
        if len(gates) > NOTABLE:
            progress(f"searching {len(gates)} gates for exchanges")
        before = len(gates)
        gates, new = search_windows(gates, new, search, rules)
        if len(gates) < before or any(new):
            continue
        gates, new = _try_runs(gates, total + len(gates) - len(original), controls, rules.uncompute)
        if len(gates) == before and not any(new):
            return gates, gates != original


def _try_runs(
    gates: list[Masks], total: int, controls: Controls, uncompute: Uncompute
) -> tuple[list[Masks], list[bool]]:
    """The gates after the first kind of runs that gains, and which of them it has changed."""
    touched = 0
    for target, positive, negative in gates:
        touched |= target | positive | negative
    tried = set()
    for most, lines, runs in RUNS:
        if total > most or touched.bit_count() > lines or runs.lines in tried:
            continue
        tried.add(runs.lines)
        after, new = replace_runs(gates, [True] * len(gates), runs, controls, uncompute)
        if len(after) < len(gates) or any(new):
            return after, new
    return gates, [False] * len(gates)
