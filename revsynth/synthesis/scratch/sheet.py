"""A cascade being written for later mirroring: gates of at most two controls in flat lists, lines on loan."""

from __future__ import annotations

from heapq import heappop, heappush

import numpy as np
from numpy.typing import NDArray

from revsynth.cascade.model import PHASE, Cascade

GateRow = tuple[int, int, int]
"""(target, first control literal, second one); -1 for a control that is not there."""


class Sheet:
    """Gates of the forward run.

    The whole is this run, then the same gates backwards: but those at positions in `once` are left out there,
    and those in `instead` are replaced by the gates given (in that order).
    """

    def __init__(self, inputs: int, outputs: int) -> None:
        self.inputs = inputs
        self.outputs = outputs
        self.lines = inputs + outputs
        self.target: list[int] = []
        self.first: list[int] = []
        self.second: list[int] = []
        self.once: set[int] = set()
        self.instead: dict[int, list[GateRow]] = {}
        self.kept: list[int] = []
        self._free: list[int] = []

    def __len__(self) -> int:
        return len(self.target)

    def take(self) -> int:
        """A line in 0: the lowest that was given back, or a new one."""
        if self._free:
            return heappop(self._free)
        self.lines += 1
        return self.lines - 1

    def give(self, line: int) -> None:
        """Give back a line that is in 0 again."""
        heappush(self._free, line)

    def put(self, target: int, first: int = -1, second: int = -1) -> None:
        """Any gate."""
        self.target.append(target)
        self.first.append(first)
        self.second.append(second)

    def cnot(self, control: int, target: int) -> None:
        """CNOT from line to line."""
        self.target.append(target)
        self.first.append(2 * control)
        self.second.append(-1)

    def acted(self, start: int, targets: set[int]) -> None:
        """Gates on these targets from position `start` on are for the forward run alone."""
        self.once.update(p for p in range(start, len(self.target)) if self.target[p] in targets)

    def keep(self, line: int) -> None:
        """The gate written last stays done: the mirror leaves what it wrote on that line."""
        self.instead[len(self.target) - 1] = []
        self.kept.append(line)

    def gates(self, mirrored: bool = True) -> NDArray[np.int64]:
        """All gates, shape (g, 3), rows as `GateRow`."""
        forward = np.array([self.target, self.first, self.second], dtype=np.int64).reshape(3, -1).T
        if not mirrored:
            return forward
        count = len(forward)
        if not self.instead:
            keep = np.ones(count, dtype=np.bool_)
            keep[list(self.once)] = False
            return np.concatenate([forward, forward[keep][::-1]])
        back: list[int] = []
        extra: list[GateRow] = []
        for position in range(count - 1, -1, -1):
            if position in self.instead:
                others = self.instead[position]
                back.extend(range(count + len(extra), count + len(extra) + len(others)))
                extra.extend(others)
            elif position not in self.once:
                back.append(position)
        rows = np.concatenate([forward, np.array(extra, dtype=np.int64).reshape(-1, 3)])
        return np.concatenate([forward, rows[back]])


def cascade_of(rows: NDArray[np.int64], lines: int, place: NDArray[np.int64], positive: bool) -> Cascade:
    """The cascade of the gates with line i moved to place[i]; positive: no negative controls are used.

    rows: shape (g, 3), see `GateRow`.
    """
    target, controls = rows[:, 0], rows[:, 1:]
    target = np.where(target == PHASE, PHASE, place[target])
    controls = np.where(controls < 0, -1, 2 * place[controls >> 1] + (controls & 1))
    # The smaller literal first; a single control stands first.
    swap = (controls[:, 1] >= 0) & (controls[:, 1] < controls[:, 0])
    controls = np.where(swap[:, None], controls[:, ::-1], controls)
    if positive:
        target, controls = _without_negative(target, controls)
    there = controls >= 0
    offset = np.zeros(len(target) + 1, dtype=np.int64)
    np.cumsum(there.sum(axis=1), out=offset[1:])
    return Cascade(lines, target.astype(np.int32), offset, controls[there].astype(np.int32))


def _without_negative(
    target: NDArray[np.int64], controls: NDArray[np.int64]
) -> tuple[NDArray[np.int64], NDArray[np.int64]]:
    """NOTs around every gate with negative controls."""
    negative = (controls >= 0) & ((controls & 1) == 1)
    count = negative.sum(axis=1)
    size = 1 + 2 * count
    start = np.cumsum(size) - size
    new_target = np.empty(int(size.sum()), dtype=np.int64)
    new_controls = np.full((len(new_target), 2), -1, dtype=np.int64)
    new_target[start + count] = target
    new_controls[start + count] = np.where(negative, controls & ~np.int64(1), controls)
    for column in (0, 1):
        has = negative[:, column]
        shift = negative[has, 0].astype(np.int64) if column else np.zeros(int(has.sum()), dtype=np.int64)
        line = controls[has, column] >> 1
        new_target[start[has] + shift] = line
        new_target[start[has] + count[has] + 1 + shift] = line
    return new_target, new_controls
