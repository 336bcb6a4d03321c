"""A permutation in place by way of fresh lines: its images are computed beside, then the inputs erased.

|x, 0> goes to |x, p(x)>, and since the inverse of p gives x from p(x), the x can be taken back: |0, p(x)>.
Two CNOTs a line bring the images where the inputs were. As many more lines as the permutation has, but only
few ANDs where the tables of p and its inverse have networks with few. Source: Bennett, "Logical
reversibility of computation", IBM Journal of Research and Development 17, 1973.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace

import numpy as np
from numpy.typing import NDArray

from revsynth.cascade.model import Cascade, Gate
from revsynth.embed.in_place import embed
from revsynth.embed.target import complete
from revsynth.errors import UsageError
from revsynth.logic.function import Function
from revsynth.logic.truth_table import last_word_mask, pack_values, words_for
from revsynth.synthesis.interface import Block, Progress, Task

MAX_LINES = 8
"""Networks of larger random tables have thousands of ANDs."""

Beside = Callable[[Task, Progress], list[Block]]
"""Blocks of the form `fresh` for a task, the best for its aim first."""


def there_and_back(task: Task, beside: Beside, progress: Progress) -> list[Block]:
    """Blocks of the form `inplace` on twice the lines and scratch, from the first blocks that `beside` gives.

    Raises UsageError where the function is no permutation and cannot be completed to one, and BudgetError
    where `beside` does.
    """
    lines = task.function.inputs
    places = tuple(range(lines))
    table = complete(embed(task.function, lines, places, places))
    if table is None:
        raise UsageError("not reversible: some inputs must have the same image")
    progress("network: the images beside their inputs")
    there = beside(replace(task, oracle="fresh", tabulated=_function(table), network=None), progress)[0]
    progress("network: the inputs from their images")
    inverse = np.argsort(table, kind="stable").astype(np.int64)
    back = beside(replace(task, oracle="fresh", tabulated=_function(inverse), network=None), progress)[0]
    width = max(there.cascade.lines, back.cascade.lines)
    swapped = (*range(lines, 2 * lines), *range(lines), *range(2 * lines, back.cascade.lines))
    copied = [Gate(line, (2 * (lines + line),)) for line in range(lines)]
    cleared = [Gate(lines + line, (2 * line,)) for line in range(lines)]
    whole = (
        there.cascade.on_lines(width, tuple(range(there.cascade.lines)))
        + back.cascade.inverse().on_lines(width, swapped)
        + Cascade.from_gates(width, [*copied, *cleared])
    )
    return [Block(whole, f"{there.method}, there and back", lines, work=width - lines)]


def without_idle_lines(block: Block) -> Block:
    """The block without the work lines that no gate touches, the others numbered without gaps."""
    first_work = block.cascade.lines - block.work
    touched = {line for gate in block.cascade for line in gate.lines}
    kept = [line for line in range(block.cascade.lines) if line < first_work or line in touched]
    place = {line: index for index, line in enumerate(kept)}
    gates = (
        Gate(place[gate.target], tuple(2 * place[c >> 1] + (c & 1) for c in gate.controls))
        for gate in block.cascade
    )
    return replace(block, cascade=Cascade.from_gates(len(kept), gates), work=len(kept) - first_work)


def _function(table: NDArray[np.int64]) -> Function:
    """The whole table as a function."""
    lines = len(table).bit_length() - 1
    full = np.full((lines, words_for(lines)), last_word_mask(lines), dtype=np.uint64)
    domain = np.full(words_for(lines), last_word_mask(lines), dtype=np.uint64)
    return Function(lines, lines, pack_values(table, lines), full, domain)
