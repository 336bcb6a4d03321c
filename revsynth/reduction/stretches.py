"""Wide cascades a stretch at a time, on the lines that it touches, so that masks stay narrow."""

from __future__ import annotations

from collections.abc import Callable

from revsynth.cascade.model import PHASE, Cascade, Gate, Line
from revsynth.reduction.masks import Masks, to_gate

WIDE = 4_096
"""Lines from which on a cascade is worked on in stretches."""
STRETCH = 16_384
"""Gates in a stretch."""

Work = Callable[[list[Masks], int], tuple[list[Masks], bool]]
"""Given some gates and the number of gates in the whole cascade: the gates now, and whether any changed."""


def in_stretches(cascade: Cascade, work: Work) -> Cascade:
    """The cascade after `work` on overlapping stretches, again and again until it changes none of them.

    The stretches of every second round lie across the borders of those of the first.
    """
    gates = list(cascade)
    quiet = 0
    changed = False
    border = 0
    while quiet < (2 if len(gates) > STRETCH // 2 else 1):
        after: list[Gate] = []
        active = False
        start = 0
        for end in (*range(border or STRETCH, len(gates), STRETCH), len(gates)):
            stretch, gained = _on_own_lines(gates[start:end], len(gates), work)
            after.extend(stretch)
            active = active or gained
            start = end
        gates = after
        changed = changed or active
        quiet = 0 if active else quiet + 1
        border = 0 if border else STRETCH // 2
    return Cascade.from_gates(cascade.lines, gates) if changed else cascade


def _on_own_lines(gates: list[Gate], total: int, work: Work) -> tuple[list[Gate], bool]:
    """The gates after `work`, which sees them on lines 0, 1, ... without gaps, in the same order."""
    lines: list[Line] = sorted({line for gate in gates for line in gate.lines})
    bit = {line: 1 << index for index, line in enumerate(lines)}
    masked: list[Masks] = []
    for target, controls in gates:
        literals = [0, 0]
        for control in controls:
            literals[control & 1] |= bit[control >> 1]
        masked.append((0 if target == PHASE else bit[target], literals[0], literals[1]))
    after, gained = work(masked, total)
    return ([to_gate(gate, lines) for gate in after], True) if gained else (gates, False)
