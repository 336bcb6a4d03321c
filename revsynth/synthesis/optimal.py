"""The method `optimal`: circuits that are proved to have the fewest gates, Toffolis or ANDs there can be.

Up to three lines all permutations are tabulated; on four lines, with positive controls, circuits of up to
twice the size of a table of classes are found by meeting in the middle (see `revsynth.optimal`). Predicates
of up to five inputs have the fewest ANDs by their affine class (see `logic.affine_classes`). What is free is
filled in in every way, so the proof holds over all of them.
"""

from __future__ import annotations

from dataclasses import dataclass, replace
from itertools import permutations, product

import numpy as np
from numpy.typing import NDArray

from revsynth.cascade.model import Cascade, Line
from revsynth.embed.in_place import fewest_lines, tables
from revsynth.errors import BudgetError, UndecidedError
from revsynth.logic.affine_classes import circuit
from revsynth.logic.fillings import fewest_ands, unfillable
from revsynth.logic.function import Function
from revsynth.optimal.answers import shortest_with
from revsynth.optimal.packed import pack
from revsynth.optimal.short_circuits import short_circuits
from revsynth.optimal.small_tables import MOST_LINES, First, SmallTable, small_table
from revsynth.options import Uncompute
from revsynth.synthesis.interface import Block, Placement, Progress, Task, silent

NAME = "optimal"
SIZE = 6
"""The table of classes goes to this size: 1.6 million classes, in seconds."""
LARGE_SIZE = 7
"""With high effort, where that is not enough: 21 million classes, in a minute, 70 MB on disk."""
FILLINGS = 24
"""Permutations of four lines may be completed in at most so many ways."""


class Optimal:
    """Proved optima (see the module)."""

    name = NAME

    def unfit(self, task: Task) -> str | None:
        """A reason where no table reaches the function."""
        function = task.function
        if task.oracle == "inplace":
            return _why_not_a_permutation(function)
        if task.oracle == "embedded":
            lines = fewest_lines(function)
            if lines > MOST_LINES:
                return f"it takes {lines} lines; embeddings are tabulated up to {MOST_LINES}"
            return _over_budget(task, lines)
        if task.oracle == "bit" and function.outputs > 1:
            lines = function.inputs + function.outputs
            if lines > 4:
                return f"{lines} lines for inputs and outputs: optima are known up to 4"
            if lines > MOST_LINES and len(_additions(function)) > FILLINGS:
                return f"its free output bits can be filled in in more than {FILLINGS} ways"
            return _over_budget(task, lines)
        return unfillable(function)

    def on_request(self, task: Task) -> str | None:
        """Why a task that the method serves is left to others where the user names none."""
        function = task.function
        if task.oracle not in ("inplace", "embedded") and not (task.oracle == "bit" and function.outputs > 1):
            return "the network method finds the fewest ANDs too"
        lines = function.inputs + (function.outputs if task.oracle == "bit" else 0)
        if lines > MOST_LINES:
            return "a large table is made or read only for --method optimal"
        return None

    def synthesise(self, task: Task, progress: Progress = silent) -> list[Block]:
        """One block for each thing that is proved; raises UndecidedError where the table does not reach.

        Raises BudgetError where `task.lines` are too few, ValueError where `unfit` has a reason.
        """
        reason = self.unfit(task)
        if reason is not None:
            raise ValueError(reason)
        function = task.function
        if task.oracle == "embedded":
            return [_embedded(task, first) for first in _order(task)]
        if task.oracle == "inplace":
            return _in_place(task, progress)
        if task.oracle == "bit" and function.outputs > 1:
            return _added(task, progress)
        return _fewest_ands(task)


OPTIMAL = Optimal()


def _order(task: Task) -> tuple[First, First]:
    return ("gates", "toffolis") if task.aim == "gates" else ("toffolis", "gates")


def _said(first: First) -> str:
    return f"{NAME}, " + ("proved minimal in gates" if first == "gates" else "proved fewest Toffolis")


def _over_budget(task: Task, lines: int) -> str | None:
    if task.lines is not None and lines > task.lines:
        return f"it needs {lines} lines, {task.lines} allowed"
    return None


