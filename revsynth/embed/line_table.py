"""What the states of all lines must become, in packed columns that gates are applied to.

A table has a row for every output that is still to be brought to a line of its own. The value of a row at
state s (line 0 least significant) is the output bit that belongs to whatever sits in s now. A gate moves
what sits in the states, and the columns with it; the gates themselves act before all that follows.
"""

from __future__ import annotations

from collections.abc import Iterable

import numpy as np

from revsynth.logic.structure import doubled, halves
from revsynth.logic.truth_table import Column, Columns, count_ones, last_word_mask, ones, variable


class LineTable:
    """Outputs as functions of the states of `lines` lines, partly free.

    values, fixed: uint64, shape (rows, words_for(lines)); values is 0 where fixed is 0. Rows are named by
    `outputs`, one number a row.
    """

    def __init__(self, lines: int, outputs: tuple[int, ...], values: Columns, fixed: Columns) -> None:
        self.lines = lines
        self.outputs = list(outputs)
        self.values = [row.copy() for row in values]
        self.fixed = [row.copy() for row in fixed]
        self._profiles: list[list[tuple[int, int] | None]] = [[None] * lines for _ in self.outputs]

    def apply(self, line: int, condition: Column, looked_at: Iterable[int]) -> None:
        """The gate that turns `line` where `condition` holds, which depends on the lines `looked_at` alone.

        Pairs of states that differ in any other line stay pairs (`line` is never looked at).
        """
        looked_at = tuple(looked_at)
        for row in range(len(self.outputs)):
            for columns in (self.values, self.fixed):
                change = columns[row] ^ turned(columns[row], self.lines, line)
                change &= condition
                if change.any():
                    columns[row] ^= change
                    for other in looked_at:
                        self._profiles[row][other] = None

    def add(self, line: int, other: int) -> None:
        """The gate that turns `line` where `other` is 1."""
        self.apply(line, variable(self.lines, other), (other,))

    def drop(self, row: int) -> int:
        """Forget a row, which has its line now; the number of its output."""
        del self.values[row], self.fixed[row], self._profiles[row]
        return self.outputs.pop(row)

    def clashes(self, row: int) -> list[int]:
        """For each line: in how many pairs of states that differ there alone the row is the same twice.

        Without any, the row is the line itself, turned by a function of the others.
        """
        return [self._pairs(row, line)[0] for line in range(self.lines)]

    def changes(self, row: int) -> list[int]:
        """For each line: in how many such pairs the row differs. Without any, the row does not need it."""
        return [self._pairs(row, line)[1] for line in range(self.lines)]

    def _pairs(self, row: int, line: int) -> tuple[int, int]:
        found = self._profiles[row][line]
        if found is None:
            low, high = halves(self.values[row], self.lines, line)
            both = np.bitwise_and(*halves(self.fixed[row], self.lines, line))
            differ = count_ones((low ^ high) & both)
            found = (count_ones(both) - differ, differ)
            self._profiles[row][line] = found
        return found

    def turning(self, row: int, line: int) -> tuple[Column, Column]:
        """(values, fixed) of the condition that makes `line` the row when it turns it.

        The same at both values of the line. Raises ValueError where there is none.
        """
        if self.clashes(row)[line]:
            raise ValueError(f"output {self.outputs[row]} is no line {line} turned by the others")
        low, high = halves(self.values[row], self.lines, line)
        low_fixed, high_fixed = halves(self.fixed[row], self.lines, line)
        wanted = low | (high_fixed & ~high)
        return doubled(wanted, line), doubled(low_fixed | high_fixed, line)


def turned(column: Column, lines: int, line: int) -> Column:
    """The column s -> column(s with `line` turned)."""
    if line >= 6:
        return column.reshape(-1, 2, 1 << (line - 6))[:, ::-1].ravel()
    high = variable(lines, line)
    step = np.uint64(1 << line)
    return ((column & high) >> step) | ((column & ~high & last_word_mask(lines)) << step)


def beside(values: Columns, fixed: Columns, inputs: int, held: Columns) -> tuple[Columns, Columns]:
    """(values, fixed) over more lines, which hold the functions `held`: free where they hold something else.

    values, fixed: shape (rows, words); held: shape (more, words), row 0 on line `inputs`.
    """
    for extra, column in enumerate(held):
        lines = inputs + extra
        here = spread_up(column, inputs, lines)
        apart = [~here & ones(lines), here]
        values, fixed = (
            np.array([_joined(row & apart[0], row & apart[1], lines) for row in rows], dtype=np.uint64)
            for rows in (values, fixed)
        )
    return values, fixed


def spread_up(column: Column, inputs: int, lines: int) -> Column:
    """The column over `lines` lines that looks at the lowest `inputs` of them alone."""
    for line in range(inputs, lines):
        column = _joined(column, column, line)
    return column


def _joined(low: Column, high: Column, lines: int) -> Column:
    """The column over one line more, `low` where that is 0 and `high` where it is 1."""
    if lines >= 6:
        return np.concatenate([low, high])
    return low | (high << np.uint64(1 << lines))
