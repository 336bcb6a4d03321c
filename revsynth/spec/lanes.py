"""Which inputs are evaluated side by side, which of them are still in use, and which have failed.

Bit order: lane values are combined indices of inputs, words in declared order, the first word lowest.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass, field, replace
from typing import Any

import numpy as np
from numpy.typing import NDArray

from revsynth.spec import bounds
from revsynth.spec.lane_values import Items, Mask, Value, settled, spread, take, truths
from revsynth.spec.model import Word

_DENSE = 4
"""Lanes are packed together where fewer than one in so many is in use."""
_SMALL = 512
"""Fewer lanes than this are not worth packing."""


@dataclass
class Shared:
    """What all lanes of one chunk have in common: its failures, and tables of constant lists.

    patterns: for inputs that are no combined indices but rows of a sample: the bits of a word that begins at
    some bit of the combined index, by row, int64, or object where the word has more than 62 bits.
    """

    size: int
    failed: Mask | None = None
    failures: list[NDArray[np.int64]] = field(default_factory=list)
    tables: dict[int, tuple[Any, Any]] = field(default_factory=dict)
    patterns: Callable[[Word, int], NDArray[Any]] | None = None

    @property
    def first_failure(self) -> int | None:
        """The least combined index of an input that reached an undefined operation."""
        return min((int(found[0]) for found in self.failures), default=None)


@dataclass(frozen=True)
class Lanes:
    """Inputs by their combined indices, ascending.

    index:  shape (lanes,), int64.
    rows:   the lanes' positions in their chunk, ascending; None where all of the chunk is there.
    active: which lanes are in use; None for all. At least one is. Values elsewhere mean nothing.
    names:  loop variables.
    """

    index: NDArray[np.int64]
    layout: Mapping[str, tuple[Word, int]]
    shared: Shared
    rows: NDArray[np.intp] | None = None
    active: Mask | None = None
    names: Mapping[str, Value] = field(default_factory=dict)
    cache: dict[str, Value] = field(default_factory=dict)

    @property
    def size(self) -> int:
        """Number of lanes, in use or not."""
        return len(self.index)

    def bind(self, names: Mapping[str, Value]) -> Lanes:
        """The same lanes with more loop variables."""
        return replace(self, names={**self.names, **names})

    def narrow(self, condition: bool | Mask) -> Lanes | None:
        """The lanes that are in use and fulfil a condition; None where there are none."""
        if isinstance(condition, bool):
            return self if condition else None
        active = condition if self.active is None else condition & self.active
        count = int(np.count_nonzero(active))
        if count == 0:
            return None
        if count == self.size:
            return self
        if count * _DENSE > self.size or self.size < _SMALL:
            return replace(self, active=active)
        chosen = np.flatnonzero(active)
        rows = chosen if self.rows is None else self.rows[chosen]
        names = {name: take(value, chosen) for name, value in self.names.items()}
        return Lanes(self.index[chosen], self.layout, self.shared, rows, None, names)

    def positions_in(self, outer: Lanes) -> NDArray[np.intp] | None:
        """Where these lanes are among `outer`, which they were narrowed from; None where lane by lane."""
        if self.size == outer.size:
            return None
        assert self.rows is not None
        return self.rows if outer.rows is None else np.searchsorted(outer.rows, self.rows)

    def widened(self, value: Value, outer: Lanes) -> Value:
        """A value on these lanes as one on `outer`; it means nothing on the lanes in between."""
        rows = self.positions_in(outer)
        return value if rows is None else spread(value, rows, outer.size)

    def narrowed(self, value: Value, outer: Lanes) -> Value:
        """A value on `outer` as one on these lanes."""
        rows = self.positions_in(outer)
        return value if rows is None else take(value, rows)

    def coverage(self, outer: Lanes) -> Mask | None:
        """Which lanes of `outer` are in use here; None where all are that are in use there."""
        rows = self.positions_in(outer)
        if rows is None:
            return None if self.active is outer.active else self.active
        covered = np.zeros(outer.size, dtype=np.bool_)
        covered[rows] = True if self.active is None else self.active
        return covered

    def fail(self, bad: bool | Mask) -> None:
        """Note that the lanes in use where `bad` holds have reached an undefined operation."""
        if isinstance(bad, bool):
            if not bad:
                return
            bad = np.ones(self.size, dtype=np.bool_)
        where = np.flatnonzero(bad if self.active is None else bad & self.active)
        if len(where) == 0:
            return
        self.shared.failures.append(self.index[where])
        if self.shared.failed is None:
            self.shared.failed = np.zeros(self.shared.size, dtype=np.bool_)
        self.shared.failed[where if self.rows is None else self.rows[where]] = True

    def sound(self) -> Mask | None:
        """The lanes in use that have not failed; None for all lanes."""
        failed = self.shared.failed
        if failed is None:
            return self.active
        still = ~(failed if self.rows is None else failed[self.rows])
        return still if self.active is None else still & self.active

    def word(self, name: str) -> Value:
        """The value of a word, or the list of values of an array."""
        if name not in self.cache:
            word, offset = self.layout[name]
            elements = tuple(
                self._field(word, offset + element * word.bits) for element in range(word.count or 1)
            )
            array = word.count is not None
            self.cache[name] = Items(elements, (None,) * len(elements)) if array else elements[0]
        return self.cache[name]

    def _field(self, word: Word, offset: int) -> Value:
        if self.shared.patterns is None:
            values = (self.index >> offset) & ((1 << word.bits) - 1)
        else:
            values = self.shared.patterns(word, offset)[self.index]
        low, high = bounds.word(word.bits, word.signed)
        if word.signed:
            values = (values ^ high + 1) - (high + 1)
        elif word.bits == 1:
            return truths(values)
        return settled(values, (low, high))
