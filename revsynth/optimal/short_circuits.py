"""All permutations of four lines that take at most three gates with controls of both polarities.

About 320,000 functions, found in some tenths of a second without a compiler, for looking up short runs of
gates: two of these functions in a row are a circuit of up to five gates. Words are those of `packed`.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import lru_cache

import numpy as np
from numpy.typing import NDArray

from revsynth.cascade.model import Gate
from revsynth.cascade.price import gate_t
from revsynth.optimal.packed import IDENTITY, LINES, Words
from revsynth.optimal.small_tables import gates_on
from revsynth.options import Controls, Uncompute

MOST_GATES = 3
MOST_MET = 5
"""Circuits of so many gates are found in two parts; of six it takes a tenth of a second."""
_ONES = np.uint64(0x1111111111111111)
_UNIT = 64
"""More than the literals of any circuit here."""


@dataclass(frozen=True)
class Level:
    """The permutations of one size. words: ascending; cost: T gates times 64, plus literals, the least there
    is at this size; last: the index of the gate that ends such a circuit.
    """

    words: Words
    cost: NDArray[np.int32]
    last: NDArray[np.uint8]

    def find(self, words: Words) -> NDArray[np.int64]:
        """The place of each word, -1 where it is not of this size."""
        place = np.minimum(np.searchsorted(self.words, words), len(self.words) - 1)
        return np.where(self.words[place] == words, place, -1)


@dataclass(frozen=True)
class ShortCircuits:
    """Levels 0 ... 3 for one set of gates."""

    gates: tuple[Gate, ...]
    levels: tuple[Level, ...]

    def cheaper(self, word: int, gates: int, t: int, literals: int) -> list[Gate] | None:
        """The cheapest shortest circuit, where it is cheaper than (gates, t, literals) and takes no more T.

        None where there is none, or the shortest one has more than five gates: of `gates` 3 or less it takes
        some microseconds, of 4 a tenth and of 5 one millisecond.
        """
        wanted = np.array([word], dtype=np.uint64)
        own = t * _UNIT + literals
        for size in range(min(gates, MOST_GATES) + 1):
            place = int(self.levels[size].find(wanted)[0])
            if place >= 0:
                cost = int(self.levels[size].cost[place])
                return self._circuit(size, place) if _is_cheaper(size, cost, gates, own) else None
        for more in range(1, min(gates, MOST_MET) - MOST_GATES + 1):
            found = self._meeting(word, more)
            if found is not None:
                cost, circuit = found
                return circuit if _is_cheaper(MOST_GATES + more, cost, gates, own) else None
        return None

    def shortest(self, word: int) -> list[Gate] | None:
        """The cheapest of the shortest circuits, None where it takes more than five gates."""
        return self.cheaper(word, MOST_MET + 1, np.iinfo(np.int32).max // _UNIT, 0)

    def _meeting(self, word: int, more: int) -> tuple[int, list[Gate]] | None:
        """word = outer after inner, with inner of three gates and outer of `more`: inner = outer^-1 word."""
        outer, inner = self.levels[more], self.levels[MOST_GATES]
        # The inverse of a function of so many gates takes as many and costs the same.
        places = inner.find(_composed_all(outer.words, word))
        hits = np.flatnonzero(places >= 0)
        if not len(hits):
            return None
        costs = outer.cost[hits] + inner.cost[places[hits]]
        best = int(np.argmin(costs))
        behind = self._circuit(more, int(hits[best]))
        return int(costs[best]), self._circuit(MOST_GATES, int(places[hits[best]])) + behind[::-1]

    def _circuit(self, size: int, place: int) -> list[Gate]:
        found: list[Gate] = []
        while size:
            level = self.levels[size]
            index = int(level.last[place])
            found.append(self.gates[index])
            word = _after(level.words[place : place + 1], self.gates[index])
            size -= 1
            place = int(self.levels[size].find(word)[0])
        return found[::-1]


def _is_cheaper(size: int, cost: int, gates: int, own: int) -> bool:
    """Fewer gates with no more T, or as many with less T, or literals."""
    return cost // _UNIT <= own // _UNIT and (size, cost) < (gates, own)


@lru_cache(maxsize=4)
def short_circuits(controls: Controls, uncompute: Uncompute) -> ShortCircuits:
    """The levels for the gates allowed, costs by `cascade.price`."""
    gates = gates_on(LINES, controls)
    prices = [gate_t(len(gate.controls), uncompute) * _UNIT + len(gate.controls) for gate in gates]
    first = Level(np.array([IDENTITY], dtype=np.uint64), np.zeros(1, np.int32), np.zeros(1, np.uint8))
    levels = [first]
    for _ in range(MOST_GATES):
        levels.append(_next(levels, gates, prices))
    return ShortCircuits(gates, tuple(levels))


def _next(levels: list[Level], gates: tuple[Gate, ...], prices: list[int]) -> Level:
    before = levels[-1]
    words = np.concatenate([_after(before.words, gate) for gate in gates])
    cost = np.concatenate([before.cost + np.int32(price) for price in prices])
    last = np.repeat(np.arange(len(gates), dtype=np.uint8), len(before.words))
    cheapest_first = np.argsort(cost, kind="stable")
    words, cost, last = words[cheapest_first], cost[cheapest_first], last[cheapest_first]
    different, first = np.unique(words, return_index=True)
    new = np.ones(len(different), dtype=bool)
    for level in levels[-2:]:
        new &= level.find(different) < 0
    return Level(different[new], cost[first[new]], last[first[new]])


def _after(words: Words, gate: Gate) -> Words:
    """Each permutation, and then the gate."""
    fires = np.full(len(words), _ONES)
    for control in gate.controls:
        bits = words >> np.uint64(control >> 1)
        fires &= ~bits if control & 1 else bits
    return words ^ fires << np.uint64(gate.target)


def _composed_all(outer: Words, inner: int) -> Words:
    """Each of the words after one permutation."""
    found = np.zeros_like(outer)
    for x in range(16):
        image = np.uint64(4 * (inner >> (4 * x) & 15))
        found |= (outer >> image & np.uint64(15)) << np.uint64(4 * x)
    return found
