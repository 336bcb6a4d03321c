"""Rotations by words, as expressions say them: (x << r | x >> (n - r)) % 2**n.

Built part by part the two shifts would take twice the selections and more; together each bit of the count
costs n ANDs.
"""

from __future__ import annotations

import ast
from collections.abc import Sequence
from dataclasses import dataclass

from revsynth.elaborate.linear import less, plain
from revsynth.elaborate.numbers import Bits, Number, bounds_of, pattern_of, settled
from revsynth.elaborate.reach import Reach
from revsynth.spec import refusals

LINKS = 3
"""Operations of a chain that make up a rotation: a shift, the joining, the cut."""
_SHIFTS = (ast.LShift, ast.RShift)


@dataclass(frozen=True)
class Rotation:
    """What may be a rotation by `count`: `bits` and `cut` are to be n, and 2**n or its mask."""

    upward: bool
    count: ast.expr
    bits: ast.expr
    cut: ast.expr
    masked: bool

    def fits(self, bits: Number, cut: Number, x: Number) -> bool:
        """Whether the numbers are those of a rotation of x."""
        if not isinstance(bits, int) or not isinstance(cut, int) or not 0 < bits < 1 << 16:
            return False
        lo, hi = bounds_of(x)
        return cut + self.masked == 1 << bits and lo >= 0 and hi < 1 << bits


def rotation_at(operations: Sequence[ast.BinOp], position: int) -> Rotation | None:
    """The rotation that begins at an operation of a chain, by its form; None where there is none."""
    if position + LINKS > len(operations):
        return None
    first, joining, cut = operations[position : position + LINKS]
    second = joining.right
    if (
        not isinstance(first.op, _SHIFTS)
        or not isinstance(joining.op, ast.BitOr | ast.Add | ast.BitXor)
        or not isinstance(cut.op, ast.Mod | ast.BitAnd)
        or not isinstance(second, ast.BinOp)
        or not isinstance(second.op, _SHIFTS)
        or type(second.op) is type(first.op)
        or ast.dump(second.left) != ast.dump(first.left)
    ):
        return None
    up, down = (first, second) if isinstance(first.op, ast.LShift) else (second, first)
    for upward, here, there in ((True, up.right, down.right), (False, down.right, up.right)):
        if (
            isinstance(there, ast.BinOp)
            and isinstance(there.op, ast.Sub)
            and ast.dump(there.right) == ast.dump(here)
        ):
            return Rotation(upward, here, there.left, cut.right, isinstance(cut.op, ast.BitAnd))
    return None


def rotated(x: Number, count: Number, bits: int, upward: bool, reach: Reach) -> Number:
    """x of so many bits rotated; it fails where count < 0 or count > bits, since one of the shifts does."""
    builder = reach.builder
    known = plain(builder, count)
    outside = builder.or_(less(builder, known, 0), less(builder, bits, known))
    reach.fail(outside, refusals.NEGATIVE_SHIFT, count=known)
    pattern = pattern_of(plain(builder, x), bits)
    places = known.literals if isinstance(known, Bits) else pattern_of(known, max(known, 0).bit_length())
    for place, literal in enumerate(places):
        by = (1 << place) % bits if upward else -(1 << place) % bits
        turned = pattern[bits - by :] + pattern[: bits - by]
        pattern = [builder.mux(literal, new, old) for new, old in zip(turned, pattern, strict=True)]
    return settled(pattern, 0, (1 << bits) - 1)
