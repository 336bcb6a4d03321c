"""From the forward run of a plan to a block in its oracle form."""

from __future__ import annotations

import numpy as np

from revsynth.cascade.model import PHASE
from revsynth.options import Oracle
from revsynth.synthesis.interface import Block
from revsynth.synthesis.scratch.sheet import GateRow, Sheet, cascade_of
from revsynth.synthesis.scratch.units import Units


def block_of(
    sheet: Sheet, units: Units, oracle: Oracle, method: str, positive: bool, mirrored: bool = True
) -> Block:
    """The run, its mirror (if mirrored), and the complements of outputs; kept lines move before work lines.

    Lines that no gate touches stay where they belong to inputs or outputs.
    """
    last: list[GateRow] = []
    for output, complement in enumerate(units.constants):
        if complement:
            last.append((PHASE if oracle == "phase" else units.inputs + output, -1, -1))
    rows = np.concatenate([sheet.gates(mirrored), np.array(last, dtype=np.int64).reshape(-1, 3)])
    front = sheet.inputs + sheet.outputs
    kept = sheet.kept
    others = sorted(set(range(front, sheet.lines)) - set(kept))
    place = np.empty(sheet.lines, dtype=np.int64)
    place[[*range(front), *kept, *others]] = np.arange(sheet.lines)
    cascade = cascade_of(rows, sheet.lines, place, positive)
    return Block(cascade, method, sheet.inputs, sheet.outputs, len(kept), len(others))


def cnots(block: Block) -> int:
    """Gates of one control on a line, those of two controls not counted."""
    cascade = block.cascade
    return int(np.count_nonzero((np.diff(cascade.offset) == 1) & (cascade.target != PHASE)))
