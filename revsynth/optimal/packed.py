"""Permutations of four lines as words of 64 bits, and the gates that act on them."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
from numpy.typing import NDArray

from revsynth.cascade.model import Gate, Line

LINES = 4
IDENTITY = 0xFEDCBA9876543210
Words = NDArray[np.uint64]
"""Bits 4x ... 4x+3 of a word hold the image of x."""

GATES = tuple(
    Gate(target, tuple(2 * line for line in range(LINES) if controls >> line & 1))
    for target in range(LINES)
    for controls in range(1 << LINES)
    if not controls >> target & 1
)
"""NOT, CNOT, Toffoli and 3-control Toffoli with positive controls: 32 gates."""
TARGETS = np.array([gate.target for gate in GATES], dtype=np.uint64)
CONTROLS = np.array([sum(1 << (c >> 1) for c in gate.controls) for gate in GATES], dtype=np.uint64)

_SWAPS = (2, 1, 0, 2, 0, 1, 2, 0) * 3


def pack(images: Sequence[int]) -> int:
    """The word of a permutation; raises ValueError where 0 ... 15 are not each hit once."""
    if sorted(images) != list(range(1 << LINES)):
        raise ValueError(f"16 images, each of 0 ... 15 once, are wanted, not {list(images)}")
    return sum(int(image) << (4 * x) for x, image in enumerate(images))


def unpack(word: int) -> list[int]:
    """The images of 0 ... 15."""
    return [word >> (4 * x) & 15 for x in range(1 << LINES)]


def namings() -> list[tuple[Line, ...]]:
    """The namings in the order of the kernel: line l of the named word is line naming[l] of the original."""
    naming = list(range(LINES))
    found = []
    for swap in _SWAPS:
        found.append(tuple(naming))
        naming[swap], naming[swap + 1] = naming[swap + 1], naming[swap]
    return found


def points() -> NDArray[np.uint64]:
    """For `signatures`: a number for each pair of states, equal for pairs that relabelling or exchange joins.

    uint64 (256,), entry 16 x + y. The numbers are those of the generator SplitMix64 (Steele, Lea, Flood,
    "Fast splittable pseudorandom number generators", OOPSLA 2014).
    """
    found = []
    for x in range(16):
        for y in range(16):
            apart = sorted(((x & ~y).bit_count(), (~x & y & 15).bit_count()))
            found.append(_mixed(25 * (x & y).bit_count() + 5 * apart[0] + apart[1] + 1))
    return np.array(found, dtype=np.uint64)


def _mixed(number: int) -> int:
    z = number * 0x9E3779B97F4A7C15 & 0xFFFFFFFFFFFFFFFF
    z = (z ^ z >> 30) * 0xBF58476D1CE4E5B9 & 0xFFFFFFFFFFFFFFFF
    z = (z ^ z >> 27) * 0x94D049BB133111EB & 0xFFFFFFFFFFFFFFFF
    return z ^ z >> 31
