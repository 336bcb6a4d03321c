"""Search in small windows: exchanges that cost nothing are followed until one opens something cheaper.

A window is a gate and the ones before it that it cannot leave behind; gates that pass all of these freely are
stepped over, so that a window holds gates that have to do with each other however far apart they are.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from heapq import heappop, heappush
from itertools import combinations

from revsynth.reduction.masks import Masked, Masks, apart, commute, negatives
from revsynth.reduction.reel import Reel
from revsynth.reduction.rewriting import SIZES, Rewriter
from revsynth.reduction.rules import MOST_APART


@dataclass(frozen=True)
class Search:
    """How far a search goes.

    width: gates in a window; reach: gates looked at to fill it; forms: of a window, until it is given up;
    step: a window ends at every so-many-th gate.
    """

    width: int
    reach: int
    forms: int
    step: int


def search_windows(
    gates: list[Masks], fresh: Sequence[bool], search: Search, rewriter: Rewriter
) -> tuple[list[Masks], list[bool]]:
    """The gates once no window gives anything; and which of them this pass has changed.

    `fresh`: which gates are new since the last such pass; with a step of one, only windows with one of them
    are searched (with a longer step the ends of all windows move with every change).
    Time is proportional to the gates plus the changes made; each change is a strict gain, so it ends.
    """
    reel = Reel(gates, fresh)
    while reel.advance():
        if search.step == 1 and reel.coming and reel.is_settled(search.reach):
            continue
        if _is_due(reel, search):
            start, window, passed = _window(reel.done, search)
            better = cheaper_form(window, search.forms, rewriter)
            if better is not None:
                reel.replace(start, [*better, *passed])
                reel.step_back(search.step - 1)
    return reel.done, reel.changed()


def _related(one: Masks, other: Masks) -> bool:
    """Whether the order of two gates matters, or a rule for one target may take both."""
    return one[0] == other[0] or not commute(one, other)


def _is_due(reel: Reel, search: Search) -> bool:
    """Whether a window is to end here: at each `step`-th gate, the last, and any that no other takes up."""
    if not reel.coming:
        return True
    beyond = len(reel.done) - search.width
    if beyond < 0:
        return False
    ahead = reel.coming[: -1 - (-beyond % search.step) : -1]
    return not any(_related(reel.done[-1], later) for later in ahead)


def _window(done: list[Masks], search: Search) -> tuple[int, Masked, list[Masks]]:
    """The first gate's index, the window up to the last gate, and what between them moves out behind it."""
    if len(done) <= search.width:
        return 0, tuple(done), []
    window = [done[-1]]
    passed: list[Masks] = []
    pending: list[Masks] = []
    start = len(done) - 1
    flipped, read = window[0][0], window[0][1] | window[0][2]
    for index in range(start - 1, max(start - search.reach, -1), -1):
        gate = done[index]
        care = gate[1] | gate[2]
        is_apart = gate[0] and not (gate[0] & (flipped | read) or flipped & care)
        if is_apart or not any(_related(gate, other) for other in window):
            pending.append(gate)
            continue
        window.append(gate)
        flipped |= gate[0]
        read |= care
        passed.extend(pending)
        pending.clear()
        start = index
        if len(window) == search.width:
            break
    return start, tuple(reversed(window)), passed[::-1]


def cheaper_form(window: Masked, forms: int, rewriter: Rewriter) -> Masked | None:
    """The first cheaper form of a window within that many forms of equal gates and T, or None."""
    target = window[0][0]
    if all(gate[0] == target for gate in window):
        return _cheaper_sum(window, forms, rewriter)
    return _cheaper_sequence(window, forms, rewriter)


def _cheaper_sequence(window: Masked, forms: int, rewriter: Rewriter) -> Masked | None:
    """Of two changes that do not touch, only the left one is tried first: both orders end in one form.

    Where negative controls are not allowed the way may still lead through them: forms with fewest come first.
    """
    seen = {window: (0, 0, False)}
    queue = [(0, 0, window)]
    known = rewriter.known.get
    while queue:
        _, _, form = heappop(queue)
        extra, place, gained = seen[form]
        for size in SIZES:
            for index in range(max(place - size + 1, 0), len(form) - size + 1):
                part = form[index : index + size]
                found = known(part)
                if found is None:
                    found = rewriter.changes(part)
                for gates, cheaper, literals in found:
                    literals += extra
                    cheaper = cheaper or gained
                    after = form[:index] + gates + form[index + size :]
                    if (cheaper or literals < 0) and rewriter.allows(after, window):
                        return after
                    if after not in seen:
                        rank = 0 if rewriter.may_turn else negatives(after)
                        heappush(queue, (rank, len(seen), after))
                        seen[after] = literals, index, cheaper
        if len(seen) > forms:
            return None
    return None


def _cheaper_sum(window: Masked, forms: int, rewriter: Rewriter) -> Masked | None:
    """Gates on one target have no order, so forms are kept sorted and every two gates are neighbours."""
    start = tuple(sorted(window))
    seen = {start: 0}
    queue = [start]
    for form in queue:
        extra = seen[form]
        for left, right in combinations(range(len(form)), 2):
            if apart(form[left], form[right]) > MOST_APART:
                continue
            rest = form[:left] + form[left + 1 : right] + form[right + 1 :]
            for gates, cheaper, literals in rewriter.changes((form[left], form[right])):
                literals += extra
                after = tuple(sorted(rest + gates))
                if (cheaper or literals < 0) and rewriter.allows(after, window):
                    return after
                if after not in seen:
                    seen[after] = literals
                    queue.append(after)
        if len(queue) > forms:
            return None
    return None
