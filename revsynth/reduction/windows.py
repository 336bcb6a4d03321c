"""Search in small windows: exchanges that cost nothing are followed until one opens something cheaper.

A window is a gate and the ones before it that it cannot leave behind; gates that pass all of these freely are
stepped over, so that a window holds gates that have to do with each other however far apart they are.
"""

from __future__ import annotations

from dataclasses import dataclass

from revsynth.reduction.masks import Masked, Masks, commute
from revsynth.reduction.rewriting import SIZES, Rewriter


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


def search_windows(gates: list[Masks], search: Search, rewriter: Rewriter) -> tuple[list[Masks], bool]:
    """The gates after every window's search, until no window gives anything; and whether anything changed.

    Time is proportional to the gates plus the changes made; each change is a strict gain, so it ends.
    """
    gates = list(gates)
    changed = False
    end = 0
    while end < len(gates):
        if _is_due(gates, end, search):
            start, window, passed = _window(gates, end, search)
            better = cheaper_form(window, search.forms, rewriter)
            if better is not None:
                gates[start : end + 1] = [*better, *passed]
                changed = True
                end = max(start - search.step, -1)
        end += 1
    return gates, changed


def _related(one: Masks, other: Masks) -> bool:
    """Whether the order of two gates matters, or a rule for one target may take both."""
    return one[0] == other[0] or not commute(one, other)


def _is_due(gates: list[Masks], end: int, search: Search) -> bool:
    """Whether a window is to end here: at each `step`-th gate, the last, and any that no other takes up."""
    first = search.width - 1
    if end == len(gates) - 1:
        return True
    if end < first:
        return False
    ahead = -(end - first) % search.step
    return not any(_related(gates[end], later) for later in gates[end + 1 : end + 1 + ahead])


def _window(gates: list[Masks], end: int, search: Search) -> tuple[int, Masked, list[Masks]]:
    """The first gate's index, the window up to gate `end`, and what between them moves out behind it."""
    if end < search.width:
        return 0, tuple(gates[: end + 1]), []
    window = [gates[end]]
    passed: list[Masks] = []
    pending: list[Masks] = []
    start = end
    for index in range(end - 1, max(end - search.reach, -1), -1):
        gate = gates[index]
        if not any(_related(gate, other) for other in window):
            pending.append(gate)
            continue
        window.append(gate)
        passed.extend(pending)
        pending.clear()
        start = index
        if len(window) == search.width:
            break
    return start, tuple(reversed(window)), passed[::-1]


def cheaper_form(window: Masked, forms: int, rewriter: Rewriter) -> Masked | None:
    """The first cheaper form of a window within that many forms of equal gates and T, or None."""
    seen = {window: 0}
    queue = [window]
    known = rewriter.known.get
    for form in queue:
        extra = seen[form]
        for size in SIZES:
            for index in range(len(form) - size + 1):
                part = form[index : index + size]
                found = known(part)
                if found is None:
                    found = rewriter.changes(part)
                for gates, cheaper, literals in found:
                    literals += extra
                    after = form[:index] + gates + form[index + size :]
                    if cheaper or literals < 0:
                        return after
                    if after not in seen:
                        seen[after] = literals
                        queue.append(after)
        if len(queue) > forms:
            return None
    return None
