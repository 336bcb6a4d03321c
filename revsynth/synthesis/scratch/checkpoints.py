"""Plans for few lines by checkpoints: the units in contiguous blocks, in several levels.

A block is computed, then all of it but its interface (what is read after it) is erased again. To erase parts
of an interface later, what they need inside the block is computed once more. With one level every AND but
those of interfaces and of the last block costs two; each further level may double that and needs far fewer
lines.

Source: Bennett, "Time/space trade-offs for reversible computation", SIAM J. Comput. 18, 1989.
"""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from itertools import pairwise

import numpy as np
from numpy.typing import NDArray

from revsynth.synthesis.scratch.game import Game
from revsynth.synthesis.scratch.plan import ACT, COMPUTE, ERASE, Operation

MOST_BLOCKS = 4096
"""Blocks of one level, at most."""


@dataclass(frozen=True)
class Range:
    """Units begin ... end - 1; parts: what it is made of, none for a block."""

    begin: int
    end: int
    parts: tuple[Range, ...] = ()


def blocks(bounds: Sequence[int]) -> Range:
    """One level: blocks between neighbouring bounds, which ascend from 0 to the number of units."""
    parts = tuple(Range(a, b) for a, b in pairwise(bounds))
    return Range(bounds[0], bounds[-1], parts)


@dataclass(frozen=True)
class Shape:
    """How units are cut into nested parts: parts[0] at the top, each into parts[1], and so on.

    ratio: of the size of one part at the top to the one before. slack: how far, in parts, a bound may move to
    where fewer units are read across it.
    """

    parts: tuple[int, ...]
    ratio: float = 1.0
    slack: float = 0.0


def nested(game: Game, shape: Shape) -> Range:
    """The units cut by a shape."""
    crossing = crossing_units(game)

    def divided(begin: int, end: int, level: int) -> Range:
        """One level deeper for each item of `parts`."""
        if level == len(shape.parts):
            return Range(begin, end)
        count = min(shape.parts[level], end - begin)
        if count <= 1:
            return divided(begin, end, level + 1)
        bounds = _bounds(begin, end, count, shape.ratio if level == 0 else 1.0)
        bounds = _moved(bounds, crossing, shape.slack)
        inner = [divided(a, b, level + 1) for a, b in pairwise(bounds)]
        return Range(begin, end, tuple(inner))

    return divided(0, game.size, 0)


def crossing_units(game: Game) -> NDArray[np.int64]:
    """int64 (size + 1,): how many units below a bound are read at or above it."""
    change = np.zeros(game.size + 2, dtype=np.int64)
    last_read, weight = np.array(game.last_read, dtype=np.int64), np.array(game.weight, dtype=np.int64)
    unit = np.arange(game.size)
    crosses = last_read > unit
    np.add.at(change, unit[crosses] + 1, weight[crosses])
    np.add.at(change, last_read[crosses] + 1, -weight[crosses])
    crossing: NDArray[np.int64] = np.cumsum(change)[: game.size + 1]
    return crossing


def _bounds(begin: int, end: int, count: int, ratio: float) -> list[int]:
    """Bounds of `count` parts, none empty."""
    bounds = [begin]
    whole = sum(ratio**i for i in range(count))
    part = 0.0
    for i in range(count - 1):
        part += ratio**i
        bound = begin + round((end - begin) * part / whole)
        bounds.append(max(bounds[-1] + 1, min(bound, end - (count - 1 - i))))
    return [*bounds, end]


def _moved(bounds: list[int], crossing: NDArray[np.int64], slack: float) -> list[int]:
    """The inner bounds moved to the nearest place where fewest units cross, no part left empty."""
    moved = [bounds[0]]
    for i in range(1, len(bounds) - 1):
        reach = int(slack * min(bounds[i] - bounds[i - 1], bounds[i + 1] - bounds[i]))
        low = max(moved[-1] + 1, bounds[i] - reach)
        high = max(low, min(bounds[-1] - (len(bounds) - 1 - i), bounds[i] + reach))
        there = crossing[low : high + 1]
        fewest = np.flatnonzero(there == there.min()) + low
        moved.append(int(fewest[np.argmin(np.abs(fewest - bounds[i]))]))
    return [*moved, bounds[-1]]


def checkpointed(game: Game, whole: Range) -> list[Operation]:
    """The forward run of the plan with these blocks."""
    planner = _Planner(game)
    operations = [3 * act + ACT for act in game.acts[0]]
    operations.extend(planner.last(whole))
    return operations


