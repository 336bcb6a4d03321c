"""Size-5 templates: two gates trade places and leave a third one, which is absorbed at once."""

from __future__ import annotations

from collections.abc import Iterator

from revsynth.reduction.masks import Masked, Masks, commute
from revsynth.reduction.rules.merging import merge
from revsynth.reduction.rules.model import Rule


def remainder(first: Masks, second: Masks) -> Masks | None:
    """The gate r with first, second = second, first, r; None where they commute or read each other.

    r has the target of the gate that reads the other's, and all other controls; it commutes with both.
    """
    if commute(first, second):
        return None
    read = first[0] & (second[1] | second[2])
    if not read:
        first, second = second, first
        read = first[0] & (second[1] | second[2])
    elif second[0] & (first[1] | first[2]):
        return None
    return second[0], first[1] | second[1] & ~read, first[2] | second[2] & ~read


def _merged(first: Masks, second: Masks) -> Iterator[Masked]:
    if first[0] == second[0]:
        yield from merge((first, second))


def pass_over(gates: Masked) -> Iterator[Masked]:
    """a b x = b a r x = b r a x and x a b = x r b a = x b r a, where x merges with its new neighbour."""
    first, middle, last = gates
    left = remainder(first, middle)
    if left is not None:
        for one in _merged(left, last):
            yield (middle, first, *one)
        for one in _merged(first, last):
            yield (middle, left, *one)
    right = remainder(middle, last)
    if right is not None:
        for one in _merged(first, right):
            yield (*one, last, middle)
        for one in _merged(first, last):
            yield (*one, right, middle)


PASSING = Rule(
    name="passing",
    size=3,
    source="class of size-5 templates: Maslov, Dueck, Miller, IEEE TCAD 24(6), 2005; merged with `merging`",
    rewrite=pass_over,
)
