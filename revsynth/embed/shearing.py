"""Adding inputs to inputs where that makes the exclusive sum of a function much shorter.

A carry of two words a and b has 2**k products, but about k once every a[i] has become a[i] ^ b[i]; in place,
where inputs need not be kept, such a change costs one CNOT. (Linear transformations of the variables are an
old means of shortening; here pairs are tried one by one.)
"""

from __future__ import annotations

from collections.abc import Sequence

from revsynth.embed.line_table import turned
from revsynth.logic.decomposition import decompose
from revsynth.logic.truth_table import Column, variable

WORTHWHILE = 0.8
"""A pair is added where the price falls to this part of it at least."""
FEWEST_CUBES = 24
MOST_CUBES = 4096
"""Sums of fewer or more cubes are left as they are: short enough, or slow to try."""
IRREGULAR = 10
"""Above SMALL_INPUTS so are those with over a cube for so many inputs; random functions have one for 7."""
SMALL_INPUTS = 10
MOST_INPUTS = 22


def sheared(
    column: Column, inputs: int, changeable: Sequence[int], prices: Sequence[int]
) -> tuple[list[tuple[int, int]], Column]:
    """Pairs (i, j), first done first, "input i becomes i ^ j", and the function of the inputs after them.

    Only inputs in `changeable` are changed. Greedy and deterministic; prices as for `decompose`.
    """
    if inputs > MOST_INPUTS:
        return [], column
    start = decompose(column[None], inputs, prices)
    if start is None or not FEWEST_CUBES <= len(start) <= MOST_CUBES:
        return [], column
    if inputs > SMALL_INPUTS and IRREGULAR * len(start) > 1 << inputs:
        return [], column
    best = start.price(prices)
    steps: list[tuple[int, int]] = []
    for place in sorted(changeable, reverse=True):
        for other in reversed(range(inputs)):
            if other == place:
                continue
            tried = column ^ (variable(inputs, other) & (column ^ turned(column, inputs, place)))
            found = decompose(tried[None], inputs, prices)
            if found is not None and found.price(prices) <= WORTHWHILE * best:
                best, column = found.price(prices), tried
                steps.append((place, other))
    return steps, column
