"""Plans for few lines by greedy pebbling: when lines run out, something not needed soon is erased.

A unit can be erased while all units that it reads are held. One that nothing reads any more costs one AND
more in all (it comes back in the mirror); one that is needed again costs two.

Source of the game: Bennett, "Time/space trade-offs for reversible computation", SIAM J. Comput. 18, 1989.
"""

from __future__ import annotations

import random
from collections.abc import Sequence
from heapq import heappop, heappush
from typing import Literal

from revsynth.synthesis.scratch.game import Game
from revsynth.synthesis.scratch.plan import ACT, COMPUTE, ERASE, Operation

Policy = Literal["newest", "oldest", "any"]
POLICIES: tuple[Policy, ...] = ("newest", "oldest", "any")
"""Which of the units that nothing reads any more is erased first."""

PATIENCE = 6
"""Operations a unit, at most, before an attempt is given up."""
SCANNED = 400_000
"""Units looked at, at most, in search of one that is needed again as late as possible."""


def pebble(game: Game, budget: int, policy: Policy, seed: int) -> list[Operation] | None:
    """A forward run that never holds more than `budget` units, or None where this attempt fails."""
    return _Attempt(game, budget, policy, seed).run()


class _Attempt:
    """One greedy attempt.

    pending[k]: units and acts that read k and have not been done yet; missing[k]: units k reads that are not
    held; idle: a heap of units that may be erased at no more than one AND, some of its entries out of date.
    """

    def __init__(self, game: Game, budget: int, policy: Policy, seed: int) -> None:
        self.game = game
        self.budget = budget
        self.held = [False] * game.size
        self.done = [False] * game.size
        self.count = 0
        self.missing = [len(reads) for reads in game.reads]
        self.pending = [len(readers) for readers in game.readers]
        for reads in game.act_reads:
            for unit in reads:
                self.pending[unit] += 1
        self.operations: list[Operation] = []
        self.idle: list[tuple[float, int]] = []
        draw = random.Random(f"pebbles {seed}")
        sign = {"newest": -1.0, "oldest": 1.0, "any": 0.0}[policy]
        spread = 0.0 if seed == 0 and policy != "any" else game.size / 4
        self.rank = [sign * unit + spread * draw.random() for unit in range(game.size)]
        self.limit = PATIENCE * game.size + 100
        self.scans = 64 + SCANNED // max(1, game.size)

    def run(self) -> list[Operation] | None:
        for act in self.game.acts[0]:
            self.operations.append(3 * act + ACT)
        for unit in range(self.game.size):
            if not self.bring([unit]):
                return None
            for act in self.game.acts[unit + 1]:
                if not self.bring(self.game.act_reads[act]):
                    return None
                self.operations.append(3 * act + ACT)
                for read in self.game.act_reads[act]:
                    self._less_pending(read)
        return self.operations

    def bring(self, goals: Sequence[int]) -> bool:
        """Hold all goals at once, computing again what is missing; False where that fails."""
        stack = [unit for unit in reversed(goals) if not self.held[unit]]
        while stack:
            unit = stack[-1]
            if self.held[unit]:
                stack.pop()
                continue
            absent = [other for other in self.game.reads[unit] if not self.held[other]]
            if absent:
                stack.extend(reversed(absent))
                if len(stack) > 4 * self.game.size:
                    return False
                continue
            if self.count + self.game.weight[unit] > self.budget and not self._make_room(stack, goals):
                return False
            if len(self.operations) > self.limit:
                return False
            stack.pop()
            self._compute(unit)
        return all(self.held[unit] for unit in goals)

    def _compute(self, unit: int) -> None:
        self.operations.append(3 * unit + COMPUTE)
        self.held[unit] = True
        self.count += self.game.weight[unit]
        for reader in self.game.readers[unit]:
            self.missing[reader] -= 1
            if self.held[reader]:
                self._offer(reader)
        if not self.done[unit]:
            self.done[unit] = True
            for other in self.game.reads[unit]:
                self._less_pending(other)
        self._offer(unit)

    def _less_pending(self, unit: int) -> None:
        self.pending[unit] -= 1
        self._offer(unit)

    def _offer(self, unit: int) -> None:
        if self.held[unit] and self.pending[unit] == 0 and self.missing[unit] == 0 and self.game.weight[unit]:
            heappush(self.idle, (self.rank[unit], unit))

    def _erase(self, unit: int) -> None:
        self.operations.append(3 * unit + ERASE)
        self.held[unit] = False
        self.count -= self.game.weight[unit]
        for reader in self.game.readers[unit]:
            self.missing[reader] += 1

    def _make_room(self, stack: list[int], goals: Sequence[int]) -> bool:
        """Erase one unit that is not needed for what is under way."""
        locked = set(goals)
        for unit in stack:
            locked.update(self.game.reads[unit])
        aside: list[tuple[float, int]] = []
        found = -1
        while self.idle and found < 0:
            entry = heappop(self.idle)
            unit = entry[1]
            if not self.held[unit] or self.pending[unit] or self.missing[unit]:
                continue
            if unit in locked:
                aside.append(entry)
            else:
                found = unit
        for entry in aside:
            heappush(self.idle, entry)
        if found < 0:
            found = self._needed_last(locked)
        if found < 0:
            return False
        self._erase(found)
        return True

    def _needed_last(self, locked: set[int]) -> int:
        """Of the units that are needed again, one that can be erased and whose next reader is last."""
        best, when = -1, -1
        self.scans -= 1
        if self.scans < 0:
            return best
        for unit in range(self.game.size):
            free = self.held[unit] and self.missing[unit] == 0 and self.game.weight[unit]
            if free and unit not in locked:
                following = next(
                    (reader for reader in self.game.readers[unit] if not self.done[reader]), self.game.size
                )
                if following > when:
                    best, when = unit, following
        return best
