"""Search over the order of the lines and over colourings: plans of single-target gates that come out cheap.

Lines are split off one after the other (see `colouring`). Each part of each split may be coloured either way,
which changes the two gates of the line and everything after; costs are estimated for many colourings at once
(`logic.sum_costs`). A beam of partial decompositions is kept, best estimate first.
"""

from __future__ import annotations

from collections.abc import Callable, Iterable
from dataclasses import dataclass
from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from revsynth.embed.target import ReversibleTarget, complete
from revsynth.logic.four_inputs import INPUTS as LEAF_INPUTS
from revsynth.logic.sum_costs import SumCosts, Words, to_words
from revsynth.synthesis.young.colouring import Colouring, Images, Turned, colouring, split

MOST_STEPS = 40
"""Steps of one descent over colourings, at most."""
WORK = 1 << 21
"""Parts of functions that one descent estimates, at most: 3**(inputs - 4) a function."""


class Turn(NamedTuple):
    """A single-target gate: `line` is turned where `turned` is 1 (2: free), by the state of the other lines.

    turned: uint8 (2**(lines - 1),), the other lines in their order, the lowest lowest.
    """

    line: int
    turned: Turned


@dataclass(frozen=True)
class Partial:
    """A decomposition under way.

    images: what is left between the gates; rest: the lines still to split off; cost: the estimate so far.
    """

    images: Images
    rest: tuple[int, ...]
    cost: int
    before: tuple[Turn, ...] = ()
    behind: tuple[Turn, ...] = ()

    def turns(self) -> list[Turn]:
        """The gates so far in the order in which they act, first first."""
        return [*self.before, *reversed(self.behind)]


@dataclass(frozen=True)
class Width:
    """How wide to search.

    beam: partial decompositions kept (0: two orders of the lines alone); children: colourings kept of each
    split; every: up to so many parts all colourings are tried; starts: descents beyond that.
    """

    beam: int
    children: int
    every: int
    starts: int


def partial_images(target: ReversibleTarget) -> NDArray[np.int64]:
    """The image of every state that must have one, -1 elsewhere; half-fixed images are completed."""
    full = (1 << target.lines) - 1
    fixed = target.fixed != 0
    if np.all(target.fixed[fixed] == full):
        return np.where(fixed, target.image, -1)
    table = complete(target)
    if table is None:
        raise ValueError("no choice of the free output bits gives every state an image of its own")
    return np.where(fixed, table, -1)


