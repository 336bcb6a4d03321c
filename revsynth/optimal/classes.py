"""The classes of permutations of four lines by size: how they are found, and the hash table over them.

Source: Golubitsky, Maslov, "A study of optimal 4-bit reversible Toffoli circuits and their synthesis", IEEE
Trans. Computers 61(9), 2012.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass
from functools import cached_property

import numpy as np

from revsynth.cascade.model import Gate
from revsynth.optimal.packed import CONTROLS, GATES, IDENTITY, TARGETS, Words, points

COUNTS = (1, 4, 33, 425, 6_538, 101_983, 1_482_686, 19_466_575)
"""Classes of size 0, 1, ...: the paper, table of equivalence classes; found again by `found_classes`."""
MOST_SIZE = len(COUNTS) - 1
CHUNK = 1 << 14
"""Classes put gates to between two words on progress: some tenths of a second."""

Progress = Callable[[str], None]


@dataclass(frozen=True)
class Classes:
    """The smallest words of all classes of size 0, 1, ..., ascending: one array a size."""

    levels: tuple[Words, ...]

    @property
    def size(self) -> int:
        """The largest size: functions of up to twice this size are within reach."""
        return len(self.levels) - 1

    @cached_property
    def table(self) -> Words:
        """The hash table of the kernels, at most two thirds full."""
        from revsynth.optimal.kernels import add_level

        table = _room_for(sum(len(level) for level in self.levels))
        for size, level in enumerate(self.levels):
            add_level(level, size, table)
        return table

    @cached_property
    def signatures(self) -> tuple[Words, Words]:
        """Bit sets over the signatures of the classes of the largest size."""
        from revsynth.optimal.kernels import enter_signatures

        count = len(self.levels[-1])
        first = np.zeros(1 << 16 if count > 10_000 else 1 << 10, dtype=np.uint64)
        second = np.zeros(max(2, 1 << (count // 4).bit_length()), dtype=np.uint64)
        enter_signatures(self.levels[-1], points(), first, second)
        return first, second

    def size_of(self, word: int) -> int | None:
        """The fewest gates of a permutation, None where it needs more than `size`."""
        from revsynth.optimal.kernels import canonical, size_of_class

        found = int(size_of_class(np.uint64(canonical(np.uint64(word))), self.table))
        return None if found < 0 else found

    def gates(self, word: int) -> list[Gate]:
        """A shortest circuit of a permutation of at most `size` gates; ValueError for any other."""
        from revsynth.optimal.kernels import peeled

        order = np.empty(MOST_SIZE, dtype=np.int64)
        count = int(peeled(np.uint64(word), TARGETS, CONTROLS, self.table, order))
        if count < 0:
            raise ValueError(f"the permutation {word:#x} needs more than {self.size} gates")
        return [GATES[index] for index in order[:count][::-1].tolist()]


def found_classes(size: int, progress: Progress, start: Classes | None = None) -> Classes:
    """All classes up to a size, level by level, from `start` on where it is given.

    Size 6 takes some seconds and 50 MB, size 7 under a minute and half a gigabyte. Raises ValueError for a
    size beyond 7, AssertionError where a count is not the published one.
    """
    from revsynth.optimal.kernels import add_level, next_level

    if not 0 <= size <= MOST_SIZE:
        raise ValueError(f"classes are counted up to size {MOST_SIZE}, not {size}")
    levels = [np.array([IDENTITY], dtype=np.uint64)] if start is None else list(start.levels[: size + 1])
    table = _room_for(sum(COUNTS[: size + 1]))
    for known, level in enumerate(levels):
        add_level(level, known, table)
    for new in range(len(levels), size + 1):
        found = np.empty(COUNTS[new], dtype=np.uint64)
        count = 0
        for begin in range(0, len(levels[-1]), CHUNK):
            share = 100 * begin // len(levels[-1])
            progress(f"optimal: finding the {COUNTS[new]:,} classes of {new} gates on 4 lines, {share} %")
            part = levels[-1][begin : begin + CHUNK]
            count += int(next_level(part, TARGETS, CONTROLS, new, table, found[count:]))
        if count != COUNTS[new]:
            raise AssertionError(f"{count} classes of {new} gates were found, {COUNTS[new]} are published")
        found.sort()
        levels.append(found)
    return Classes(tuple(levels))


def functions_of(levels: Sequence[Words]) -> list[int]:
    """How many permutations the classes of each size hold."""
    from revsynth.optimal.kernels import words_of_classes

    return [int(words_of_classes(level).sum(dtype=np.int64)) for level in levels]


def _room_for(count: int) -> Words:
    return np.zeros(1 << (3 * count // 2).bit_length(), dtype=np.uint64)
