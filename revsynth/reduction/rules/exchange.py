"""Two gates on one target whose controls differ at two lines become two others."""

from __future__ import annotations

from collections.abc import Iterator

from revsynth.reduction.masks import Masked, Masks
from revsynth.reduction.rules.model import Rule


def _third(gate: Masks, other: Masks, line: int) -> tuple[int, int]:
    """The literal on a line (a mask) that is neither gate's: of 1, 0 and none."""
    return line & ~(gate[1] | other[1]), line & ~(gate[2] | other[2])


def exchange(gates: Masked) -> Iterator[Masked]:
    """The other forms of two products that differ at two lines.

    With x, y the literals of one gate there and u, v those of the other (1, 0 or none, the XOR of two of them
    is the third): xy + uv = x(y + v) + (x + u)v = (x + u)y + u(y + v); and x + v = (not x) + (not v).
    """
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
    care, other_care = (first[1] | first[2]) & differ, (second[1] | second[2]) & differ
    if care and other_care and not care & other_care:
        yield (
            (first[0], first[1] ^ care, first[2] ^ care),
            (first[0], second[1] ^ other_care, second[2] ^ other_care),
        )


EXCHANGE = Rule(
    name="exchange",
    size=2,
    source="linking of two products at distance 2: Song, Perkowski, IEEE TCAD 15(4), 1996",
    rewrite=exchange,
)
