"""Lists whose items may be there or not, depending on the input."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass
from typing import TypeAlias

from revsynth.spec.calls import longest_range
from revsynth.verification.translation.gates import (
    FALSE,
    TRUE,
    Bit,
    TooLargeToTranslateError,
    choose,
    every,
    some,
)
from revsynth.verification.translation.numbers import Arithmetic, Number, constant, known, limits

MOST_ITEMS = 4096
"""Items of a range whose ends depend on the input."""


@dataclass(frozen=True)
class Items:
    """(present, item) in order; where `present` is 0 the item is not in the list."""

    entries: tuple[tuple[Bit, Value], ...]

    @classmethod
    def of(cls, values: Sequence[Value]) -> Items:
        """A list of items that are all there."""
        return cls(tuple((TRUE, value) for value in values))

    @property
    def fixed(self) -> bool:
        """Whether every item is there for every input."""
        return all(present == TRUE for present, _ in self.entries)


@dataclass(frozen=True)
class Either:
    """A number for some inputs and a list for others: it may be there, but is not used."""


Value: TypeAlias = "Number | Items | Either"


class ListOperations:
    """Operations on lists, written with `numbers`."""

    def __init__(self, numbers: Arithmetic) -> None:
        self.numbers = numbers
        self.gates = numbers.gates

    def choose(self, condition: Bit, yes: Value, no: Value) -> Value:
        """`yes` where the condition holds, else `no`; numbers, or lists."""
        if condition < 2:
            return yes if condition else no
        if isinstance(yes, tuple) and isinstance(no, tuple):
            return self.numbers.choose(condition, yes, no)
        if isinstance(yes, Items) and isinstance(no, Items):
            if yes.fixed and no.fixed and len(yes.entries) == len(no.entries):
                pairs = zip(yes.entries, no.entries, strict=True)
                return Items.of([self.choose(condition, y, n) for (_, y), (_, n) in pairs])
            return Items(self.guarded(yes, condition).entries + self.guarded(no, condition ^ 1).entries)
        return Either()

    def guarded(self, items: Items, condition: Bit) -> Items:
        """The items where the condition holds, none where it does not."""
        return Items(tuple((self.gates.both(condition, there), item) for there, item in items.entries))

    def length(self, items: Items) -> Number:
        """How many items are there."""
        return self.numbers.count([present for present, _ in items.entries])

    def numbers_of(self, items: Items) -> list[tuple[Bit, Number]]:
        """The items of a list of numbers."""
        found = []
        for present, item in items.entries:
            if not isinstance(item, tuple):
                raise TooLargeToTranslateError("a list where a number is wanted")
            found.append((present, item))
        return found

    def sum(self, items: Items, start: Number) -> Number:
        """The sum of the items that are there, and `start`."""
        if self.numbers.by_columns:
            terms = self.numbers.weighted(start)
            for present, item in self.numbers_of(items):
                terms += self.numbers.weighted(self.numbers.choose(present, item, constant(0)))
            return self.numbers.total(terms)
        for present, item in self.numbers_of(items):
            start = self.numbers.add(start, self.numbers.choose(present, item, constant(0)))
        return start

    def any(self, items: Items) -> Bit:
        """Whether an item that is there is not 0."""
        rows = self.numbers_of(items)
        return some(self.gates, [self.gates.both(there, self.numbers.nonzero(item)) for there, item in rows])

    def all(self, items: Items) -> Bit:
        """Whether no item that is there is 0."""
        rows = self.numbers_of(items)
        zero = [self.gates.both(there, self.numbers.nonzero(item) ^ 1) for there, item in rows]
        return some(self.gates, zero) ^ 1

    def extreme(self, items: Items, better: Callable[[Number, Number], Bit]) -> Number:
        """The first of the best items that are there."""
        best, found = constant(0), FALSE
        for present, item in self.numbers_of(items):
            takes = choose(self.gates, found, better(item, best), TRUE)
            best = self.numbers.choose(self.gates.both(present, takes), item, best)
            found = some(self.gates, (found, present))
        return best

    def distinct(self, items: Items) -> Bit:
        """Whether no two items that are there are equal."""
        rows = self.numbers_of(items)
        same = []
        for place, (there, item) in enumerate(rows):
            for before, earlier in rows[:place]:
                equal = self.numbers.equal(item, earlier)
                same.append(every(self.gates, (there, before, equal)))
        return some(self.gates, same) ^ 1

    def contains(self, number: Value, items: Items) -> Bit:
        """Whether an item that is there equals the number (or list)."""
        found = [self.gates.both(there, self.equal(number, item)) for there, item in items.entries]
        return some(self.gates, found)

    def equal(self, a: Value, b: Value) -> Bit:
        """Numbers by value, lists by length and item for item."""
        if isinstance(a, tuple) and isinstance(b, tuple):
            return self.numbers.equal(a, b)
        if not isinstance(a, Items) or not isinstance(b, Items):
            raise TooLargeToTranslateError("a comparison of a list with a number")
        if a.fixed and b.fixed:
            if len(a.entries) != len(b.entries):
                return FALSE
            pairs = zip(a.entries, b.entries, strict=True)
            return every(self.gates, (self.equal(x, y) for (_, x), (_, y) in pairs))
        same = [self.numbers.equal(self.length(a), self.length(b))]
        for place, there, item in self._placed(a):
            for other_place, other_there, other in self._placed(b):
                meet = every(self.gates, (there, other_there, self.numbers.equal(place, other_place)))
                same.append(self.gates.both(meet, self.equal(item, other) ^ 1) ^ 1)
        return every(self.gates, same)

    def _placed(self, items: Items) -> list[tuple[Number, Bit, Value]]:
        """(index among those that are there, present, item)."""
        found = []
        place = constant(0)
        for present, item in items.entries:
            found.append((place, present, item))
            place = self.numbers.add(place, (present, FALSE))
        return found

    def item(self, items: Items, index: Number) -> Value:
        """items[index], negative indexes from the end; anything where there is none."""
        fixed = known(index)
        if fixed is not None and items.fixed and -len(items.entries) <= fixed < len(items.entries):
            return items.entries[fixed][1]
        length = self.length(items)
        index = self.numbers.choose(index[-1], self.numbers.add(index, length), index)
        found: Value | None = None
        for place, present, item in self._placed(items):
            here = self.gates.both(present, self.numbers.equal(index, place))
            found = item if found is None else self.choose(here, item, found)
        return constant(0) if found is None else found

    def range(self, ends: Sequence[Number]) -> Items:
        """range(...), as long as it may get, its items there or not."""
        start, stop = (constant(0), ends[0]) if len(ends) == 1 else (ends[0], ends[1])
        step = ends[2] if len(ends) == 3 else constant(1)
        values = [known(end) for end in (start, stop, step)]
        if all(value is not None for value in values) and values[2] != 0:
            first, last, by = (value or 0 for value in values)
            return Items.of([constant(one) for one in range(first, last, by)])
        longest = longest_range(limits(start), limits(stop), limits(step))
        if longest > MOST_ITEMS:
            raise TooLargeToTranslateError(f"a range of up to {longest} items")
        entries: list[tuple[Bit, Value]] = []
        item = start
        for _ in range(longest):
            up = self.numbers.less(item, stop)
            down = self.numbers.less(stop, item)
            entries.append((choose(self.gates, step[-1], down, up), item))
            item = self.numbers.add(item, step)
        return Items(tuple(entries))
