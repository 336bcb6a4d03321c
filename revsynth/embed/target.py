"""A reversible target: for each basis state, which bits of its image are fixed; the rest is left free.

Garbage bits, inputs outside the domain and unused values of constants stay free until synthesis needs
them, which is cheaper than completing the function beforehand.
"""

from __future__ import annotations

from collections import deque
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

MAX_LINES = 20
"""Tables of 2**lines states are kept in memory: 20 lines take some 50 MB on the way."""


@dataclass(frozen=True)
class ReversibleTarget:
    """What a reversible block on `lines` lines has to do.

    fixed: int64 (2**lines,), bit l of entry x is 1 where line l of the image of state x is fixed;
    image: int64 (2**lines,), the fixed bits' values, 0 elsewhere. Line 0 is the least significant bit.
    A state with fixed == 0 may go anywhere.
    """

    lines: int
    fixed: NDArray[np.int64]
    image: NDArray[np.int64]

    def __post_init__(self) -> None:
        size = 1 << self.lines
        if self.fixed.shape != (size,) or self.image.shape != (size,):
            raise ValueError(f"tables of {size} states wanted, not {self.fixed.shape}, {self.image.shape}")
        if np.any(self.image & ~self.fixed) or np.any((self.fixed < 0) | (self.fixed >= size)):
            raise ValueError(f"images must be 0 where they are free, and below {size}")

    @property
    def cared(self) -> int:
        """How many states have at least one fixed image bit."""
        return int(np.count_nonzero(self.fixed))

    @property
    def is_complete(self) -> bool:
        """True where every bit of every image is fixed."""
        return bool(np.all(self.fixed == (1 << self.lines) - 1))

    def accepts(self, table: NDArray[np.integer]) -> bool:
        """Whether the permutation `table`, shape (2**lines,), agrees wherever something is fixed."""
        return bool(np.array_equal(table & self.fixed, self.image))

    def inverse(self) -> ReversibleTarget:
        """The target of the inverse block; only where every image is wholly fixed or wholly free."""
        full = (1 << self.lines) - 1
        rows = np.flatnonzero(self.fixed)
        if np.any(self.fixed[rows] != full):
            raise ValueError("a target with half-fixed images has no table of the inverse")
        fixed = np.zeros_like(self.fixed)
        image = np.zeros_like(self.image)
        fixed[self.image[rows]] = full
        image[self.image[rows]] = rows
        return ReversibleTarget(self.lines, fixed, image)


def complete(target: ReversibleTarget) -> NDArray[np.int64] | None:
    """A permutation that the target accepts, near the identity; None where there is none.

    States take the nearest image where it is not taken yet; the others, those with the fewest free bits
    first, take the nearest that is left, moving earlier choices on where they must (augmenting paths;
    Kuhn, "The Hungarian method for the assignment problem", 1955).
    """
    size = 1 << target.lines
    state = np.arange(size, dtype=np.int64)
    table = np.full(size, -1, dtype=np.int64)
    owner = np.full(size, -1, dtype=np.int64)
    order = np.lexsort((state, -np.bitwise_count(target.fixed).astype(np.int64)))
    order = order[target.fixed[order] != 0]
    nearest = (state & ~target.fixed) | target.image
    wish = nearest[order]
    _, first = np.unique(wish, return_index=True)
    owner[wish[first]], table[order[first]] = order[first], wish[first]
    later = order[table[order] < 0]
    masks = np.unique(target.fixed[order])
    if target.lines > 10 and masks.size == 1:
        later = _place_by_pattern(target, later, int(masks[0]), table, owner)
    for row in later.tolist():
        if not _place(target, row, table, owner):
            return None
    _fill(table, owner)
    return table


def _place_by_pattern(
    target: ReversibleTarget,
    rows: NDArray[np.int64],
    mask: int,
    table: NDArray[np.int64],
    owner: NDArray[np.int64],
) -> NDArray[np.int64]:
    """Give `rows` any open image of their own pattern, all at once; returns those that got none.

    Quick where all states fix the same bits: then the images of different patterns do not compete.
    """
    rows = rows[np.argsort(target.image[rows], kind="stable")]
    images = np.flatnonzero(owner < 0)
    images = images[np.argsort(images & mask, kind="stable")]
    pattern = images & mask
    start = np.searchsorted(pattern, target.image[rows], side="left")
    end = np.searchsorted(pattern, target.image[rows], side="right")
    rank = np.arange(len(rows)) - np.searchsorted(target.image[rows], target.image[rows], side="left")
    fits = start + rank < end
    chosen = images[(start + rank)[fits]]
    owner[chosen], table[rows[fits]] = rows[fits], chosen
    return rows[~fits]


def _place(target: ReversibleTarget, row: int, table: NDArray[np.int64], owner: NDArray[np.int64]) -> bool:
    """Give `row` an image, moving others along one augmenting path; False where there is none."""
    state = np.arange(len(table), dtype=np.int64)
    reached_from = np.full(len(table), -1, dtype=np.int64)
    queue: deque[int] = deque([row])
    while queue:
        here = queue.popleft()
        fits = (state & target.fixed[here]) == target.image[here]
        open_images = np.flatnonzero(fits & (owner < 0))
        if open_images.size:
            distance = np.bitwise_count(open_images ^ here)
            image = int(open_images[np.argmin(distance)])
            while True:
                previous = int(table[here])
                owner[image], table[here] = here, image
                if here == row:
                    return True
                image = previous
                here = int(reached_from[image])
        for image in np.flatnonzero(fits & (reached_from < 0)).tolist():
            reached_from[image] = here
            queue.append(int(owner[image]))
    return False


def _fill(table: NDArray[np.int64], owner: NDArray[np.int64]) -> None:
    """Send the states without an image to themselves where possible, the rest in ascending order."""
    loose = np.flatnonzero(table < 0)
    stay = loose[owner[loose] < 0]
    table[stay] = stay
    owner[stay] = stay
    table[np.flatnonzero(table < 0)] = np.flatnonzero(owner < 0)
