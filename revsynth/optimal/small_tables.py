"""Complete tables of optimal circuits on up to three lines: every permutation, in a tenth of a second.

The cost of a circuit is lexicographic: gates, then Toffolis, then control literals; or Toffolis first. It
adds up over gates, so the cheapest circuits are shortest paths from the identity over all 40,320
permutations, those of equal gates and Toffolis at a time (Dijkstra, Numerische Mathematik 1, 1959).

Source: Shende, Prasad, Markov, Hayes, "Synthesis of reversible logic circuits", IEEE TCAD 22(6), 2003.
"""

from __future__ import annotations

import math
from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from functools import lru_cache
from itertools import chain, permutations, product
from typing import Literal

import numpy as np
from numpy.typing import NDArray

from revsynth.cascade.model import Cascade, Gate
from revsynth.options import Controls

MOST_LINES = 3
First = Literal["gates", "toffolis"]
"""What is made small first."""

_WIDTH = 3
"""Bits an image in the codes of halves."""
_UNIT = 1 << 8
"""More than any circuit here has of literals, Toffolis or gates."""


@dataclass(frozen=True)
class Cost:
    """What a circuit takes."""

    gates: int
    toffolis: int
    literals: int


@dataclass(frozen=True)
class SmallTable:
    """The cheapest circuit of every permutation of `lines` lines.

    images: uint8 (count, 2**lines), ascending as words of digits, image of 0 first; cost: int32 (count,), the
    three costs as digits to the base `_UNIT`, the first one highest.
    """

    lines: int
    first: First
    gates: tuple[Gate, ...]
    images: NDArray[np.uint8]
    cost: NDArray[np.int32]
    _after: NDArray[np.int32]

    def __len__(self) -> int:
        return len(self.cost)

    def index(self, images: Sequence[int]) -> int:
        """The row of a permutation; raises ValueError where it is none of so many lines."""
        if sorted(images) != list(range(1 << self.lines)):
            raise ValueError(f"a permutation of {self.lines} lines is wanted, not {list(images)}")
        first, second = _ranks(self.lines)
        half = (len(images) + 1) // 2
        return int(first[_code(images[:half])] + second[_code(images[half:])])

    def cost_of(self, row: int) -> Cost:
        """What the cheapest circuit of a row takes."""
        high, literals = divmod(int(self.cost[row]), _UNIT)
        high, low = divmod(high, _UNIT)
        return Cost(high, low, literals) if self.first == "gates" else Cost(low, high, literals)

    def cascade(self, row: int) -> Cascade:
        """The cheapest circuit of a row; among equals the gate that comes first in `gates` ends it."""
        gates: list[Gate] = []
        weights = [_weight(gate, self.first) for gate in self.gates]
        while self.cost[row]:
            before = self._after[:, row]
            step = next(
                index
                for index, weight in enumerate(weights)
                if self.cost[before[index]] + weight == self.cost[row]
            )
            gates.append(self.gates[step])
            row = int(before[step])
        return Cascade.from_gates(self.lines, gates[::-1])


def gates_on(lines: int, controls: Controls) -> tuple[Gate, ...]:
    """Every NOT with any controls on so many lines, fewest controls first."""
    literals = (None, 0) if controls == "positive" else (None, 0, 1)
    found = [
        Gate(target, tuple(2 * line + c for line, c in enumerate(choice) if c is not None))
        for target in range(lines)
        for choice in product(literals, repeat=lines)
        if choice[target] is None
    ]
    return tuple(sorted(found, key=lambda gate: (len(gate.controls), gate.target, gate.controls)))


@lru_cache(maxsize=12)
def small_table(lines: int, controls: Controls = "mixed", first: First = "gates") -> SmallTable:
    """The table for so many lines; raises ValueError for more than three."""
    if not 0 <= lines <= MOST_LINES:
        raise ValueError(f"complete tables go up to {MOST_LINES} lines, not {lines}")
    images, codes = _all_permutations(lines)
    gates = gates_on(lines, controls)
    after = np.empty((len(gates), len(images)), dtype=np.int32)
    for index, gate in enumerate(gates):
        first_half, second_half = _ranks_after(lines, gate)
        after[index] = first_half.take(codes[0]) + second_half.take(codes[1])
    return SmallTable(lines, first, gates, images, _shortest_paths(gates, after, first), after)