class _Planner:
    """Writes operations; sets of units are always those of the range in question."""

    def __init__(self, game: Game) -> None:
        self.game = game
        self.act_reads: list[list[int]] = [[] for _ in range(game.size)]
        for place, acts in enumerate(game.acts):
            for act in acts:
                for unit in game.act_reads[act]:
                    self.act_reads[place - 1].append(unit)

    def interface(self, part: Range) -> set[int]:
        """The units of a range that are read after it."""
        last_read = self.game.last_read
        return {unit for unit in range(part.begin, part.end) if last_read[unit] >= part.end}

    def last(self, part: Range) -> list[Operation]:
        """Compute the range for the first time, as the end of the forward run: nothing needs erasing."""
        if not part.parts:
            return self._first_block(part, None)
        operations: list[Operation] = []
        for inner in part.parts[:-1]:
            operations.extend(self.first(inner, self.interface(inner)))
        operations.extend(self.last(part.parts[-1]))
        return operations

    def first(self, part: Range, kept: set[int]) -> list[Operation]:
        """Compute the range for the first time, acts included, and leave `kept`, its interface."""
        if not part.parts:
            return self._first_block(part, kept)
        operations: list[Operation] = []
        interfaces = [self.interface(inner) for inner in part.parts]
        for inner, held in zip(part.parts, interfaces, strict=True):
            operations.extend(self.first(inner, held))
        for inner, held in zip(reversed(part.parts), reversed(interfaces), strict=True):
            operations.extend(self.reduce(inner, held, held & kept))
        return operations

    def _first_block(self, part: Range, kept: set[int] | None) -> list[Operation]:
        game = self.game
        wanted = self.interface(part)
        for place in range(part.begin, part.end):
            wanted.update(unit for unit in self.act_reads[place] if unit >= part.begin)
        wanted |= self._closure(part, wanted, set())
        operations: list[Operation] = []
        for unit in range(part.begin, part.end):
            if unit in wanted:
                operations.append(3 * unit + COMPUTE)
            operations.extend(3 * act + ACT for act in game.acts[unit + 1])
        if kept is not None:
            operations.extend(3 * unit + ERASE for unit in sorted(wanted - kept, reverse=True))
        return operations

    def _closure(self, part: Range, wanted: Iterable[int], held: set[int]) -> set[int]:
        """What of the range must be computed besides `held`, so that each of `wanted` finds what it reads."""
        found: set[int] = set()
        stack = list(wanted)
        begin = part.begin
        while stack:
            for other in self.game.reads[stack.pop()]:
                if other >= begin and other not in held and other not in found:
                    found.add(other)
                    stack.append(other)
        return found

    def reduce(self, part: Range, held: set[int], kept: set[int]) -> list[Operation]:
        """From `held` down to `kept`, a part of it; all that the range reads from outside must be there."""
        gone = held - kept
        if not gone:
            return []
        again = self._closure(part, gone, held)
        if not part.parts:
            operations = [3 * unit + COMPUTE for unit in sorted(again)]
            operations.extend(3 * unit + ERASE for unit in sorted(gone | again, reverse=True))
            return operations
        operations = []
        targets = []
        active = gone | again
        for inner in part.parts:
            inside = {unit for unit in held if inner.begin <= unit < inner.end}
            target = inside | {
                unit
                for unit in again
                if inner.begin <= unit < inner.end
                and any(reader >= inner.end and reader in active for reader in self.game.readers[unit])
            }
            targets.append(target)
            operations.extend(reversed_run(self.reduce(inner, target, inside)))
        for inner, target in zip(reversed(part.parts), reversed(targets), strict=True):
            operations.extend(self.reduce(inner, target, target & kept))
        return operations


def reversed_run(operations: list[Operation]) -> list[Operation]:
    """The operations undone, last first; no acts among them."""
    return [operation + (1 if operation % 3 == COMPUTE else -1) for operation in reversed(operations)]


def filled_bounds(game: Game, budget: int, fill: int) -> list[int] | None:
    """Bounds of one level: each block as large as the interfaces before it leave room for, of `fill` lines.

    The last block may use the whole budget. None where that comes to no end.
    """
    last_read, weight = np.array(game.last_read), np.array(game.weight)
    below = np.concatenate([[0], np.cumsum(weight)])
    bounds = [0]
    held = 0
    while True:
        begin = bounds[-1]
        if below[-1] - below[begin] <= budget - held:
            return [*bounds, game.size]
        room = fill - held
        if room < 1 or len(bounds) > MOST_BLOCKS:
            return None
        end = int(np.searchsorted(below, below[begin] + room, side="right")) - 1
        end = min(end, game.size - 1)
        if end == begin:
            return None
        held += int(weight[begin:end][last_read[begin:end] >= end].sum())
        bounds.append(end)
        if held >= budget:
            return None


def one_level_ands(game: Game, bounds: Sequence[int]) -> int:
    """ANDs of the plan with one level of blocks, all units of a block taken for needed."""
    cost, last_read = np.array(game.cost), np.array(game.last_read)
    total = int(cost.sum())
    for begin, end in pairwise(bounds[:-1]):
        total += int(cost[begin:end][last_read[begin:end] < end].sum())
    return total
