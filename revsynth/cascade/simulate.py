"""Bit-parallel simulation of cascades: what synthesis and reduction use to look at themselves.

Verification does not use this module; it has a simulator of its own that works on files.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from revsynth.cascade.model import PHASE, Cascade
from revsynth.logic.truth_table import Column, Columns, unpack, unpack_values, variable, zeros


def run(cascade: Cascade, columns: Columns) -> tuple[Columns, Column]:
    """Send packed states through the cascade.

    columns: shape (lines, words), row l the values of line l over many inputs; it is not changed.
    Returns the rows afterwards and the column of phases (1 where the sign is -1). Bits that are set in a
    partly used last word are the caller's to mask.
    """
    if columns.shape[0] != cascade.lines:
        raise ValueError(f"{columns.shape[0]} rows given for {cascade.lines} lines")
    state = [row.copy() for row in columns]
    phase = np.zeros(columns.shape[1], dtype=np.uint64)
    for gate in cascade:
        product: Column | None = None
        for control in gate.controls:
            row = ~state[control >> 1] if control & 1 else state[control >> 1]
            product = row if product is None else product & row
        if product is None:
            product = np.full_like(phase, np.uint64(0xFFFFFFFFFFFFFFFF))
        if gate.target == PHASE:
            phase ^= product
        else:
            state[gate.target] = state[gate.target] ^ product
    return (np.stack(state) if state else columns.copy()), phase


def permutation(cascade: Cascade) -> NDArray[np.int64]:
    """The image of every basis state 0 ... 2**lines - 1, line 0 the least significant bit (to 24 lines)."""
    _check_width(cascade)
    if cascade.lines == 0:
        return np.zeros(1, dtype=np.int64)
    rows = np.stack([variable(cascade.lines, line) for line in range(cascade.lines)])
    after, _ = run(cascade, rows)
    return unpack_values(after, cascade.lines)


def signs(cascade: Cascade) -> NDArray[np.uint8]:
    """1 where the phase of a basis state turns to -1, by the state it started in (to 24 lines)."""
    _check_width(cascade)
    rows = (
        np.stack([variable(cascade.lines, line) for line in range(cascade.lines)])
        if cascade.lines
        else np.zeros((0, 1), dtype=np.uint64)
    )
    _, phase = run(cascade, rows) if cascade.lines else run(cascade, zeros(0).reshape(1, 1)[:0])
    return unpack(phase, cascade.lines)


def _check_width(cascade: Cascade) -> None:
    if cascade.lines > 24:
        raise ValueError(f"a table of 2**{cascade.lines} states is too large: at most 24 lines")
