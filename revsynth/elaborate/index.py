"""Bits of words: a single one, or some in a row."""

from __future__ import annotations

from revsynth.elaborate.bitwise import masked
from revsynth.elaborate.linear import less, linear, plain
from revsynth.elaborate.numbers import Bits, Number, bounds_of, pattern_of, settled, truth_number
from revsynth.elaborate.reach import Reach
from revsynth.elaborate.shifts import right_shift
from revsynth.logic.network import TRUE
from revsynth.spec import refusals
from revsynth.spec.arithmetic import Width


def bit(word: int | Bits, index: Number, width: Width, reach: Reach) -> Number:
    """Bit `index` of a word's value; it fails outside 0 ... bits - 1. A tree of bits - 1 selections."""
    builder = reach.builder
    level = pattern_of(word, width.bits)
    index = plain(builder, index)
    shown = {"index": index, "last": width.bits - 1}
    if isinstance(index, int):
        if not 0 <= index < width.bits:
            reach.fail(TRUE, refusals.BIT_REACHED, **shown)
            return 0
        return truth_number(level[index])
    outside = builder.or_(less(builder, index, 0), less(builder, width.bits - 1, index))
    reach.fail(outside, refusals.BIT_REACHED, **shown)
    for literal in index.literals[:-1] if index.lo < 0 else index.literals:
        pairs = zip(level[1::2], level[::2], strict=False)
        level = [builder.mux(literal, high, low) for high, low in pairs] + level[len(level) & -2 :]
    return truth_number(level[0])


def bit_slice(word: int | Bits, lo: Number, hi: Number, width: Width, reach: Reach) -> Number:
    """Bits lo to hi - 1 of a word's value as an unsigned number; it fails unless 0 <= lo <= hi <= bits."""
    builder = reach.builder
    lo, hi = plain(builder, lo), plain(builder, hi)
    parts = (less(builder, lo, 0), less(builder, hi, lo), less(builder, width.bits, hi))
    wrong = builder.any_of(parts)
    reach.fail(wrong, refusals.SLICE_REACHED, lo=lo, hi=hi, bits=width.bits)
    inside = reach.narrow(wrong ^ 1)
    if inside is None:
        return 0
    if isinstance(lo, int) and isinstance(hi, int):
        found = pattern_of(word, width.bits)[lo:hi]
        return settled(found, 0, (1 << len(found)) - 1)
    pattern = settled(pattern_of(word, width.bits), 0, width.mask)
    if isinstance(hi, int):
        pattern = settled(pattern_of(word, hi), 0, (1 << max(hi, 0)) - 1)
        return right_shift(pattern, lo, inside)
    most = min(bounds_of(hi)[1], width.bits)
    literals = []
    for place, literal in enumerate(pattern_of(pattern, most)):
        kept = masked(builder, truth_number(literal), less(builder, place, hi))
        literals.append(pattern_of(plain(builder, kept), 1)[0])
    below = settled(literals, 0, (1 << most) - 1)
    least = linear(builder, [(lo, 1)], 0, max(bounds_of(lo)[1], 0))
    return right_shift(below, least, inside)