def _why_not_a_permutation(function: Function) -> str | None:
    if function.inputs != function.outputs:
        return f"{function.inputs} input bits but {function.outputs} output bits: not reversible in place"
    lines = function.inputs
    if lines > 4:
        return f"optima are known up to 4 lines, not {lines}"
    values, care = tables(function)
    if lines <= MOST_LINES:
        return None if _fitting_rows(small_table(lines), _Wanted.of(values, care)).size else _NO_WAY
    ways = _fillings(values, care)
    if not ways:
        return _NO_WAY
    if len(ways) > FILLINGS:
        return f"its free images can be filled in in more than {FILLINGS} ways"
    return None


_NO_WAY = "not reversible: no choice of the free output bits gives every input an image of its own"


@dataclass(frozen=True)
class _Wanted:
    """From which states what must come: int64 arrays of the same length; `care` masks the bits that count."""

    states: NDArray[np.int64]
    values: NDArray[np.int64]
    care: NDArray[np.int64]

    @classmethod
    def of(cls, values: NDArray[np.int64], care: NDArray[np.int64]) -> _Wanted:
        """For all states in order."""
        return cls(np.arange(len(values)), values & care, care)


def _fitting_rows(table: SmallTable, wanted: _Wanted) -> NDArray[np.int64]:
    """The rows of the table whose permutations do what is wanted."""
    fits = np.ones(len(table), dtype=bool)
    for state, value, care in zip(wanted.states, wanted.values, wanted.care, strict=True):
        fits &= (table.images[:, state] & np.uint8(care)) == np.uint8(value)
    return np.flatnonzero(fits)


def _cheapest_row(table: SmallTable, wanted: _Wanted) -> int | None:
    rows = _fitting_rows(table, wanted)
    return int(rows[np.argmin(table.cost[rows])]) if rows.size else None


def _in_place(task: Task, progress: Progress) -> list[Block]:
    lines = task.function.inputs
    values, care = tables(task.function)
    if lines > MOST_LINES:
        return [_four_lines(tuple(_fillings(values, care)), task, progress)]
    found: list[Block] = []
    for first in _order(task):
        table = small_table(lines, task.controls, first)
        row = _cheapest_row(table, _Wanted.of(values, care))
        if row is not None:
            found.append(Block(table.cascade(row), _said(first), lines))
    return found


def _added(task: Task, progress: Progress) -> list[Block]:
    """(x, y) to (x, y XOR f(x)) on no more lines than these."""
    function = task.function
    lines = function.inputs + function.outputs
    ways = _additions(function)
    if lines > MOST_LINES:
        found = [_four_lines(tuple(pack(way) for way in ways), task, progress)]
    else:
        found = []
        for first in _order(task):
            table = small_table(lines, task.controls, first)
            row = min((table.index(way) for way in ways), key=lambda row: (table.cost[row], row))
            found.append(Block(table.cascade(row), _said(first), lines))
    return [replace(one, inputs=function.inputs, outputs=function.outputs) for one in found]


def _additions(function: Function) -> list[list[int]]:
    """The images of (x, y) under (x, y XOR f(x)) for every way to fill in f, which is the same for each y.

    For at most four lines in all. The first input bit is the lowest, outputs are above the inputs.
    """
    values, care = tables(function)
    free = [(x, bit) for x in range(len(care)) for bit in range(function.outputs) if not care[x] >> bit & 1]
    found = []
    for choice in product((0, 1), repeat=len(free)):
        filled = values.tolist()
        for (x, bit), value in zip(free, choice, strict=True):
            filled[x] |= value << bit
        size = 1 << function.inputs
        states = range(size << function.outputs)
        found.append([state ^ (filled[state % size] << function.inputs) for state in states])
    return found


def _fillings(values: NDArray[np.int64], care: NDArray[np.int64]) -> list[int]:
    """The words of all permutations that agree with the values, or `FILLINGS` + 1 of them if more do."""
    allowed = [
        [y for y in range(16) if not (y ^ value) & mask] for value, mask in zip(values, care, strict=True)
    ]
    order = sorted(range(16), key=lambda x: (len(allowed[x]), x))
    found: list[int] = []

    def fill(place: int, used: int, word: int) -> None:
        """Sixteen levels deep at most."""
        if place == 16:
            found.append(word)
            return
        x = order[place]
        for y in allowed[x]:
            if not used >> y & 1 and len(found) <= FILLINGS:
                fill(place + 1, used | 1 << y, word | y << (4 * x))

    fill(0, 0, 0)
    return found


