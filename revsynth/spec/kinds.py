"""What is known of a part of an expression before it is evaluated: a number or a list, and its limits."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal, TypeAlias

from revsynth.spec import bounds
from revsynth.spec.arithmetic import Width
from revsynth.spec.bounds import Interval
from revsynth.spec.model import Constant, Word


@dataclass(frozen=True, slots=True)
class NumberKind:
    """An integer or truth value between `lo` and `hi`; `width` where it is a word's own value."""

    lo: int
    hi: int
    width: Width | None = None

    @property
    def interval(self) -> Interval:
        """Least and greatest value."""
        return self.lo, self.hi


@dataclass(frozen=True, slots=True)
class ListKind:
    """A list of at most `length` items (exactly so many where `exact`), all of kind `item`.

    `form` is the Python type: items of different types are never equal. 'varied' is not known.
    """

    item: Kind
    length: int
    exact: bool = True
    form: Literal["list", "tuple", "range", "varied"] = "list"


@dataclass(frozen=True, slots=True)
class Unreached:
    """An item of a list that has none: it goes with everything, since it never comes to be."""


@dataclass(frozen=True, slots=True)
class MixedKind:
    """Sometimes a number, sometimes a list: it may be there, but not be used."""


Kind: TypeAlias = NumberKind | ListKind | Unreached | MixedKind

UNREACHED = Unreached()
MIXED = MixedKind()
TRUTH = NumberKind(0, 1)


def join(x: Kind, y: Kind) -> Kind:
    """The kind of something that may be x or y."""
    if x == y:
        return x
    if isinstance(x, Unreached):
        return y
    if isinstance(y, Unreached):
        return x
    if isinstance(x, NumberKind) and isinstance(y, NumberKind):
        lo, hi = bounds.union(x.interval, y.interval)
        return NumberKind(lo, hi, x.width if x.width == y.width else None)
    if isinstance(x, ListKind) and isinstance(y, ListKind):
        exact = x.exact and y.exact and x.length == y.length
        form = x.form if x.form == y.form else "varied"
        return ListKind(join(x.item, y.item), max(x.length, y.length), exact, form)
    return MIXED


def join_all(kinds: list[Kind]) -> Kind:
    """The kind of something that may be any of these."""
    result: Kind = UNREACHED
    for kind in kinds:
        result = join(result, kind)
    return result


def word_kind(word: Word) -> Kind:
    """A word's value, or an array's list of values."""
    lo, hi = bounds.word(word.bits, word.signed)
    one = NumberKind(lo, hi, Width(word.bits, word.signed))
    return one if word.count is None else ListKind(one, word.count)


def constant_kind(value: Constant, depth: int = 0) -> Kind:
    """The kind of a constant; raises RecursionError below 50 levels of lists, TypeError for other types."""
    if isinstance(value, list):
        if depth >= 50:
            raise RecursionError
        if value and all(type(item) is int for item in value):
            return ListKind(NumberKind(min(value), max(value)), len(value))  # type: ignore[arg-type]
        return ListKind(join_all([constant_kind(item, depth + 1) for item in value]), len(value))
    if not isinstance(value, int):
        raise TypeError
    return NumberKind(int(value), int(value))
