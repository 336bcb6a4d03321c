"""Columns over many lines as columns over the few lines that they need."""

from __future__ import annotations

from revsynth.logic.structure import doubled, halves
from revsynth.logic.truth_table import Column, pack, unpack


def on_fewest_lines(values: Column, fixed: Column, lines: int) -> tuple[tuple[int, ...], Column, Column]:
    """(the lines needed, ascending, and values and fixed over these alone).

    A line is left out, the highest first, where no two fixed values differ across it; what is fixed at either
    of its values then counts for both.
    """
    kept = []
    for line in reversed(range(lines)):
        low, high = halves(values, lines, line)
        low_fixed, high_fixed = halves(fixed, lines, line)
        if ((low ^ high) & low_fixed & high_fixed).any():
            kept.append(line)
        else:
            values, fixed = doubled(low | high, line), doubled(low_fixed | high_fixed, line)
    kept.reverse()
    return tuple(kept), _folded(values, lines, kept), _folded(fixed, lines, kept)


def _folded(column: Column, lines: int, kept: list[int]) -> Column:
    """Taken at 0 of all lines but the kept ones."""
    bits = unpack(column, lines)
    for line in reversed(range(lines)):
        if line not in kept:
            bits = bits.reshape(-1, 2, 1 << line)[:, 0].ravel()
    return pack(bits)


def over_all_lines(column: Column, kept: tuple[int, ...], lines: int) -> Column:
    """The column over all `lines` lines of a column over the kept ones, which are ascending."""
    bits = unpack(column, len(kept))
    for line in range(lines):
        if line not in kept:
            bits = bits.reshape(-1, 1, 1 << line).repeat(2, axis=1).ravel()
    return pack(bits)
