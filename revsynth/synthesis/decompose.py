"""The method `decompose`: two single-target gates a line, each an exclusive sum of products.

Sources: De Vos, Van Rentergem (see `young`) for the decomposition; exclusive sums for single-target gates:
common practice. Free images stay free to the end: where no state matters, a sum may take either value.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace

import numpy as np
from numpy.typing import NDArray

from revsynth.cascade.model import Cascade, Gate
from revsynth.cascade.price import cascade_t
from revsynth.embed.in_place import Lines, embed, fewest_lines, placements
from revsynth.embed.multiplicity import bounded_multiplicity
from revsynth.embed.target import ReversibleTarget
from revsynth.logic.annealing import anneal
from revsynth.logic.cubes import Cube, ExclusiveSum
from revsynth.logic.exclusive_sum import minimise, starting_sums
from revsynth.logic.function import Function
from revsynth.logic.sum_costs import SumCosts
from revsynth.logic.truth_table import pack
from revsynth.options import Effort
from revsynth.synthesis.exchanges import exchanged
from revsynth.synthesis.interface import Block, Placement, Progress, Task, silent
from revsynth.synthesis.product_gates import conjugated, prices_for
from revsynth.synthesis.young.search import Partial, Turn, Width, decompositions, partial_images

NAME = "decompose"

MAX_LINES = 12
"""Above, the single sums are too long to pay: other methods are shorter there."""

_WIDTHS: dict[Effort, tuple[tuple[int, Width], ...]] = {
    "low": (
        (8, Width(beam=1, children=1, every=3, starts=2)),
        (12, Width(beam=0, children=1, every=2, starts=1)),
    ),
    "normal": (
        (4, Width(beam=60, children=4, every=7, starts=4)),
        (5, Width(beam=24, children=4, every=6, starts=4)),
        (6, Width(beam=6, children=2, every=5, starts=2)),
        (7, Width(beam=2, children=1, every=4, starts=2)),
        (9, Width(beam=1, children=1, every=4, starts=3)),
        (12, Width(beam=0, children=1, every=2, starts=1)),
    ),
    "high": (
        (5, Width(beam=400, children=8, every=9, starts=8)),
        (6, Width(beam=60, children=4, every=6, starts=4)),
        (7, Width(beam=16, children=4, every=5, starts=2)),
        (8, Width(beam=6, children=2, every=4, starts=2)),
        (12, Width(beam=2, children=1, every=3, starts=2)),
    ),
}
"""How wide to search, for up to so many lines."""
_FINISHED: dict[Effort, int] = {"low": 1, "normal": 4, "high": 12}
"""Decompositions whose sums are made; fewer on more lines than `EXACT_LINES`."""
EXACT_LINES = 6
"""Up to so many lines sums are over at most five inputs, where the cheapest is known exactly."""
MOVES_A_CUBE = 3_000
_MOVES: dict[Effort, int] = {"low": 10_000, "normal": 30_000, "high": 400_000}
"""Exchanges for each longer sum, at most."""
HEAT = 0.15


class Decompose:
    """The Young-subgroup decomposition (see the module)."""

    name = NAME

    def unfit(self, task: Task) -> str | None:
        """A reason where the function is not reversible as asked, or has too many lines."""
        if task.oracle not in ("inplace", "embedded"):
            return f"it rearranges the states of the inputs' own lines, which oracle '{task.oracle}' keeps"
        inputs, outputs = task.function.inputs, task.function.outputs
        if task.oracle == "inplace" and inputs != outputs:
            return f"{inputs} input bits but {outputs} output bits: not reversible in place"
        if max(inputs, outputs) > MAX_LINES:
            return f"{max(inputs, outputs)} lines are too many: at most {MAX_LINES}"
        lines = inputs if task.oracle == "inplace" else fewest_lines(task.function)
        if lines > MAX_LINES:
            return f"in place it needs {lines} lines, at most {MAX_LINES} are possible"
        if task.lines is not None and lines > task.lines:
            return f"it needs {lines} lines, {task.lines} allowed"
        if task.oracle == "inplace" and bounded_multiplicity(task.function)[0] > 1:
            return "not reversible: some inputs must have the same image"
        return None

    def synthesise(self, task: Task, progress: Progress = silent) -> list[Block]:
        """Alternatives, best for the aim first. Raises ValueError where `unfit` has a reason."""
        reason = self.unfit(task)
        if reason is not None:
            raise ValueError(reason)
        if task.oracle == "inplace":
            places = tuple(range(task.function.inputs))
            target = embed(task.function, task.function.inputs, places, places)
            blocks = [
                Block(cascade, said, target.lines) for cascade, said in _cascades(task, target, progress)
            ]
            if target.is_complete and task.effort != "high":
                return blocks
            return exchanged(task, blocks, progress)
        before, after = next(placements(task.function, fewest_lines(task.function), 1, task.seed))
        return _embedded(task, before, after, progress)


DECOMPOSE = Decompose()


def _embedded(task: Task, before: Lines, after: Lines, progress: Progress) -> list[Block]:
    target = embed(task.function, fewest_lines(task.function), before, after)
    preset = tuple((line, 0) for line in range(target.lines) if line not in before)
    placement = Placement(before, preset, after)
    quick = task if task.effort == "high" else replace(task, effort="low")
    blocks = [
        Block(cascade, said, target.lines, placement=placement)
        for cascade, said in _cascades(quick, target, progress)
    ]
    return exchanged(task, blocks, progress)


def _cascades(task: Task, target: ReversibleTarget, progress: Progress) -> list[tuple[Cascade, str]]:
    """The cheapest cascades for the aim, and for the other count where that is another."""
    images = partial_images(target)
    by_t = task.aim != "gates"
    found: list[tuple[Cascade, str]] = []
    for least_t in (by_t, not by_t) if task.effort == "high" or target.lines <= EXACT_LINES else (by_t,):
        said = f"{NAME}, {'fewest T' if least_t else 'fewest cubes'}"
        cascade = cheapest(task, images, target.lines, least_t, progress)
        if all(cascade != other for other, _ in found):
            found.append((cascade, said))
    found.sort(key=lambda one: _rank(one[0], task))
    return found


def _rank(cascade: Cascade, task: Task) -> tuple[int, int]:
    t = cascade_t(cascade, task.uncompute)
    return (t, len(cascade)) if task.aim != "gates" else (len(cascade), t)


def cheapest(task: Task, images: NDArray[np.int64], lines: int, least_t: bool, progress: Progress) -> Cascade:
    """The cheapest cascade met that takes each state with an image there. images: shape (2**lines,)."""
    if lines == 0:
        return Cascade.from_gates(0, ())
    prices = prices_for(lines - 1, task.uncompute, least_t=least_t)
    width = next(width for most, width in _WIDTHS[task.effort] if lines <= most)
    leaves = 8 if lines <= 8 else 2
    found = decompositions(
        images, lines, SumCosts(lines - 1, prices, leaves=leaves), width, task.seed, progress
    )
    most = _FINISHED[task.effort] if lines <= EXACT_LINES else (_FINISHED[task.effort] + 1) // 2
    return _finished(found[:most], lines, prices, task, progress)


def _finished(
    found: list[Partial], lines: int, prices: Sequence[int], task: Task, progress: Progress
) -> Cascade:
    """The sums of each decomposition, then those of the best shortened for longer."""
    made: list[tuple[int, list[ExclusiveSum], Partial]] = []
    for number, one in enumerate(found, start=1):
        progress(f"{NAME}: sums of decomposition {number} of {len(found)}")
        sums = [_sum(turn, lines, prices, task) for turn in one.turns()]
        made.append((sum(cubes.price(prices) for cubes in sums), sums, one))
    _, sums, one = min(made, key=lambda entry: entry[0])
    if lines > EXACT_LINES and task.effort != "low":
        progress(f"{NAME}: shortening the sums of the best decomposition")
        sums = [_shorter(cubes, turn, prices, task) for turn, cubes in zip(one.turns(), sums, strict=True)]
    gates: list[Gate] = []
    for turn, cubes in zip(one.turns(), sums, strict=True):
        gates.extend(_gates(turn.line, cubes, task))
    return Cascade.from_gates(lines, gates)


def _sum(turn: Turn, lines: int, prices: Sequence[int], task: Task) -> ExclusiveSum:
    """A cheap sum for one gate."""
    values, care = pack(turn.turned == 1)[None], pack(turn.turned != 2)
    if lines <= EXACT_LINES or np.any(turn.turned == 2):
        return minimise(
            Function(lines - 1, 1, values, care[None], care), prices, effort=task.effort, seed=task.seed
        )
    start = starting_sums(values, lines - 1, prices, effort="low", seed=task.seed)[0]
    moves = min(_MOVES[task.effort], MOVES_A_CUBE * len(start))
    return anneal(start, prices, moves=moves, heat=HEAT, seed=task.seed)


def _shorter(cubes: ExclusiveSum, turn: Turn, prices: Sequence[int], task: Task) -> ExclusiveSum:
    """The sum after twice as much work again, if it is cheaper."""
    if np.any(turn.turned == 2):
        return cubes
    moves = 2 * min(_MOVES[task.effort], MOVES_A_CUBE * len(cubes))
    again = anneal(cubes, prices, moves=moves, heat=HEAT, seed=task.seed + 1)
    return min(cubes, again, key=lambda found: found.price(prices))


def _gates(line: int, cubes: ExclusiveSum, task: Task) -> list[Gate]:
    """One gate a cube, on all lines: cube input i is line i below `line` and line i + 1 from there on."""
    low = (1 << line) - 1
    moved = [
        Cube((care & low) | ((care & ~low) << 1), (value & low) | ((value & ~low) << 1))
        for care, value, _ in cubes
    ]
    return list(conjugated([(line, cube) for cube in sorted(moved)], task.controls))
