"""Two gates on one target whose controls differ at two lines become two others."""

from __future__ import annotations

from collections.abc import Iterator

from revsynth.reduction.masks import Masked, Masks
from revsynth.reduction.rules.model import Rule


def _third(gate: Masks, other: Masks, line: int) -> tuple[int, int]:
    """The literal on a line (a mask) that is neither gate's: of 1, 0 and none, the XOR of two is the third."""
    return line & ~(gate[1] ^ other[1]), line & ~(gate[2] ^ other[2])


def exchange(gates: Masked) -> Iterator[Masked]:
    """Both other pairs: with x, y the literals of one gate and u, v of the other, xy + uv = x(y+v) + (x+u)v."""
    first, second = gates
    if first[0] != second[0]:
        return
    differ = (first[1] ^ second[1]) | (first[2] ^ second[2])
    low = differ & -differ
    high = differ ^ low
    if not high or high & (high - 1):
        return
    for kept, turned in ((low, high), (high, low)):
        one = _third(first, second, turned)
        two = _third(first, second, kept)
        yield (
            (first[0], first[1] & ~turned | one[0], first[2] & ~turned | one[1]),
            (first[0], second[1] & ~kept | two[0], second[2] & ~kept | two[1]),
        )


EXCHANGE = Rule(
    name="exchange",
    size=2,
    source="linking of two products at distance 2: Song, Perkowski, IEEE TCAD 15(4), 1996",
    rewrite=exchange,
)