def _shortest_paths(gates: tuple[Gate, ...], after: NDArray[np.int32], first: First) -> NDArray[np.int32]:
    """The cost of every row. What a row takes is settled once all rows of fewer gates or Toffolis are.

    A gate permutes the rows, so the rows that it leads to from different ones are different.
    """
    far = np.iinfo(np.int32).max >> 1
    cost = np.full(after.shape[1], far, dtype=np.int32)
    cost[0] = 0
    ahead = np.ones(len(cost), dtype=bool)
    weights = [np.int32(_weight(gate, first)) for gate in gates]
    while ahead.any():
        nearest = int(cost[ahead].min()) // _UNIT
        rows = np.flatnonzero(ahead & (cost // _UNIT == nearest))
        ahead[rows] = False
        costs = cost[rows]
        for weight, to in zip(weights, after, strict=True):
            reached = to[rows]
            cost[reached] = np.minimum(cost[reached], costs + weight)
    return cost


def _weight(gate: Gate, first: First) -> int:
    toffoli = int(len(gate.controls) > 1)
    high, low = (1, toffoli) if first == "gates" else (toffoli, 1)
    return (high * _UNIT + low) * _UNIT + len(gate.controls)


@lru_cache(maxsize=4)
def _all_permutations(lines: int) -> tuple[NDArray[np.uint8], tuple[NDArray[np.uint16], NDArray[np.uint16]]]:
    """Ascending, uint8 (count, 2**lines), and the codes of their halves."""
    size = 1 << lines
    flat = np.fromiter(chain.from_iterable(permutations(range(size))), dtype=np.uint8)
    images = flat.reshape(-1, size)
    return images, _codes(images)


def _codes(images: NDArray[np.uint8]) -> tuple[NDArray[np.uint16], NDArray[np.uint16]]:
    """The halves of permutations as words of three bits an image, the first image highest."""
    half = (images.shape[1] + 1) // 2
    found = []
    for part in (images[:, :half], images[:, half:]):
        code = np.zeros(len(images), dtype=np.uint16)
        for column in part.T:
            code = code << np.uint16(_WIDTH) | column
        found.append(code)
    return found[0], found[1]


def _ranks_after(lines: int, gate: Gate) -> tuple[NDArray[np.int32], NDArray[np.int32]]:
    """For the codes of each half: its share of the place of the permutation once the gate has acted."""
    ranks = _ranks(lines)
    found = []
    for half in ranks:
        code = np.arange(len(half), dtype=np.uint16)
        one = np.uint16(sum(1 << place for place in range(0, len(half).bit_length() - 1, _WIDTH)))
        fires = np.full(len(half), one)
        for control in gate.controls:
            bit = code >> np.uint16(control >> 1)
            fires &= ~bit if control & 1 else bit
        found.append(half[code ^ fires << np.uint16(gate.target)])
    return found[0], found[1]


@lru_cache(maxsize=4)
def _ranks(lines: int) -> tuple[NDArray[np.int32], NDArray[np.int32]]:
    """The places of permutations in ascending order as sums of a number for each half, by their codes.

    The first half counts all choices before it, the second one the orders of what is left.
    """
    size = 1 << lines
    half = (size + 1) // 2
    rest = size - half
    first = np.zeros(1 << (_WIDTH * half), dtype=np.int32)
    for place, choice in enumerate(permutations(range(size), half)):
        first[_code(choice)] = place * math.factorial(rest)
    second = np.zeros(1 << (_WIDTH * rest), dtype=np.int32)
    for choice in permutations(range(size), rest):
        rank = 0
        for place, image in enumerate(choice):
            rank = rank * (rest - place) + sum(other < image for other in choice[place + 1 :])
        second[_code(choice)] = rank
    return first, second


def _code(images: Iterable[int]) -> int:
    code = 0
    for image in images:
        code = code << _WIDTH | image
    return code
