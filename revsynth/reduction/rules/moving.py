"""The moving rule: gates that may trade places, and those that may once a control turns its polarity."""

from __future__ import annotations

from collections.abc import Iterator

from revsynth.reduction.masks import Masked, Masks
from revsynth.reduction.rules.model import Rule


def cross(first: Masks, second: Masks, *, turn: bool = True) -> tuple[Masks, Masks] | None:
    """The same two gates in the other order, second one first, or None where they cannot pass.

    They pass unchanged where they commute. With `turn` also where one flips a line that the other reads and
    does so whenever the other might fire: the other then goes on with the opposite literal on that line.
    A NOT, which has no controls, passes everything that way.
    """
    target, positive, negative = first
    other, other_positive, other_negative = second
    if positive & other_negative or negative & other_positive:
        return second, first
    read = target & (other_positive | other_negative)
    read_back = other & (positive | negative)
    if not read and not read_back:
        return second, first
    if not turn or (read and read_back):
        return None
    if read:
        if positive & ~other_positive or negative & ~other_negative:
            return None
        return (other, other_positive ^ read, other_negative ^ read), first
    if other_positive & ~positive or other_negative & ~negative:
        return None
    return second, (target, positive ^ read_back, negative ^ read_back)


def move(gates: Masked) -> Iterator[Masked]:
    """Two gates in the other order, where that needs no third one."""
    first, second = gates
    passed = cross(first, second)
    if passed is not None:
        yield passed


MOVING = Rule(
    name="moving",
    size=2,
    source="moving rule: Miller, Maslov, Dueck, DAC 2003; turned polarities: by cases on the controls",
    rewrite=move,
)
