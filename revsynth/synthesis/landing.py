"""Products in place: output after output is brought to a line of its own, with the fewest lines.

Some outputs go to lines that start in 0, as the outputs of any exclusive sum do. The others land on lines of
the inputs: where an output is a line turned by a function of the others, that function, as an exclusive sum
of products onto the line, is all that it takes. Where it is not, CNOTs that change the direction of a line
may make it so, else swaps along one line after the other do (see `embed.balancing`). No table of where every
state goes is kept: columns of 2**lines bits, one a remaining output, are enough.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from revsynth.cascade.model import Cascade, Gate, Line
from revsynth.embed.balancing import signed, splitting_order, swapping
from revsynth.embed.directions import MAX_LINES as DIRECTION_LINES
from revsynth.embed.directions import fewest_clashes
from revsynth.embed.half_free import wholly_fixed
from revsynth.embed.in_place import tables
from revsynth.embed.line_table import LineTable, beside
from revsynth.embed.multiplicity import MAX_NUMBERED, most_frequent
from revsynth.embed.shearing import sheared
from revsynth.embed.support import on_fewest_lines, over_all_lines
from revsynth.errors import BudgetError
from revsynth.logic.completion import complete
from revsynth.logic.cubes import Cube, ExclusiveSum
from revsynth.logic.exclusive_sum import minimise
from revsynth.logic.function import Function
from revsynth.logic.truth_table import Column, last_word_mask, ones, pack
from revsynth.options import Effort
from revsynth.synthesis.exchanges import exchanged
from revsynth.synthesis.interface import Block, Placement, Progress, Task
from revsynth.synthesis.product_gates import conjugated, onto_outputs, output_groups, prices_for

MAX_GATES = 1 << 20
"""More gates than this are not made."""
TABLE_LINES = 26
"""Lines that single sums may be over: their columns have 2**lines bits, and longer ones hardly stay short."""
FREE_INPUTS = 13
"""Free values stay free in the search for a sum up to here; then they are settled before."""
ALL_VARIANTS: dict[Effort, int] = {"low": 0, "normal": 6, "high": 12}
"""Up to so many lines all variants are made, above the most promising alone."""


@dataclass(frozen=True)
class Way:
    """What a variant does: `folds` the linear part in first; prices by T or by the number of cubes."""

    folds: bool
    least_t: bool


def in_place_blocks(task: Task, lines: int, progress: Progress) -> list[Block]:
    """Blocks of the form `embedded` on `lines` lines, best guess first.

    `lines` is what `fewest_lines` gives. Raises BudgetError for more than MAX_GATES gates, or where some sum
    would have more than `exclusive_sum.MAX_CUBES` products.
    """
    function = wholly_fixed(task.function, 1 << (lines - task.function.outputs))
    by_t = task.aim != "gates"
    ways = [Way(True, by_t)]
    if lines <= ALL_VARIANTS[task.effort]:
        ways += [Way(False, by_t), Way(True, not by_t), Way(False, not by_t)]
    blocks: list[Block] = []
    for way in ways:
        block = _Landing(task, function, lines, way, progress).run()
        if all(block.cascade != other.cascade for other in blocks):
            blocks.append(block)
    return exchanged(task, blocks, progress)


def why_not_in_place(function: Function) -> str | None:
    """A reason in words for the user where output values are too wide to be counted."""
    if function.outputs > MAX_NUMBERED:
        return f"{function.outputs} output bits are too many in place: at most {MAX_NUMBERED}"
    return None


class _Landing:
    """One cascade in the making: its gates so far and what is still to be done after them."""

    def __init__(self, task: Task, function: Function, lines: int, way: Way, progress: Progress) -> None:
        self._task = task
        self._function = function
        self._lines = lines
        self._way = way
        self._progress = progress
        self._gates: list[Gate] = []
        self._after: dict[int, Line] = {}
        self._directed: set[int] = set()
        everything = tuple(range(function.outputs))
        self._table = LineTable(function.inputs, everything, function.values, function.care)

    def run(self) -> Block:
        """Land every output; the block."""
        inputs = self._function.inputs
        beside_inputs, watched = self._outputs_on_new_lines()
        if self._way.folds:
            self._fold_linear_parts(set(beside_inputs))
        self._fill_new_lines(beside_inputs, watched)
        while self._table.outputs:
            self._progress(f"products, in place: {len(self._table.outputs)} outputs left")
            self._land_next()
        before = tuple(range(inputs))
        preset = tuple((line, 0) for line in range(inputs, self._lines))
        after = tuple(self._after[output] for output in range(self._function.outputs))
        cascade = Cascade.from_gates(self._lines, self._gates)
        return Block(
            cascade, f"products, {self._said()}", self._lines, placement=Placement(before, preset, after)
        )

    def _said(self) -> str:
        prices = "fewest T" if self._way.least_t else "fewest cubes"
        return f"in place, {prices}" + ("" if self._way.folds else ", linear parts left")

    # Which outputs go where

    def _outputs_on_new_lines(self) -> tuple[list[int], int]:
        """The outputs for the lines that start in 0, and how many of them the others must look at.

        Those that are furthest from being a line turned by others go there. The rest must be had in place:
        where one of their values occurs too often for that, the lines of further outputs tell them apart.
        """
        function, table = self._function, self._table
        new = self._lines - function.inputs
        difficulty = [min(table.clashes(row)) if table.lines else 0 for row in range(function.outputs)]
        order = sorted(range(function.outputs), key=lambda output: (-difficulty[output], -output))
        chosen, rest = order[:new], order[new:]
        if not new or not rest:
            return chosen, 0
        values, care = tables(function)
        values = values[care != 0]
        for watched in range(new + 1):
            looked_at = sum(1 << output for output in (*chosen[:watched], *rest))
            if most_frequent(values & looked_at, function.outputs) <= 1 << (function.inputs - len(rest)):
                break
        if function.inputs + watched > TABLE_LINES:
            raise BudgetError(
                f"in place some sums of products would be over {function.inputs + watched} lines, "
                f"and they are looked for over at most {TABLE_LINES}"
            )
        return chosen, watched

    def _fold_linear_parts(self, elsewhere: set[int]) -> None:
        """Where an output is the exclusive sum of several lines and the rest, bring that sum to one of them.

        The other outputs then see it, too: carries of an adder become short sums that way. Outputs with the
        fewest lines to choose from come first.
        """
        table = self._table
        reserved: set[Line] = set()

        def linear(row: int) -> list[Line]:
            changes = table.changes(row)
            return [line for line, found in enumerate(table.clashes(row)) if not found and changes[line]]

        rows = [row for row in range(len(table.outputs)) if table.outputs[row] not in elsewhere]
        for row in sorted(rows, key=lambda row: (len(linear(row)), row)):
            choices = [line for line in linear(row) if line not in reserved]
            if not choices:
                continue
            root = min(choices, key=lambda line: (self._seen_by(line, row), line))
            reserved.add(root)
            for other in linear(row):
                if other != root:
                    self._cnot(root, other)

    def _seen_by(self, line: Line, row: int) -> int:
        """How many other outputs need the line."""
        table = self._table
        return sum(table.changes(other)[line] > 0 for other in range(len(table.outputs)) if other != row)

    # Gates

    def _cnot(self, line: Line, other: Line) -> None:
        self._gates.append(Gate(line, (2 * other,)))
        self._table.add(line, other)

    def _turn(self, line: Line, values: Column, fixed: Column) -> Column:
        """Turn `line` by an exclusive sum for a condition; what the condition is where it was free."""
        lines = self._table.lines
        kept, values, fixed = on_fewest_lines(values, fixed, lines)
        cubes, actual = self._sum(values, fixed, len(kept))
        moved = [(line, _on_lines(cube, kept)) for cube in cubes]
        self._add_gates(list(conjugated(moved, self._task.controls)))
        column = over_all_lines(actual, kept, lines)
        self._table.apply(line, column, kept)
        return column

    def _sum(self, values: Column, fixed: Column, inputs: int) -> tuple[ExclusiveSum, Column]:
        prices = prices_for(inputs, self._task.uncompute, least_t=self._way.least_t)
        part = Function(inputs, 1, values[None], fixed[None], fixed)
        if inputs > FREE_INPUTS:
            values = complete(part, prices)[0]
            part = Function(inputs, 1, values[None], ones(inputs)[None], ones(inputs))
        cubes = minimise(part, prices, effort=self._task.effort, seed=self._task.seed)
        return cubes, values if part.is_complete else cubes.evaluate()[0] & last_word_mask(inputs)

    def _shorten(self, values: Column, fixed: Column) -> tuple[Column, Column]:
        """CNOTs among the open lines that make the sum for a condition shorter; the condition after them.

        Nothing is done where the condition is partly free.
        """
        lines = self._table.lines
        kept, few, sure = on_fewest_lines(values, fixed, lines)
        if np.any(sure != last_word_mask(len(kept))):
            return values, fixed
        prices = prices_for(len(kept), self._task.uncompute, least_t=self._way.least_t)
        taken = set(self._after.values())
        changeable = [place for place, line in enumerate(kept) if line not in taken]
        steps, few = sheared(few, len(kept), changeable, prices)
        for place, other in steps:
            self._cnot(kept[place], kept[other])
        return over_all_lines(few, kept, lines), ones(lines)

    def _add_gates(self, gates: Sequence[Gate]) -> None:
        self._gates += gates
        if len(self._gates) > MAX_GATES:
            raise BudgetError(f"products in place would be more than {MAX_GATES:,} gates")

    def _fill_new_lines(self, outputs: list[int], watched: int) -> None:
        """The sums of some outputs onto the lines that start in 0; the first of them join the table."""
        inputs, table, task = self._function.inputs, self._table, self._task
        if not outputs:
            return
        rows = [table.outputs.index(output) for output in outputs]
        values = np.array([table.values[row] for row in rows])
        fixed = np.array([table.fixed[row] for row in rows])
        prices = prices_for(inputs, task.uncompute, least_t=self._way.least_t)
        part = Function(inputs, len(rows), values, fixed, np.bitwise_or.reduce(fixed, axis=0))
        if watched:
            values = complete(part, prices)
            full = np.broadcast_to(ones(inputs), values.shape).copy()
            part = Function(inputs, len(rows), values, full, ones(inputs))
        first = inputs
        for group in output_groups(part):
            self._progress(f"products, in place: {group.outputs} outputs on lines of their own")
            cubes = minimise(group, prices, effort=task.effort, seed=task.seed)
            self._add_gates(list(onto_outputs(cubes, first, task)))
            first += group.outputs
        for line, output in enumerate(outputs, start=inputs):
            self._after[output] = line
            table.drop(table.outputs.index(output))
        if watched and table.outputs:
            self._table = LineTable(
                inputs + watched,
                tuple(table.outputs),
                *beside(np.array(table.values), np.array(table.fixed), inputs, values[:watched]),
            )

    # Landing

    def _land_next(self) -> None:
        row, line, clashes = self._easiest()
        if clashes and row not in self._directed and self._redirect(row, clashes):
            return
        if clashes:
            self._spread_evenly(row, line)
        values, fixed = self._table.turning(row, line)
        self._after[self._table.drop(row)] = line
        if self._way.folds:
            values, fixed = self._shorten(values, fixed)
        self._turn(line, values, fixed)
        self._directed.clear()

    def _open_lines(self) -> list[Line]:
        taken = set(self._after.values())
        return [line for line in range(self._table.lines) if line not in taken]

    def _easiest(self) -> tuple[int, Line, int]:
        """(row, line, clashes) of what to land next: no clashes, no gates, a line that few others need."""
        table = self._table
        best: tuple[tuple[int, ...], int, Line] | None = None
        for row in range(len(table.outputs)):
            clashes, changes = table.clashes(row), table.changes(row)
            choices = [line for line in self._open_lines() if not clashes[line]]
            for line in self._open_lines():
                others = sum(found > 0 for other, found in enumerate(changes) if other != line)
                key = (clashes[line], others > 0, self._seen_by(line, row), len(choices), row, line)
                if best is None or key < best[0]:
                    best = (key, row, line)
        assert best is not None
        return best[1], best[2], best[0][0]

    def _redirect(self, row: int, clashes: int) -> bool:
        """CNOTs that turn the best direction of the output into that of a line, if it is much better."""
        table = self._table
        self._directed.add(row)
        if table.lines > DIRECTION_LINES:
            return False
        values = signed(table.values[row], table.fixed[row], table.lines)
        found, direction = fewest_clashes(values, table.lines, tuple(sorted(self._after.values())))
        if 2 * found > clashes:
            return False
        members = [line for line in range(table.lines) if direction >> line & 1]
        root = min(members, key=lambda line: (self._seen_by(line, row), line))
        for line in members:
            if line != root:
                self._cnot(line, root)
        return True

    def _spread_evenly(self, row: int, last: Line) -> None:
        """Swaps along other lines until the output differs in every pair of states across `last`."""
        table = self._table
        settled = tuple(sorted(self._after.values()))
        values = signed(table.values[row], table.fixed[row], table.lines)
        order = splitting_order(values, table.lines, last, settled)
        for place, line in enumerate(order):
            self._progress(f"products, in place: evening out, {len(order) - place} lines left")
            values = signed(table.values[row], table.fixed[row], table.lines)
            below = (last, *reversed(order[place + 1 :]))
            condition, matters = swapping(values, table.lines, line, below)
            if condition.any():
                fixed = pack(matters)
                self._turn(line, pack(condition) & fixed, fixed)


def _on_lines(cube: Cube, kept: tuple[int, ...]) -> Cube:
    """The cube over inputs 0, 1, ... as one over the lines kept[0], kept[1], ..."""

    def moved(mask: int) -> int:
        return sum(1 << line for place, line in enumerate(kept) if mask >> place & 1)

    return Cube(moved(cube.care), moved(cube.value))
