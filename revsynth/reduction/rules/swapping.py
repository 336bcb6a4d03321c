"""Size-6 templates: three gates that swap two lines under a condition, in all their forms."""

from __future__ import annotations

from collections.abc import Iterator

from revsynth.reduction.masks import Masked, Masks
from revsynth.reduction.rules.model import Rule


def swap(gates: Masked) -> Iterator[Masked]:
    """The forms of a b a where a flips line l reading k, and b flips k reading l and all else that a reads.

    Where b's other controls hold the three swap l and k, and flip both if the two polarities differ; elsewhere the
    outer two undo each other. So the outer gates need no other controls, the two lines may trade their parts, and
    both polarities may turn together.
    """
    outer, inner, again = gates
    if outer != again or not outer[0] or not inner[0]:
        return
    outer_care, inner_care = outer[1] | outer[2], inner[1] | inner[2]
    both = outer[0] | inner[0]
    if not (outer_care & inner[0] and inner_care & outer[0]):
        return
    if outer[1] & ~(inner[1] | both) or outer[2] & ~(inner[2] | both):
        return
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