def _four_lines(words: tuple[int, ...], task: Task, progress: Progress) -> Block:
    """The shortest block of any of the words; raises UndecidedError with the bound where it is too long.

    Up to five gates circuits with negative controls are known too, the shortest where these may be used.
    """
    if task.controls == "mixed":
        short = _short(words, task.uncompute)
        if short is not None:
            return Block(short, _said("gates"), 4)
    size = SIZE
    answer = shortest_with(size, words, progress)
    if answer.cascade is None and task.effort == "high":
        size = LARGE_SIZE
        answer = shortest_with(size, words, progress)
    if answer.cascade is None:
        more = "" if size == LARGE_SIZE else f"; --effort high uses one that reaches {2 * LARGE_SIZE}"
        raise UndecidedError(
            f"optimal: needs at least {answer.at_least} gates with positive controls (proved), "
            f"and the table of size {size} reaches {2 * size}{more}"
        )
    said = f"{NAME}, {len(answer.cascade)} gates proved minimal with positive controls"
    return Block(answer.cascade, said, 4)


def _short(words: tuple[int, ...], uncompute: Uncompute) -> Cascade | None:
    """The first of the shortest cascades with controls of both polarities, None for more than five gates."""
    table = short_circuits("mixed", uncompute)
    found = [circuit for circuit in map(table.shortest, words) if circuit is not None]
    if not found:
        return None
    shortest = min(found, key=len)
    return Cascade.from_gates(4, shortest)


def _embedded(task: Task, first: First) -> Block:
    """The cheapest over all completions, constants and lines for the outputs.

    Inputs stay on the first lines: relabelling lines changes no cost.
    """
    function = task.function
    lines = fewest_lines(function)
    table = small_table(lines, task.controls, first)
    values, care = tables(function)
    inputs = np.arange(len(values))
    best: tuple[int, int, tuple[int, ...], tuple[Line, ...]] | None = None
    for preset in product((0, 1), repeat=lines - function.inputs):
        start = sum(bit << (function.inputs + i) for i, bit in enumerate(preset))
        for after in permutations(range(lines), function.outputs):
            wanted = _Wanted(inputs | start, _spread(values & care, after), _spread(care, after))
            row = _cheapest_row(table, wanted)
            if row is not None and (best is None or (int(table.cost[row]), row) < best[:2]):
                best = int(table.cost[row]), row, preset, after
    if best is None:
        raise AssertionError("a function fits on the fewest lines that it needs")
    _, row, preset, after = best
    places = tuple((function.inputs + i, bit) for i, bit in enumerate(preset))
    placement = Placement(tuple(range(function.inputs)), places, after)
    return Block(table.cascade(row), _said(first), lines, placement=placement)


def _spread(words: NDArray[np.int64], places: tuple[Line, ...]) -> NDArray[np.int64]:
    """Bit j of each word on the line places[j]."""
    total = np.zeros_like(words)
    for bit, line in enumerate(places):
        total |= (words >> bit & 1) << line
    return total


def _fewest_ands(task: Task) -> list[Block]:
    """Every AND once, on lines of their own; raises BudgetError where that takes more than `task.lines`."""
    from revsynth.synthesis.scratch.realise import held

    filling = fewest_ands(task.function)
    network = circuit(task.function.inputs, filling.table)
    said = f"{NAME}, proved fewest ANDs ({filling.ands})"
    found = [one.block for one in held(network, task.oracle, task.controls == "positive")]
    fitting = [one for one in found if task.lines is None or one.cascade.lines <= task.lines]
    if not fitting:
        least = min(one.cascade.lines for one in found)
        raise BudgetError(f"{filling.ands} ANDs held at once need {least} lines, {task.lines} allowed")
    return [replace(one, method=said) for one in fitting]