def decompositions(
    images: Images, lines: int, costs: SumCosts, width: Width, seed: int, progress: Callable[[str], None]
) -> list[Partial]:
    """Whole decompositions of a permutation with free images, cheapest estimate first.

    images: shape (2**lines,). costs: for lines - 1 inputs. Also those of the natural and the reversed order
    of the lines, which regular functions mostly want.
    """
    random = np.random.default_rng(seed)
    start = Partial(images, tuple(range(lines)), 0)

    def next_ones(partials: list[Partial], lines: Iterable[int] | None, most: int) -> list[Partial]:
        children = []
        for one in partials:
            for line in one.rest if lines is None else lines:
                children += _children(one, line, costs, width, random)
        return _best(children, most)

    beam = [start] if width.beam else []
    for level in range(lines if width.beam else 0):
        progress(f"decompose: {level} of {lines} lines split off, {len(beam)} ways kept")
        beam = next_ones(beam, None, width.beam)
    for order in (range(lines), reversed(range(lines))):
        chain = [start]
        for line in order:
            chain = next_ones(chain, (line,), max(1, width.beam // 4))
        beam += chain
    return _best(beam, len(beam))


def _best(found: list[Partial], most: int) -> list[Partial]:
    """The cheapest, of those that leave the same to do only one."""
    chosen: list[Partial] = []
    seen: set[tuple[tuple[int, ...], bytes]] = set()
    for index in np.argsort([one.cost for one in found], kind="stable").tolist():
        one = found[index]
        key = (one.rest, one.images.tobytes())
        if one.rest and key in seen:
            continue
        seen.add(key)
        chosen.append(one)
        if len(chosen) == most:
            break
    return chosen


def _children(
    parent: Partial, line: int, costs: SumCosts, width: Width, random: np.random.Generator
) -> list[Partial]:
    """The cheapest ways to split off `line`."""
    rest = tuple(other for other in parent.rest if other != line)
    base = colouring(parent.images, line)
    if not rest:
        # Nothing but this line is turned any more, so one gate does it.
        rows = parent.images >= 0
        colour = np.where(rows, (parent.images >> line) & 1, 0).astype(np.uint8)
        between, before, _ = split(parent.images, line, colour)
        turn = Turn(line, _by_pair(before, line))
        cost = parent.cost + int(costs(to_words(turn.turned == 1)))
        return [Partial(between, rest, cost, (*parent.before, turn), parent.behind)]
    children = []
    for cost, flips in _cheap_flips(parent.images, line, base, costs, width, random):
        colour = base.colour ^ np.append(flips, False)[base.part]
        between, before, behind = split(parent.images, line, colour)
        children.append(
            Partial(
                between,
                rest,
                parent.cost + cost,
                (*parent.before, Turn(line, _by_pair(before, line))),
                (*parent.behind, Turn(line, _by_pair(behind, line))),
            )
        )
    return children


def _by_pair(table: NDArray[np.generic], line: int) -> NDArray:  # type: ignore[type-arg]
    """The entries of states with 0 on `line`."""
    return table.reshape(-1, 2, 1 << line)[:, 0, :].reshape(-1)


class _Gates(NamedTuple):
    """Both gates of a split as words: with no part flipped, and what flipping each part changes."""

    before: Words
    behind: Words
    before_parts: Words
    behind_parts: Words

    def cost(self, flips: NDArray[np.bool_], costs: SumCosts) -> NDArray[np.int32]:
        """What the gates cost for each row of `flips`, shape (rows, parts)."""
        return costs(self._turned(self.before, self.before_parts, flips)) + costs(
            self._turned(self.behind, self.behind_parts, flips)
        )

    def flipped(
        self, flips: NDArray[np.bool_], parts: NDArray[np.int64], costs: SumCosts
    ) -> NDArray[np.int32]:
        """What they cost with `flips`, shape (all parts,), and each of `parts` alone flipped besides."""
        before = self._turned(self.before, self.before_parts, flips[None]) ^ self.before_parts[parts]
        behind = self._turned(self.behind, self.behind_parts, flips[None]) ^ self.behind_parts[parts]
        return costs(before) + costs(behind)

    @staticmethod
    def _turned(base: Words, parts: Words, flips: NDArray[np.bool_]) -> Words:
        """The words with the parts of each row of `flips` changed, shape (rows, words)."""
        rows = [np.bitwise_xor.reduce(parts[row], axis=0, initial=0) ^ base for row in flips]
        return np.array(rows, dtype=np.uint16).reshape(len(flips), len(base))


def _gates(images: Images, line: int, base: Colouring) -> _Gates:
    _, before, behind = split(images, line, base.colour)
    rows = np.flatnonzero(images >= 0)
    part_behind = np.full(len(images), -1, dtype=np.int64)
    part_behind[images[rows]] = base.part[rows]
    words = []
    for part in (base.part, part_behind):
        either = np.maximum(part, part[np.arange(len(part)) ^ (1 << line)])
        mine = _by_pair(either, line)[None, :] == np.arange(base.parts)[:, None]
        words.append(to_words(mine))
    turned = [to_words(_by_pair(side, line) == 1) for side in (before, behind)]
    return _Gates(turned[0], turned[1], words[0], words[1])


def _cheap_flips(
    images: Images, line: int, base: Colouring, costs: SumCosts, width: Width, random: np.random.Generator
) -> list[tuple[int, NDArray[np.bool_]]]:
    """The cheapest choices met of the parts to flip, with their costs: all of them, or some descents."""
    gates = _gates(images, line, base)
    parts = base.parts
    if parts <= width.every:
        number = np.arange(1 << parts)
        flips = ((number[:, None] >> np.arange(parts)) & 1).astype(bool)
        cost = gates.cost(flips, costs)
    else:
        flips = np.zeros((width.starts, parts), dtype=bool)
        if width.starts > 1:
            flips[1] = _still_behind(images, line, base)
        for start in range(2, width.starts):
            flips[start] = random.integers(0, 2, parts)
        cost = gates.cost(flips, costs)
        for start in range(width.starts):
            flips[start], cost[start] = _descend(gates, flips[start], int(cost[start]), costs, random)
    order = np.argsort(cost, kind="stable")[: width.children]
    return [(int(cost[index]), flips[index]) for index in order.tolist()]


def _still_behind(images: Images, line: int, base: Colouring) -> NDArray[np.bool_]:
    """The flips with which the least state of each part is not turned behind."""
    flips = np.zeros(base.parts, dtype=bool)
    rows = np.flatnonzero(images >= 0)[::-1]
    flips[base.part[rows]] = ((images[rows] >> line) & 1) != base.colour[rows]
    return flips


def _descend(
    gates: _Gates, flips: NDArray[np.bool_], cost: int, costs: SumCosts, random: np.random.Generator
) -> tuple[NDArray[np.bool_], int]:
    """Flip parts as long as that saves: the best one, or the better half of all that save at once.

    Where there are more parts than the work allows, each step looks at some of them.
    """
    parts = len(flips)
    work = WORK // 3 ** max(costs.inputs - LEAF_INPUTS, 0)
    few = max(work // 8, 1)
    for _ in range(MOST_STEPS):
        tried = np.arange(parts) if parts <= few else np.sort(random.choice(parts, few, replace=False))
        work -= len(tried)
        single = gates.flipped(flips, tried, costs)
        order = np.argsort(single, kind="stable")
        saving = int(np.count_nonzero(single < cost))
        if not saving:
            break
        sizes = [size for size in (saving, saving // 2, saving // 4, 2) if size > 1]
        several = np.repeat(flips[None], len(sizes) + 1, axis=0)
        for row, size in enumerate([*sizes, 1]):
            several[row, tried[order[:size]]] ^= True
        joint = gates.cost(several, costs)
        best = int(joint.argmin())
        flips, cost = several[best], int(joint[best])
        if work <= 0:
            break
    return flips, cost
