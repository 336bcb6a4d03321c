"""How many scratch qubits a cascade can be given within the budget, and what its gates cost with them."""

from __future__ import annotations

from collections import Counter
from typing import NamedTuple

from revsynth.errors import BudgetError
from revsynth.lowering.constructions import Choice, Price, Style, choose
from revsynth.lowering.draft import Tip
from revsynth.options import Aim


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


def scratch_choices(
    demands: Counter[Demand], lines: int, max_qubits: int | None, style: Style
) -> list[tuple[tuple[int, ...], int]]:
    """Every number of scratch qubits that fits, with the sort key of what the gates cost with it one by one.

    demands: how often each demand comes up; `lines`: the lines that are there already. Raises BudgetError
    where `max_qubits` is too small, saying how many are needed.
    """
    most = max((demand.controls - 1 for demand in demands), default=0)
    found: list[tuple[tuple[int, ...], int]] = []
    for scratch in range(max(most, 1) + 1):
        if found and max_qubits is not None and lines + scratch > max_qubits:
            break
        price = _total(demands, scratch, style)
        if price is not None:
            found.append((sort_key(price, scratch, style), scratch))
    check_budget(lines + found[0][1], max_qubits)
    return found


def sort_key(price: Price, scratch: int, style: Style) -> tuple[int, ...]:
    """What to make small first for the aim, and what after it."""
    t, gates, depth = price
    keys: dict[Aim, tuple[int, ...]] = {
        "t": (t, scratch, gates, depth),
        "qubits": (scratch, t, gates, depth),
        "gates": (gates, t, scratch, depth),
        "depth": (depth, t, scratch, gates),
    }
    return keys[style.aim]


def check_budget(needed: int, max_qubits: int | None) -> None:
    """Raise BudgetError where more qubits are needed than allowed."""
    if max_qubits is not None and needed > max_qubits:
        raise BudgetError(f"needs at least {needed} qubits, {max_qubits} allowed")


def _total(demands: Counter[Demand], scratch: int, style: Style) -> Price | None:
    t = gates = depth = 0
    for demand, times in demands.items():
        choice = demand.choice(scratch, style)
        if choice is None:
            return None
        t += times * choice.price.t
        gates += times * choice.price.gates
        depth += times * choice.price.depth
    return Price(t, gates, depth)
