"""Transformation-based synthesis of partly free targets: a free image is chosen only when its row is reached.

After Miller, Maslov, Dueck (DAC 2003), with two changes. The image of a row is the nearest one, as the gates
so far have moved it, among those its fixed bits allow. And only the states that hold finished rows restrict
the controls, so each gate gets the shortest product that keeps away from them, of both polarities if allowed.
"""

from __future__ import annotations

from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from revsynth.cascade.model import Cascade
from revsynth.embed.target import ReversibleTarget

MAX_LINES = 16
"""Each gate looks at sets of 2**lines states: a predicate of 12 inputs takes half a second, of 14 five."""


class Step(NamedTuple):
    """A gate on masks: controls in `care`, waiting for `value`."""

    target: int
    care: int
    value: int


class Variant(NamedTuple):
    """How to go about it: `both` sides or one, rows by their number XOR `flip`, `width` images tried."""

    both: bool
    flip: int = 0
    width: int = 4


def transform_lazily(target: ReversibleTarget, variant: Variant, *, positive: bool) -> Cascade | None:
    """A cascade that the target accepts; None where this variant runs into a dead end.

    `positive`: only positive controls. Raises ValueError above 16 lines.
    """
    if target.lines > MAX_LINES:
        raise ValueError(f"{target.lines} lines are too many here: at most {MAX_LINES}")
    return _Run(target, variant, positive).cascade()


