"""Making a cascade cheaper by random changes that leave alone what is fixed of a target.

Rules that keep the whole function cannot use free values; here anything goes that still takes every state
that matters where it must go. Worse cascades are allowed with a chance that cools down (S. Kirkpatrick, C.
Gelatt, M. Vecchi, "Optimization by simulated annealing", Science 220, 1983).
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace
from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from revsynth.cascade.model import PHASE, Cascade
from revsynth.cascade.price import cascade_t, gate_t
from revsynth.embed.in_place import embed
from revsynth.embed.target import ReversibleTarget
from revsynth.logic.random_words import Random
from revsynth.logic.truth_table import pack_values
from revsynth.options import Effort
from revsynth.synthesis.interface import Block, Placement, Progress, Task

_SAID = ", gates exchanged"
SPARE = 6
"""Gates that a cascade may grow by on the way."""


def exchange(
    cascade: Cascade,
    target: ReversibleTarget,
    prices: Sequence[int],
    *,
    moves: int,
    heat: float,
    positive: bool = False,
    seed: int = 0,
) -> Cascade:
    """The cheapest cascade met in `moves` tries that the target accepts, as it accepts the one given.

    prices: of a gate with 0 ... lines - 1 controls; heat: the temperature at the start, in prices.
    `positive`: no negative controls are made. Time grows as moves * gates * rows that matter / 64. Raises
    ValueError where the target does not accept the cascade, or a gate is a phase.
    """
    if len(prices) != max(cascade.lines, 1):
        raise ValueError(f"{cascade.lines} prices are needed, not {len(prices)}")
    if np.any(cascade.target == PHASE):
        raise ValueError("a phase gate moves nothing")
    from revsynth.synthesis import exchange_kernels

    start, wanted, fixed = _columns(target)
    count, capacity = len(cascade), len(cascade) + SPARE
    line = np.zeros(capacity, dtype=np.int64)
    care, value = np.zeros(capacity, dtype=np.uint64), np.zeros(capacity, dtype=np.uint64)
    line[:count], care[:count], value[:count] = cascade.masks()
    if not exchange_kernels.meets(line, care, value, count, start, wanted, fixed, np.zeros_like(start)):
        raise ValueError("the target does not accept the cascade to start from")
    best = np.zeros_like(line), np.zeros_like(care), np.zeros_like(value)
    random = Random(seed).words(1) | np.uint64(1)
    weights = np.asarray(prices, dtype=np.int64)
    size = exchange_kernels.walk(
        line, care, value, count, start, wanted, fixed, weights, moves, heat, positive, random, *best
    )
    return Cascade.from_masks(cascade.lines, best[0][:size], best[1][:size], best[2][:size])


def _columns(
    target: ReversibleTarget,
) -> tuple[NDArray[np.uint64], NDArray[np.uint64], NDArray[np.uint64]]:
    """(states that matter, their images, which bits of those are fixed), each shape (lines, words)."""
    rows = np.flatnonzero(target.fixed)
    padded = np.zeros((3, 1 << max(6, len(rows).bit_length())), dtype=np.int64)
    padded[0, : len(rows)] = rows
    padded[1, : len(rows)] = target.image[rows]
    padded[2, : len(rows)] = target.fixed[rows]
    start, wanted, fixed = (pack_values(part, target.lines) for part in padded)
    return start, wanted, fixed


def exchanged(task: Task, blocks: Sequence[Block], progress: Progress) -> list[Block]:
    """The best of `embedded` or `inplace` blocks after exchanges, for the aim and by the other count.

    All blocks are tried for a short while, the best ones for longer; the work is fixed by `task.effort`. At
    low effort, or where a try costs too much for any to be worth it, the best blocks come back as they are.
    """
    ranked = sorted(blocks, key=lambda block: _rank(block.cascade, task))
    plan = _PLANS.get(task.effort)
    if plan is not None and ranked:
        progress("exchanging gates of the blocks in place")
        ranked = _rounds(task, ranked, plan)
    shortest = min(ranked, key=lambda block: _rank(block.cascade, task)[::-1])
    return [ranked[0]] if shortest is ranked[0] else [ranked[0], shortest]


class Round(NamedTuple):
    """How many of the best blocks are tried, with how much work each, from what temperature (in ANDs)."""

    blocks: int
    work: int
    heat: float


_PLANS: dict[Effort, tuple[Round, ...]] = {
    "normal": (Round(10, 1 << 20, 0.0), Round(3, 1 << 22, 0.1), Round(1, 3 << 22, 0.3)),
    "high": (Round(60, 1 << 22, 0.0), Round(16, 1 << 25, 0.1), Round(6, 1 << 27, 0.3)),
}
"""Work is counted in gates (and some more a try) times words of 64 rows: 2**24 take half a second."""
_MORE = 16
MOST_MOVES: dict[Effort, int] = {"normal": 1_000_000, "high": 20_000_000}
"""Tries of one block in one round, at most: short cascades are soon as good as they get."""
FEWEST_MOVES = 2_000
"""Fewer tries than that are not worth it."""


def _rounds(task: Task, ranked: list[Block], plan: tuple[Round, ...]) -> list[Block]:
    for number, (most, work, heat) in enumerate(plan):
        tried = [_one(task, block, work, heat, number) for block in ranked[:most]]
        ranked = sorted([*tried, *ranked[most:]], key=lambda block: _rank(block.cascade, task))
    return ranked


def _one(task: Task, block: Block, work: int, heat: float, number: int) -> Block:
    natural = tuple(range(block.inputs))
    place, cascade = block.placement or Placement(natural, (), natural), block.cascade
    if not len(cascade) or any(value for _, value in place.preset):
        return block
    rows = 1 << task.function.inputs
    moves = min(MOST_MOVES[task.effort], work // ((len(cascade) + _MORE) * max(1, rows >> 6)))
    if moves < FEWEST_MOVES:
        return block
    target = embed(task.function, cascade.lines, place.before, place.after)
    by_t = task.aim != "gates"
    prices = [
        64 * gate_t(size, task.uncompute) + 32 + size
        if by_t
        else 1024 + 4 * gate_t(size, task.uncompute) + size
        for size in range(cascade.lines)
    ]
    found = exchange(
        cascade,
        target,
        prices,
        moves=moves,
        heat=heat * 64 * gate_t(2, task.uncompute) if by_t else heat * 1024,
        positive=task.controls == "positive",
        seed=task.seed + number,
    )
    if _rank(found, task) >= _rank(cascade, task):
        return block
    method = block.method if block.method.endswith(_SAID) else block.method + _SAID
    return replace(block, cascade=found, method=method)


def _rank(cascade: Cascade, task: Task) -> tuple[int, int]:
    t = cascade_t(cascade, task.uncompute)
    return (len(cascade), t) if task.aim == "gates" else (t, len(cascade))
