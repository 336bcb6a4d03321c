"""Letting the output bits of an in-place block end on other lines: a few promising orders, every method.

A permutation whose output bits may land anywhere is as many permutations as there are orders. Up to
`SCORED_LINES` lines a quick decomposition says which orders are worth more work; beyond, outputs go to the
lines that they resemble most.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import replace
from itertools import islice, permutations

import numpy as np
from numpy.typing import NDArray

from revsynth.embed.in_place import Lines, embed
from revsynth.embed.target import ReversibleTarget
from revsynth.logic.function import Function
from revsynth.logic.sum_costs import SumCosts
from revsynth.logic.truth_table import unpack
from revsynth.options import Effort
from revsynth.synthesis.interface import Block, Method, Placement, Progress, Task
from revsynth.synthesis.product_gates import prices_for
from revsynth.synthesis.young.search import Width, decompositions, partial_images

SCORED_LINES = 5
_SCORED: dict[Effort, int] = {"low": 6, "normal": 60, "high": 120}
"""Orders that are scored, at most."""
_TRIED: dict[Effort, int] = {"low": 1, "normal": 3, "high": 8}
"""Orders that the methods work on."""
_QUICK = Width(beam=1, children=1, every=4, starts=2)


def synthesise(method: Method, task: Task, progress: Progress) -> list[Block]:
    """What the method gives, over several orders of the outputs where `task.any_order` allows them.

    Blocks have the placement that says where the outputs are. The natural order is always among them.
    """
    if not task.any_order:
        return method.synthesise(task, progress)
    natural = tuple(range(task.inputs))
    orders = [natural] if task.tabulated is None else promising(task)
    found: list[Block] = []
    for number, order in enumerate(orders, start=1):
        progress(f"{method.name}: order {number} of {len(orders)} for the outputs")
        moved = (
            task
            if order == natural
            else replace(task, tabulated=_moved(task.function, order), network=None, program=None)
        )
        if method.unfit(moved) is None:
            placement = Placement(natural, (), order)
            found += [replace(block, placement=placement) for block in method.synthesise(moved, progress)]
    return found


def promising(task: Task) -> list[Lines]:
    """Orders of the outputs (entry j the line of bit j): the best guesses first, the natural one included."""
    lines = task.inputs
    natural: Lines = tuple(range(lines))
    most = _TRIED[task.effort]
    guesses = list(dict.fromkeys((_alike(task.function), natural)))
    if lines > SCORED_LINES:
        return list(dict.fromkeys((*guesses[:most], natural)))
    wanted = list(dict.fromkeys((*guesses, *islice(_shuffled(lines, task.seed), _SCORED[task.effort]))))
    score = {order: _score(task, order) for order in wanted}
    best = sorted(wanted, key=lambda order: (score[order], order))[:most]
    return list(dict.fromkeys((*best, natural)))


def _shuffled(lines: int, seed: int) -> Iterator[Lines]:
    """All orders where they are few, else random ones."""
    if lines <= 4:
        yield from permutations(range(lines))
        return
    random = np.random.default_rng(seed)
    while True:
        yield tuple(int(line) for line in random.permutation(lines))


def _score(task: Task, order: Lines) -> int:
    """The estimated cost of a quick decomposition."""
    lines = task.inputs
    if not lines:
        return 0
    target: ReversibleTarget = embed(task.function, lines, tuple(range(lines)), order)
    images = partial_images(target)
    costs = SumCosts(lines - 1, prices_for(lines - 1, task.uncompute, least_t=task.aim != "gates"))
    return decompositions(images, lines, costs, _QUICK, task.seed, lambda _: None)[0].cost


def _alike(function: Function) -> Lines:
    """Outputs on the lines that they are, turned by some function of the others, or nearly so; greedily."""
    pairs: list[tuple[int, int, int, int]] = []
    for output in range(function.outputs):
        values = unpack(function.values[output], function.inputs)
        care = unpack(function.care[output], function.inputs)
        for line in range(function.inputs):
            low, high = _halves(values, line)
            both = np.logical_and(*_halves(care, line))
            same = int(np.count_nonzero((low == high) & both))
            ones = _halves(np.arange(len(values)) >> line & 1, line)
            agrees = int(np.count_nonzero(np.stack([low, high]) == np.stack(ones)))
            pairs.append((same, -max(agrees, len(values) - agrees), abs(line - output), line * 64 + output))
    place: dict[int, int] = {}
    for *_, both_of in sorted(pairs):
        line, output = divmod(both_of, 64)
        if output not in place and line not in place.values():
            place[output] = line
    return tuple(place[output] for output in range(function.outputs))


def _halves(table: NDArray[np.integer], line: int) -> tuple[NDArray[np.integer], NDArray[np.integer]]:
    parts = table.reshape(-1, 2, 1 << line)
    return parts[:, 0, :].reshape(-1), parts[:, 1, :].reshape(-1)


def _moved(function: Function, order: Lines) -> Function:
    """The function whose output bit order[j] is output bit j."""
    source = np.argsort(np.array(order, dtype=np.int64))
    return Function(
        function.inputs, function.outputs, function.values[source], function.care[source], function.domain
    )
