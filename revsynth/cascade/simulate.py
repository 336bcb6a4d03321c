"""Bit-parallel simulation of cascades: what synthesis and reduction use to look at themselves.

Verification does not use this module; it has a simulator of its own that works on files.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from revsynth.cascade.model import PHASE, Cascade, Gate
from revsynth.logic.truth_table import Column, Columns, unpack, unpack_values, variable, words_for

BLOCK = 8_192
"""Words of each row that go through all gates before the next ones do, so that they stay in the cache."""


def run(cascade: Cascade, columns: Columns) -> tuple[Columns, Column]:
    """Send packed states through the cascade.

    columns: shape (lines, words), row l the values of line l over many inputs; it is not changed.
    Returns the rows afterwards and the column of phases (1 where the sign is -1). Bits that are set in a
    partly used last word are the caller's to mask.
    """
    if columns.shape[0] != cascade.lines:
        raise ValueError(f"{columns.shape[0]} rows given for {cascade.lines} lines")
    words = columns.shape[1]
    after = columns.copy()
    phase = np.zeros(words, dtype=np.uint64)
    gates = list(cascade)
    for start in range(0, words, BLOCK):
        end = min(start + BLOCK, words)
        _run_block(gates, [row[start:end] for row in after], phase[start:end])
    return after, phase


def _run_block(gates: list[Gate], rows: list[Column], phase: Column) -> None:
    """All gates on one block of words, in place."""
    product, turned = np.empty_like(phase), np.empty_like(phase)
    for target, controls in gates:
        flipped = phase if target == PHASE else rows[target]
        if not controls:
            np.invert(flipped, out=flipped)
            continue
        holds = rows[controls[0] >> 1]
        if controls[0] & 1:
            holds = np.invert(holds, out=product)
        for control in controls[1:]:
            row = rows[control >> 1]
            if control & 1:
                row = np.invert(row, out=turned)
            holds = np.bitwise_and(holds, row, out=product)
        np.bitwise_xor(flipped, holds, out=flipped)


def permutation(cascade: Cascade) -> NDArray[np.int64]:
    """The image of every basis state 0 ... 2**lines - 1, line 0 the least significant bit (to 24 lines)."""
    after, _ = run(cascade, _all_states(cascade.lines))
    return unpack_values(after, cascade.lines)


def signs(cascade: Cascade) -> NDArray[np.uint8]:
    """1 where the phase of a basis state turns to -1, by the state it started in (to 24 lines)."""
    _, phase = run(cascade, _all_states(cascade.lines))
    return unpack(phase, cascade.lines)


def _all_states(lines: int) -> Columns:
    """The rows of a table of all states, in their order."""
    if lines > 24:
        raise ValueError(f"a table of 2**{lines} states is too large: at most 24 lines")
    rows = np.empty((lines, words_for(lines)), dtype=np.uint64)
    for line in range(lines):
        rows[line] = variable(lines, line)
    return rows
