"""Complete tables of optimal circuits on up to three lines: every permutation, in a tenth of a second.

The cost of a circuit is lexicographic: gates, then Toffolis, then control literals; or Toffolis first. It
adds up over gates, so the cheapest circuits are shortest paths from the identity over all 40,320
permutations, relaxed gate by gate until nothing changes (Bellman, "On a routing problem", 1958).

Source: Shende, Prasad, Markov, Hayes, "Synthesis of reversible logic circuits", IEEE TCAD 22(6), 2003.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass
from functools import lru_cache
from itertools import permutations, product
from typing import Literal

import numpy as np
from numpy.typing import NDArray

from revsynth.cascade.model import Cascade, Gate
from revsynth.options import Controls

MOST_LINES = 3
First = Literal["gates", "toffolis"]
"""What is made small first."""

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
        return int(_ranks(np.array([images], dtype=np.uint8))[0])

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
    images = np.array(list(permutations(range(1 << lines))), dtype=np.uint8)
    gates = gates_on(lines, controls)
    after = np.empty((len(gates), len(images)), dtype=np.int32)
    for index, gate in enumerate(gates):
        acts = np.arange(1 << lines, dtype=np.uint8)
        fires = np.ones(1 << lines, dtype=bool)
        for control in gate.controls:
            fires &= (acts >> (control >> 1) & 1) != (control & 1)
        after[index] = _ranks(np.where(fires, acts ^ np.uint8(1 << gate.target), acts)[images])
    cost = np.full(len(images), np.iinfo(np.int32).max >> 1, dtype=np.int32)
    cost[0] = 0
    while True:
        before = cost.copy()
        for gate, rows in zip(gates, after, strict=True):
            np.minimum(cost, cost.take(rows) + np.int32(_weight(gate, first)), out=cost)
        if np.array_equal(before, cost):
            return SmallTable(lines, first, gates, images, cost, after)


def _weight(gate: Gate, first: First) -> int:
    toffoli = int(len(gate.controls) > 1)
    high, low = (1, toffoli) if first == "gates" else (toffoli, 1)
    return (high * _UNIT + low) * _UNIT + len(gate.controls)


def _ranks(images: NDArray[np.uint8]) -> NDArray[np.int32]:
    """The places of permutations in ascending order: uint8 (k, n) to int32 (k,).

    The place of the first half among all choices comes from one small table, the place of the second half
    among the orders of what is left from another.
    """
    size = images.shape[1]
    half = (size + 1) // 2
    width = np.uint16(max(1, (size - 1).bit_length()))
    first, second = _half_ranks(size, half)
    codes = []
    for part in (images[:, :half], images[:, half:]):
        code = np.zeros(len(images), dtype=np.uint16)
        for column in part.T:
            code = code << width | column
        codes.append(code)
    return first[codes[0]] + second[codes[1]]


@lru_cache(maxsize=8)
def _half_ranks(size: int, half: int) -> tuple[NDArray[np.int32], NDArray[np.int32]]:
    width = max(1, (size - 1).bit_length())

    def codes(count: int) -> list[int]:
        found = []
        for choice in permutations(range(size), count):
            code = 0
            for image in choice:
                code = code << width | image
            found.append(code)
        return found

    rest = size - half
    orders = math.factorial(rest)
    first = np.zeros(1 << (width * half), dtype=np.int32)
    first[codes(half)] = np.arange(math.perm(size, half), dtype=np.int32) * orders
    second = np.zeros(1 << (width * rest), dtype=np.int32)
    for choice, code in zip(permutations(range(size), rest), codes(rest), strict=True):
        rank = 0
        for place, image in enumerate(choice):
            rank = rank * (rest - place) + sum(other < image for other in choice[place + 1 :])
        second[code] = rank
    return first, second