class _Run:
    """The state of one run.

    `position_of_image[y]` is where the gates behind have moved state y, `position_of_row[x]` where the gates
    before (undone) have moved row x; a row is finished when its position and its image's are the same. Sets
    of positions are Python integers, bit p for position p.
    """

    def __init__(self, target: ReversibleTarget, variant: Variant, positive: bool) -> None:
        self.target = target
        self.variant = variant
        self.positive = positive
        size = 1 << target.lines
        self.state = np.arange(size, dtype=np.int64)
        self.position_of_row = self.state.copy()
        self.position_of_image = self.state.copy()
        self.open_row = target.fixed != 0
        self.open_rows = target.cared
        self.open_image = np.ones(size, dtype=bool)
        self.finished = 0
        self.on_line = [_set_of_line(target.lines, line) for line in range(target.lines)]
        self.off_line = [((1 << size) - 1) ^ ones for ones in self.on_line]
        self.before: list[Step] = []
        self.behind: list[Step] = []

    def cascade(self) -> Cascade | None:
        """Finish all rows that matter, in order of position.

        Gates before the function may move an open row to a position that was passed over for its free row,
        so positions are gone through until no open row is left: each round finishes at least one.
        """
        while self.open_rows:
            for number in range(1 << self.target.lines):
                if self.open_rows and not self._finish(number ^ self.variant.flip):
                    return None
        return _to_cascade(self.target.lines, [*self.before, *reversed(self.behind)])

    def _finish(self, goal: int) -> bool:
        """Finish the row at position `goal`, if it matters; False at a dead end."""
        if (self.finished >> goal) & 1:
            return True
        row = int(np.flatnonzero(self.position_of_row == goal)[0])
        if not self.open_row[row]:
            return True
        there = int(np.flatnonzero(self.position_of_image == goal)[0])
        if self.open_image[there] and there & int(self.target.fixed[row]) == int(self.target.image[row]):
            self._close(row, there, goal)
            return True
        fits = self.open_image & ((self.state & self.target.fixed[row]) == self.target.image[row])
        options = [
            (cost, 0, row, image, path)
            for image, cost, path in self._paths(np.flatnonzero(fits), self.position_of_image, goal)
        ]
        if self.variant.both and self.open_image[there]:
            fits = self.open_row & ((self.target.fixed & there) == self.target.image)
            options += [
                (cost, 1, other, there, path)
                for other, cost, path in self._paths(np.flatnonzero(fits), self.position_of_row, goal)
            ]
        if not options:
            return False
        _, before, row, image, path = min(options, key=lambda option: (option[0], option[1], option[2:4]))
        for step in path:
            self._apply(step, self.position_of_row if before else self.position_of_image)
        (self.before if before else self.behind).extend(path)
        self._close(row, image, goal)
        return True

    def _close(self, row: int, image: int, goal: int) -> None:
        self.open_row[row] = self.open_image[image] = False
        self.open_rows -= 1
        self.finished |= 1 << goal

    def _paths(
        self, candidates: NDArray[np.int64], position: NDArray[np.int64], goal: int
    ) -> list[tuple[int, tuple[int, int], list[Step]]]:
        """(candidate, (ANDs, gates), path) for the nearest candidates that can be moved to `goal`."""
        places = position[candidates]
        distance = np.bitwise_count(places ^ goal).astype(np.int64)
        key = (distance << self.target.lines) + places
        few = 2 * self.variant.width
        if len(key) > 4 * few:
            nearest = np.argpartition(key, few)[:few]
            found = self._first_paths(candidates[nearest], places[nearest], key[nearest], goal)
            if found:
                return found
        return self._first_paths(candidates, places, key, goal)

    def _first_paths(
        self, candidates: NDArray[np.int64], places: NDArray[np.int64], key: NDArray[np.int64], goal: int
    ) -> list[tuple[int, tuple[int, int], list[Step]]]:
        """Paths of the first candidates by `key` (all different) that have one, at most `width` of them."""
        found: list[tuple[int, tuple[int, int], list[Step]]] = []
        for index in np.argsort(key).tolist():
            path = self._path(int(places[index]), goal)
            if path is not None:
                ands = sum(max(step.care.bit_count() - 1, 0) for step in path)
                found.append((int(candidates[index]), (ands, len(path)), path))
                if len(found) >= self.variant.width:
                    break
        return found

    def _path(self, place: int, goal: int) -> list[Step] | None:
        """Gates from `place` to `goal`, one a differing bit, cheapest first; None where all are blocked."""
        path: list[Step] = []
        while place != goal:
            best: tuple[int, int, int] | None = None
            best_step: Step | None = None
            rest = place ^ goal
            while rest:
                bit = (rest & -rest).bit_length() - 1
                rest &= rest - 1
                care = self._product(place, bit)
                if care is not None:
                    clears = (place >> bit) & 1
                    key = (care.bit_count(), clears, bit)
                    if best is None or key < best:
                        best, best_step = key, Step(bit, care, place & care)
            if best_step is None:
                return None
            path.append(best_step)
            place ^= 1 << best_step.target
        return path

    def _product(self, place: int, target: int) -> int | None:
        """Lines of a short product that holds at `place` and at no finished position, free of line `target`.

        Greedy cover, then dropping what is not needed; None where no product keeps away.
        """
        left = self.finished
        if not left:
            return 0
        usable = []
        for line in reversed(range(self.target.lines)):
            holds = (place >> line) & 1
            if line != target and (holds or not self.positive):
                usable.append((line, self.on_line[line] if holds else self.off_line[line]))
        chosen: list[tuple[int, int]] = []
        while left:
            fewest, pick = left.bit_count(), None
            for option in usable:
                rest = (left & option[1]).bit_count()
                if rest < fewest:
                    fewest, pick = rest, option
            if pick is None:
                return None
            chosen.append(pick)
            left &= pick[1]
        return sum(1 << line for line, _ in self._needed(chosen))

    def _needed(self, chosen: list[tuple[int, int]]) -> list[tuple[int, int]]:
        for option in chosen[:-1] if len(chosen) > 2 else ():
            left = self.finished
            for other in chosen:
                if other is not option:
                    left &= other[1]
            if not left:
                chosen = [other for other in chosen if other is not option]
        return chosen

    def _apply(self, step: Step, position: NDArray[np.int64]) -> None:
        position ^= ((position & step.care) == step.value).astype(np.int64) << step.target


def _set_of_line(lines: int, line: int) -> int:
    """The set of states with a 1 on `line`."""
    block = ((1 << (1 << line)) - 1) << (1 << line)
    pattern, width = block, 2 << line
    while width < 1 << lines:
        pattern |= pattern << width
        width *= 2
    return pattern


def _to_cascade(lines: int, steps: list[Step]) -> Cascade:
    return Cascade.from_masks(
        lines,
        np.array([step.target for step in steps], dtype=np.int32),
        np.array([step.care for step in steps], dtype=np.uint64),
        np.array([step.value for step in steps], dtype=np.uint64),
    )
