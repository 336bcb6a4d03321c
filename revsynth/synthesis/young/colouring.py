"""Splitting off one line: which states may be told apart by it in the middle, as two-colourings.

For a line, states that differ there alone are a pair, before the permutation and behind it. If each pair on
both sides gets one state of either colour, then a gate on the line before (turning it where the colour is not
the line's value) and one behind leave a permutation between them that keeps the line. Seen as a graph - pairs
are nodes, states are edges - every part is a cycle, or a path where images are free, and each has exactly two
colourings.
"""

from __future__ import annotations

from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

Images = NDArray[np.int64]
"""Shape (2**lines,): the image of each state, -1 where it is free; images that are there differ."""

Turned = NDArray[np.uint8]


class Colouring(NamedTuple):
    """One colouring, that in which the least state of each part has the line's value.

    part: int64 (2**lines,), the number of each state's part, -1 where its image is free; colour: uint8
    (2**lines,); parts: how many there are.
    """

    part: NDArray[np.int64]
    colour: NDArray[np.uint8]
    parts: int


def colouring(images: Images, line: int) -> Colouring:
    """The parts of a permutation (or a part of one) for a line, each with one of its two colourings.

    The walk is of all states at once: two steps along its part, again and again twice as far (pointer
    jumping), with the least state met and whether the colour changed on the way there.
    """
    size = len(images)
    state = np.arange(size, dtype=np.int64)
    there = images >= 0
    origin = np.full(size, -1, dtype=np.int64)
    origin[images[there]] = state[there]
    beside = np.where(there & there[state ^ (1 << line)], state ^ (1 << line), state)
    behind = origin[np.where(there, images, 0) ^ (1 << line)]
    behind = np.where(there & (behind >= 0), behind, state)
    step = behind[beside]
    turned = (beside != state) ^ (step != beside)
    least = 2 * state
    for _ in range(size.bit_length()):
        least = np.minimum(least, least[step] ^ turned)
        turned = turned ^ turned[step]
        step = step[step]
    least = np.minimum(least, least[beside] ^ (beside != state))
    root = least >> 1
    roots = np.flatnonzero((root == state) & there)
    number = np.full(size, -1, dtype=np.int64)
    number[roots] = np.arange(len(roots))
    colour = ((least & 1) ^ ((root >> line) & 1)).astype(np.uint8)
    return Colouring(np.where(there, number[root], -1), colour, len(roots))


def split(images: Images, line: int, colour: NDArray[np.uint8]) -> tuple[Images, Turned, Turned]:
    """What is left between the gates, and where the line is turned before and behind.

    colour: the line's value in the middle for each state. Returns (images between, turn before, turn behind):
    the turns uint8 (2**lines,), equal for both states of a pair, 2 where no state of the pair matters.
    """
    bit = 1 << line
    rows = np.flatnonzero(images >= 0)
    before = np.full(len(images), 2, dtype=np.uint8)
    behind = np.full(len(images), 2, dtype=np.uint8)
    first = (((rows >> line) & 1) ^ colour[rows]).astype(np.uint8)
    last = (((images[rows] >> line) & 1) ^ colour[rows]).astype(np.uint8)
    for place in (rows, rows ^ bit):
        before[place] = first
    for place in (images[rows], images[rows] ^ bit):
        behind[place] = last
    between = np.full(len(images), -1, dtype=np.int64)
    between[rows ^ (first.astype(np.int64) << line)] = images[rows] ^ (last.astype(np.int64) << line)
    return between, before, behind
