"""Search in small windows: exchanges that cost nothing are followed until one opens something cheaper.

A window is a gate and the ones before it that it cannot leave behind; gates that pass all of these freely are
stepped over, so that a window holds gates that have to do with each other however far apart they are.
"""

from __future__ import annotations

from dataclasses import dataclass

from revsynth.cascade.price import Uncompute
from revsynth.options import Controls
from revsynth.reduction.masks import Masked, Masks, commute
from revsynth.reduction.rewriting import changes
from revsynth.reduction.rules import RULES

_SIZES = tuple(sorted({rule.size for rule in RULES}))


@dataclass(frozen=True)
class Search:
    """How far a search goes: gates in a window, gates looked at to fill it, forms of a window, gates between two."""

    width: int
    reach: int
    forms: int
    step: int


def search_windows(
    gates: list[Masks], search: Search, controls: Controls, uncompute: Uncompute
) -> tuple[list[Masks], bool]:
    """The gates after every window's search, until no window gives anything; and whether anything changed.

    Time is proportional to the gates plus the changes made; each change is a strict gain, so it ends.
    """
    gates = list(gates)
    changed = False
    end = 0
    while end < len(gates):
        start, window, passed = _window(gates, end, search)
        better = cheaper_form(window, search.forms, controls, uncompute) if len(window) > 1 else None
        if better is None:
            end = end + search.step if end + search.step < len(gates) else max(end + 1, len(gates) - 1)
            continue
        gates[start : end + 1] = [*better, *passed]
        changed = True
        end = start // search.step * search.step
    return gates, changed


def _window(gates: list[Masks], end: int, search: Search) -> tuple[int, Masked, list[Masks]]:
    """The first gate's index, the window up to gate `end`, and what between them moves out behind it."""
    window = [gates[end]]
    passed: list[Masks] = []
    start = end
    pending: list[Masks] = []
    for index in range(end - 1, max(end - search.reach, -1), -1):
        if len(window) == search.width:
            break
        gate = gates[index]
        if any(other[0] == gate[0] or not commute(gate, other) for other in window):
            window.append(gate)
            passed.extend(pending)
            pending.clear()
            start = index
        else:
            pending.append(gate)
    return start, tuple(reversed(window)), passed[::-1]


def cheaper_form(window: Masked, forms: int, controls: Controls, uncompute: Uncompute) -> Masked | None:
    """The first cheaper form of a window within that many forms of equal gates and T, or None."""
    seen = {window: 0}
    queue = [window]
    for form in queue:
        extra = seen[form]
        for size in _SIZES:
            for index in range(len(form) - size + 1):
                for change in changes(form[index : index + size], controls, uncompute):
                    literals = extra + change.literals
                    after = form[:index] + change.gates + form[index + size :]
                    if change.cheaper or literals < 0:
                        return after
                    if after not in seen:
                        seen[after] = literals
                        queue.append(after)
        if len(queue) > forms:
            return None
    return None
