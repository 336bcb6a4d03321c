"""The best of several transformation-based cascades of one permutation: lines in other orders, some inverted.

Synthesis brings rows home in order of their number, so it depends on which line is the highest and on what
counts as 0. Renaming lines and inverting some of them, on both sides, changes that and nothing else; positive
controls on inverted lines become negative ones.
"""

from __future__ import annotations

from collections.abc import Callable
from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from revsynth.cascade.model import Cascade
from revsynth.cascade.price import cascade_t
from revsynth.options import Aim, Effort, Uncompute
from revsynth.synthesis.rows import Directions, GateLists, Side, transform_many

SMALL = 8
"""Up to so many lines all relabellings are one numpy batch; beyond, each is a run of the compiled kernel."""
MAX_LINES = 18
BOTH_WAYS = 16
"""Beyond so many lines only one direction is tried: both take about five times as long."""

_TRIES: dict[Effort, int] = {"low": 1, "normal": 20, "high": 100}
_WORK: dict[Effort, int] = {"low": 1, "normal": 1 << 26, "high": 1 << 30}
"""Tries times 4**lines at most, beyond `SMALL` lines."""

Rank = Callable[[Cascade], tuple[int, ...]]


class Found(NamedTuple):
    """A cascade and the variant that gave it."""

    cascade: Cascade
    variant: str


class _Naming(NamedTuple):
    """Line l becomes line order[l], inverted first where bit l of `flip` is set."""

    order: tuple[int, ...]
    flip: int


def rank_for(aim: Aim, uncompute: Uncompute) -> Rank:
    """The sort key of cascades that do the same: T gates and gates, what the aim asks for first."""

    def rank(cascade: Cascade) -> tuple[int, ...]:
        t = cascade_t(cascade, uncompute)
        return (len(cascade), t) if aim == "gates" else (t, len(cascade))

    return rank


def best_cascades(
    table: NDArray[np.int64], *, positive: bool, aim: Aim, uncompute: Uncompute, effort: Effort, seed: int
) -> list[Found]:
    """The best cascade for the aim, and the one with the fewest gates where that is another.

    table: the image of each state, shape (2**lines,), at most 18 lines. `positive`: no negative controls.
    Deterministic for all arguments; `effort` fixes how many relabellings are tried.
    """
    lines = table.shape[0].bit_length() - 1
    if lines > MAX_LINES:
        raise ValueError(f"{lines} lines are too many: at most {MAX_LINES}")
    rank = rank_for(aim, uncompute)
    found = _small(table, lines, positive, effort, seed, uncompute) if lines <= SMALL else _large(
        table, lines, positive, effort, seed
    )  # fmt: skip
    best = min(found, key=lambda one: rank(one.cascade))
    shortest = min(found, key=lambda one: (len(one.cascade), cascade_t(one.cascade, uncompute)))
    return [best] if shortest.cascade == best.cascade else [best, shortest]


def _namings(lines: int, count: int, positive: bool, seed: int) -> list[_Naming]:
    """The lines as they are, then in reverse, then at random, some inverted where that is allowed."""
    natural = tuple(range(lines))
    found = [_Naming(natural, 0), _Naming(natural[::-1], 0)][:count]
    random = np.random.default_rng(seed)
    while len(found) < count:
        order = tuple(int(line) for line in random.permutation(lines))
        flip = int(random.integers(0, 1 << lines))
        found.append(_Naming(order, 0 if positive else flip))
    return list(dict.fromkeys(found))


def _renamed(table: NDArray[np.int64], naming: _Naming) -> NDArray[np.int64]:
    state = np.arange(len(table), dtype=np.int64)
    to = np.zeros_like(state)
    for line, place in enumerate(naming.order):
        to |= (((state ^ naming.flip) >> line) & 1) << place
    renamed = np.empty_like(table)
    renamed[to] = to[table]
    return renamed


def _named_back(lists: GateLists, index: int, naming: _Naming) -> Cascade:
    part = slice(int(lists.offset[index]), int(lists.offset[index + 1]))
    line_of = np.argsort(np.array(naming.order, dtype=np.int64)).astype(np.int32)
    care = np.zeros(part.stop - part.start, dtype=np.uint64)
    for line, place in enumerate(naming.order):
        care |= ((lists.care[part] >> np.uint64(place)) & np.uint64(1)) << np.uint64(line)
    target = line_of[lists.target[part]] if len(line_of) else lists.target[part]
    return Cascade.from_masks(lists.lines, target, care, care & ~np.uint64(naming.flip))


def _small(
    table: NDArray[np.int64], lines: int, positive: bool, effort: Effort, seed: int, uncompute: Uncompute
) -> list[Found]:
    """All relabellings as one batch; of each way only the cheapest and the shortest are kept."""
    namings = _namings(lines, _TRIES[effort], positive, seed)
    tables = np.stack([_renamed(table, naming) for naming in namings])
    ways: tuple[tuple[Directions, Side], ...] = (("both", "distance"), ("both", "price"), ("one", "distance"))
    found: list[Found] = []
    for directions, side in ways[: 1 if effort == "low" else 3]:
        lists = transform_many(tables, directions=directions, side=side)
        size, price = lists.sizes(), lists.prices(uncompute)
        for index in dict.fromkeys((int(np.lexsort((size, price))[0]), int(np.lexsort((price, size))[0]))):
            found.append(Found(_named_back(lists, index, namings[index]), _said(directions)))
    return found


def _large(table: NDArray[np.int64], lines: int, positive: bool, effort: Effort, seed: int) -> list[Found]:
    """One run of the compiled kernel a relabelling."""
    from revsynth.synthesis.kernels import transform_one

    directions: Directions = "both" if lines <= BOTH_WAYS else "one"
    tries = max(1, min(_TRIES[effort], _WORK[effort] >> (2 * lines)))
    found = []
    for naming in _namings(lines, tries, positive, seed):
        lists = transform_one(_renamed(table, naming), directions=directions)
        found.append(Found(_named_back(lists, 0, naming), _said(directions)))
    return found


def _said(directions: Directions) -> str:
    return "both ways" if directions == "both" else "one way"
