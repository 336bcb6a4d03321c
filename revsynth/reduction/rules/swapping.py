"""Size-6 templates: three gates that swap two lines under a condition, in all their forms."""

from __future__ import annotations

from collections.abc import Iterator

from revsynth.reduction.masks import Masked, Masks
from revsynth.reduction.rules.model import Rule


def swap(gates: Masked) -> Iterator[Masked]:
    """The forms of a b a, where each of a and b flips a line that the other reads, and of what it turns into.

    Let K be the other controls of a, L those of b. Where K and L hold, a b a swaps the two lines, and flips
    both if the polarities differ.
    K within L: elsewhere a undoes itself, so it needs no K, the lines may trade their parts, and both
    polarities may turn together.
    L within K: a b a = c a b = b a c, where c is b with all the controls of K.
    """
    first, middle, last = gates
    if not _read_each_other(first, middle) or not _read_each_other(middle, last):
        return
    both = first[0] | middle[0]
    if first == last:
        if _within(first, middle, both):
            yield from _swaps(first, middle, both)
        if _within(middle, first, both):
            wide = _widened(middle, first, both)
            yield wide, first, middle
            yield middle, first, wide
    else:
        for narrow, wide in ((last, first), (first, last)):
            if _within(narrow, middle, both) and wide == _widened(narrow, middle, both):
                yield middle, narrow, middle


def _read_each_other(first: Masks, second: Masks) -> bool:
    return bool(first[0] & (second[1] | second[2]) and second[0] & (first[1] | first[2]))


def _within(inner: Masks, outer: Masks, both: int) -> bool:
    """Whether the controls of `inner`, those on the two lines aside, are all controls of `outer`."""
    return not (inner[1] & ~(outer[1] | both) or inner[2] & ~(outer[2] | both))


def _widened(gate: Masks, other: Masks, both: int) -> Masks:
    """The gate with the other one's controls too, those on the two lines aside."""
    return gate[0], gate[1] | other[1] & ~both, gate[2] | other[2] & ~both


def _swaps(outer: Masks, inner: Masks, both: int) -> Iterator[Masked]:
    rest = (inner[1] & ~both, inner[2] & ~both)
    odd = bool(outer[2] & both) != bool(inner[2] & both)
    for flipped, read in ((outer[0], inner[0]), (inner[0], outer[0])):
        for turned in (False, True):
            side = _reading(flipped, read, (0, 0), turned)
            yield side, _reading(read, flipped, rest, turned != odd), side


def _reading(target: int, line: int, rest: tuple[int, int], negative: bool) -> Masks:
    return target, rest[0] | (0 if negative else line), rest[1] | (line if negative else 0)


SWAPPING = Rule(
    name="swapping",
    size=3,
    source="class of size-6 templates: Maslov, Dueck, Miller, IEEE TCAD 24(6), 2005; polarities by cases",
    rewrite=swap,
)
