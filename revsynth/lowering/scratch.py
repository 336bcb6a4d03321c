"""How many scratch qubits a cascade is given: as many as pay for the aim, as few as do, within the budget."""

from __future__ import annotations

from collections import Counter
from typing import NamedTuple

from revsynth.errors import BudgetError
from revsynth.lowering.constructions import Choice, Style, choose
from revsynth.lowering.draft import Tip


class Demand(NamedTuple):
    """What one gate has at hand before scratch is added: lines known to be in 0, and lines in any state."""

    controls: int
    tip: Tip
    zero_lines: int
    idle_lines: int

    def choice(self, scratch: int, style: Style) -> Choice | None:
        """The construction with that much scratch more."""
        most = max(self.controls - 1, 0)
        clean = self.zero_lines + scratch
        spare = max(clean - most, 0)
        return choose(self.controls, self.tip, clean - spare, min(self.idle_lines + spare, most), style)


def scratch_needed(demands: Counter[Demand], lines: int, max_qubits: int | None, style: Style) -> int:
    """The number of scratch qubits to add to `lines` lines.

    demands: how often each demand comes up. Raises BudgetError where `max_qubits` is too small, saying
    how many are needed.
    """
    most = max((demand.controls - 1 for demand in demands), default=0)
    totals: list[tuple[tuple[int, ...], int]] = []
    least: int | None = None
    for scratch in range(max(most, 1) + 1):
        if least is not None and max_qubits is not None and lines + scratch > max_qubits:
            break
        key = _total(demands, scratch, style)
        if key is None:
            continue
        least = scratch if least is None else least
        totals.append((key, scratch))
    if least is None:
        raise AssertionError("one scratch qubit serves any number of controls")
    check_budget(lines + least, max_qubits)
    return min(totals)[1]


def check_budget(needed: int, max_qubits: int | None) -> None:
    """Raise BudgetError where more qubits are needed than allowed."""
    if max_qubits is not None and needed > max_qubits:
        raise BudgetError(f"needs at least {needed} qubits, {max_qubits} allowed")


def _total(demands: Counter[Demand], scratch: int, style: Style) -> tuple[int, ...] | None:
    t = gates = depth = 0
    for demand, times in demands.items():
        choice = demand.choice(scratch, style)
        if choice is None:
            return None
        t += times * choice.price.t
        gates += times * choice.price.gates
        depth += times * choice.price.depth
    if style.aim == "gates":
        return (gates, t, scratch)
    if style.aim == "depth":
        return (depth, t, scratch)
    return (scratch, t, gates) if style.aim == "qubits" else (t, scratch, gates)
