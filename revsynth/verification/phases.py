"""Phases omega**p, omega = exp(i pi/4), of many lanes at once: p modulo 8 in three bit planes.

A plane is a column as in `classical`; plane 0 is the least significant bit of p.
"""

from __future__ import annotations

from typing import TypeAlias

from revsynth.verification.classical import Column

Phases: TypeAlias = tuple[Column, Column, Column]
"""Planes 0, 1 and 2."""

NO_PHASE: Phases = (0, 0, 0)


def turned(phases: Phases, where: Column, amount: int) -> Phases:
    """Add `amount` modulo 8 in the lanes of `where`."""
    p0, p1, p2 = phases
    if amount & 1:
        carry = p0 & where
        p0 ^= where
        p2 ^= p1 & carry
        p1 ^= carry
    if amount & 2:
        p2 ^= p1 & where
        p1 ^= where
    if amount & 4:
        p2 ^= where
    return p0, p1, p2


def added(phases: Phases, where: Column, other: Phases) -> Phases:
    """Add `other` modulo 8 in the lanes of `where`."""
    a0, a1, a2 = phases
    b0 = other[0] & where
    b1 = other[1] & where
    carry = a0 & b0
    half = a1 ^ b1
    return a0 ^ b0, half ^ carry, a2 ^ (other[2] & where) ^ ((a1 & b1) | (half & carry))


def negated(phases: Phases, where: Column) -> Phases:
    """Minus the phase, modulo 8, in the lanes of `where`."""
    p0, p1, p2 = phases
    return p0, p1 ^ (p0 & where), p2 ^ ((p0 | p1) & where)


def difference(later: Phases, earlier: Phases, ones: Column) -> Phases:
    """`later` - `earlier` modulo 8, lane by lane."""
    if later == earlier:
        return NO_PHASE
    b0, b1, b2 = later
    a0, a1, a2 = earlier
    borrow = (b0 ^ ones) & a0
    d1 = b1 ^ a1 ^ borrow
    borrow = ((b1 ^ ones) & (a1 | borrow)) | (a1 & borrow)
    return b0 ^ a0, d1, b2 ^ a2 ^ borrow


def chosen(where: Column, one: Phases, other: Phases) -> Phases:
    """`one` in the lanes of `where`, `other` elsewhere."""
    if one == other:
        return one
    return (
        other[0] ^ (where & (one[0] ^ other[0])),
        other[1] ^ (where & (one[1] ^ other[1])),
        other[2] ^ (where & (one[2] ^ other[2])),
    )


def constant(phases: Phases, ones: Column) -> int | None:
    """The phase where it is the same in every lane, else None."""
    amount = 0
    for plane, column in enumerate(phases):
        if column == ones:
            amount |= 1 << plane
        elif column:
            return None
    return amount


def at_lane(phases: Phases, lane: int) -> int:
    """The phase in one lane, 0 to 7."""
    return sum(((column >> lane) & 1) << plane for plane, column in enumerate(phases))
