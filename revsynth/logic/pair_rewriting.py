"""Shortening an exclusive sum by rewriting pairs of cubes.

Two cubes that differ in d places are worth d other cubes: d = 0 cancels, d = 1 merges, d = 2 and d = 3
exchange a pair for two or three that may merge with others. A walk looks at all exchanges of the sum at once,
takes the one that saves most, and wanders among equally good sums (now and then a worse one) where none
saves.

Cubes are coded in one word: two bits an input (01 negated, 10 plain, 11 absent), above them the outputs it
feeds. In this code the third value of a place is the XOR of the other two, for the outputs too.

Source: N. Song, M. Perkowski, "Minimization of exclusive sum-of-products expressions for multiple-valued
input, incompletely specified functions", IEEE TCAD 15(4), 1996 (the exchanges).
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from revsynth.logic.cubes import ExclusiveSum

Codes = NDArray[np.uint64]
Indices = NDArray[np.int64]
Layout = tuple[tuple[int, int, int], ...]

_LOW_BITS = 0x5555555555555555
_ONE = np.uint64(1)
MAX_CODE_BITS = 64
MAX_COMPARED = 150_000
"""New cubes times old ones that one step compares; of more exchanges it takes some at random."""


@dataclass(frozen=True)
class _Candidates:
    """Exchanges. fresh: new cubes; first, second: the pair each was made from; parts: shape (candidates, 3),
    the new cubes of each exchange as indices into `fresh`, -1 where there is no third."""

    fresh: Codes
    first: Indices
    second: Indices
    parts: Indices


def fits(inputs: int, outputs: int) -> bool:
    """Whether cubes of that many inputs and outputs can be coded in one word."""
    return 2 * inputs + outputs <= MAX_CODE_BITS


def encode(cubes: ExclusiveSum) -> Codes:
    """One code a cube; raises ValueError where 2 * inputs + outputs exceeds 64."""
    n = cubes.inputs
    if not fits(n, cubes.outputs):
        raise ValueError(f"{n} inputs and {cubes.outputs} outputs do not fit a 64-bit code")
    codes = cubes.feeds << np.uint64(2 * n) if n < 32 else np.zeros_like(cubes.feeds)
    for i in range(n):
        place = np.uint64(i)
        care = (cubes.care >> place) & np.uint64(1)
        value = (cubes.value >> place) & np.uint64(1)
        codes |= (np.uint64(3) ^ (care << (np.uint64(1) - value))) << np.uint64(2 * i)
    # absent 11; plain: 11 ^ 01 = 10; negated: 11 ^ 10 = 01
    return codes


def decode(codes: Codes, inputs: int, outputs: int) -> ExclusiveSum:
    """The inverse of `encode`."""
    care = np.zeros(len(codes), dtype=np.uint64)
    value = np.zeros(len(codes), dtype=np.uint64)
    for i in range(inputs):
        pair = (codes >> np.uint64(2 * i)) & np.uint64(3)
        care |= (pair != 3).astype(np.uint64) << np.uint64(i)
        value |= (pair == 2).astype(np.uint64) << np.uint64(i)
    return ExclusiveSum(inputs, outputs, care, value, codes >> np.uint64(2 * inputs))


class Random:
    """Reproducible random words (S. Vigna's splitmix64 sequence), the same on every platform."""

    def __init__(self, seed: int) -> None:
        self._state = np.uint64(seed & (1 << 64) - 1)

    def words(self, count: int) -> NDArray[np.uint64]:
        """`count` random 64-bit words."""
        steps = np.arange(1, count + 1, dtype=np.uint64) * np.uint64(0x9E3779B97F4A7C15)
        z = self._state + steps
        if count:
            self._state = z[-1]
        z = (z ^ (z >> np.uint64(30))) * np.uint64(0xBF58476D1CE4E5B9)
        z = (z ^ (z >> np.uint64(27))) * np.uint64(0x94D049BB133111EB)
        return z ^ (z >> np.uint64(31))

    def fractions(self, count: int) -> NDArray[np.float64]:
        """`count` numbers in (0, 1]."""
        return ((self.words(count) >> np.uint64(11)).astype(np.float64) + 1.0) / float(1 << 53)


def rewrite(
    cubes: ExclusiveSum, prices: Sequence[int], *, steps: int, seed: int = 0, heat: float = 0.06
) -> ExclusiveSum:
    """Walk `steps` steps from a sum and return the cheapest sum met, for the same function.

    prices: the price of a cube of 0 ... n literals. heat: how much worse an exchange may be, as a part of the
    mean price of a cube; 0 takes only what saves or costs nothing. Deterministic for a seed.
    """
    walk = Walk(encode(cubes), cubes.inputs, prices, seed)
    best, best_price = walk.codes, walk.total()
    for _ in range(steps):
        if not walk.step(heat):
            break
        price = walk.total()
        if price < best_price:
            best, best_price = walk.codes, price
    return decode(best, cubes.inputs, cubes.outputs).in_order()


class Walk:
    """A sum under rewriting. `codes` is replaced, never changed in place."""

    def __init__(self, codes: Codes, inputs: int, prices: Sequence[int], seed: int = 0) -> None:
        self.codes = codes
        self._inputs = inputs
        self._prices = np.asarray(prices, dtype=np.int64)
        self._low = np.uint64(_LOW_BITS & ((1 << 2 * inputs) - 1))
        self._shift = np.uint64(2 * inputs)
        self._random = Random(seed)

    def price(self, codes: Codes) -> NDArray[np.int64]:
        """The price of each code."""
        absent = np.bitwise_count(codes & (codes >> np.uint64(1)) & self._low)
        prices: NDArray[np.int64] = self._prices[self._inputs - absent.astype(np.int64)]
        return prices

    def total(self) -> int:
        """The price of the sum."""
        return int(self.price(self.codes).sum())

    def _places(self, x: Codes) -> Codes:
        """From a XOR of codes: ones at the low bits of differing places; bit 2n stands for the outputs."""
        outputs = (x >> self._shift != 0).astype(np.uint64) << self._shift
        places: Codes = ((x | (x >> _ONE)) & self._low) | outputs
        return places

    def _whole(self, places: Codes) -> Codes:
        """All bits of the places whose low bits are set."""
        outputs = (np.uint64(0) - (places >> self._shift)) << self._shift
        return (places & self._low) * np.uint64(3) | outputs

    def _third(self, a: Codes, b: Codes) -> Codes:
        """The code with the third value in the places in which a and b differ."""
        x = a ^ b
        whole = self._whole(self._places(x))
        return (a & ~whole) | (x & whole)

    def step(self, heat: float) -> bool:
        """Merge what can be merged, or else make one exchange; False where nothing can be done at all."""
        first, second, distance = self._close_pairs()
        near = distance <= 1
        if near.any():
            self._merge(first[near].tolist(), second[near].tolist())
            return True
        if not len(first):
            return False
        candidates = self._candidates(first, second, distance)
        return self._apply_best(candidates, heat)

    def _close_pairs(self) -> tuple[Indices, Indices, NDArray[np.uint8]]:
        """Pairs at distance 0 ... 3."""
        size = len(self.codes)
        distance = np.bitwise_count(self._places(self.codes[:, None] ^ self.codes))
        flat = np.flatnonzero(distance <= 3)
        first, second = np.divmod(flat, size) if size else (flat, flat)
        upper = first < second
        first, second = first[upper], second[upper]
        return first, second, distance[first, second]

    def _merge(self, first: list[int], second: list[int]) -> None:
        """Merge pairs at distance 0 or 1, each cube at most once."""
        codes = self.codes.copy()
        touched: set[int] = set()
        for a, b in zip(first, second, strict=True):
            if a in touched or b in touched:
                continue
            touched.update((a, b))
            pair = codes[[a]], codes[[b]]
            codes[a] = 0 if pair[0] == pair[1] else self._third(*pair)[0]
            codes[b] = 0
        self.codes = codes[codes != 0]

    def _candidates(self, first: Indices, second: Indices, distance: NDArray[np.uint8]) -> _Candidates:
        """All exchanges of pairs at distance 2 and 3: their new cubes, and which three make a candidate."""
        room = max(MAX_COMPARED // max(len(self.codes), 1), 24)
        two = self._sample(np.flatnonzero(distance == 2), room // 8)
        three = self._sample(np.flatnonzero(distance == 3), (room - 4 * len(two)) // 12)
        fresh: list[Codes] = []
        owner: list[Indices] = []
        parts: list[Indices] = []
        base = 0
        for pairs, build in ((two, self._exchange_two), (three, self._exchange_three)):
            if not len(pairs):
                continue
            made, layout = build(self.codes[first[pairs]], self.codes[second[pairs]])
            count = len(pairs)
            fresh.extend(made)
            owner.extend([pairs] * len(made))
            for way in layout:
                rows = [np.full(count, -1) if m < 0 else base + m * count + np.arange(count) for m in way]
                parts.append(np.stack(rows, axis=1))
            base += len(made) * count
        pair = np.concatenate(owner)
        return _Candidates(np.concatenate(fresh), first[pair], second[pair], np.concatenate(parts))

    def _sample(self, pairs: Indices, limit: int) -> Indices:
        """At most `limit` of the pairs, at random."""
        if len(pairs) <= limit:
            return pairs
        return pairs[np.sort(np.argsort(self._random.words(len(pairs)), kind="stable")[:limit])]

    def _exchange_two(self, a: Codes, b: Codes) -> tuple[list[Codes], Layout]:
        places = self._places(a ^ b)
        p = places & (~places + _ONE)
        p, q = self._whole(p), self._whole(places ^ p)
        return [a ^ (b & p), b ^ (a & q), b ^ (a & p), a ^ (b & q)], ((0, 1, -1), (2, 3, -1))

    def _exchange_three(self, a: Codes, b: Codes) -> tuple[list[Codes], Layout]:
        x = a ^ b
        places = self._places(x)
        p = places & (~places + _ONE)
        rest = places ^ p
        q = rest & (~rest + _ONE)
        masks = [self._whole(part) for part in (p, q, rest ^ q)]
        made = [a ^ (b & mask) for mask in masks] + [b ^ (a & mask) for mask in masks]
        layout = []
        for i, j, k in ((0, 1, 2), (0, 2, 1), (1, 0, 2), (1, 2, 0), (2, 0, 1), (2, 1, 0)):
            layout.append((i, len(made), 3 + k))
            made.append(a ^ (x & masks[i]) ^ (b & masks[j]))
        return made, tuple(layout)

    def _gains(self, candidates: _Candidates) -> tuple[NDArray[np.int64], Indices]:
        """For each new cube: what its best merge with a cube of the sum saves (0: none), and that cube."""
        fresh = candidates.fresh
        size = len(self.codes)
        near = np.flatnonzero(np.bitwise_count(self._places(fresh[:, None] ^ self.codes)) <= 1)
        new, old = np.divmod(near, size)
        keep = (old != candidates.first[new]) & (old != candidates.second[new])
        new, old = new[keep], old[keep]
        a, b = fresh[new], self.codes[old]
        saved = self.price(a) + self.price(b) - np.where(a == b, 0, self.price(self._third(a, b)))
        gain = np.zeros(len(fresh), dtype=np.int64)
        partner = np.full(len(fresh), -1, dtype=np.int64)
        order = np.argsort(saved, kind="stable")
        partner[new[order]] = old[order]
        gain[new[order]] = saved[order]
        return gain, partner

    def _apply_best(self, candidates: _Candidates, heat: float) -> bool:
        """Take the exchange of the least cost after a random handicap, together with its merges."""
        gain, partner = self._gains(candidates)
        own = self.price(candidates.fresh)
        parts = candidates.parts
        first, second = candidates.first[parts[:, 0]], candidates.second[parts[:, 0]]
        cost = self.price(self.codes)
        net = np.concatenate([own - gain, [0]])
        whom = np.concatenate([partner, [-1]])
        delta = net[parts].sum(axis=1) - cost[first] - cost[second]
        # Two new cubes cannot merge with the same old one: only the first is sure of it.
        clash = np.zeros(len(parts), dtype=bool)
        for i, j in ((0, 1), (0, 2), (1, 2)):
            clash |= (whom[parts[:, i]] == whom[parts[:, j]]) & (whom[parts[:, i]] >= 0)
        handicap = -np.log(self._random.fractions(len(parts))) * (heat * float(cost.mean()) + 1e-3)
        choice = int(np.argmin(delta + handicap + np.where(clash, float(cost.mean()), 0.0)))
        gone = {int(first[choice]), int(second[choice])}
        added: list[int] = []
        for part in parts[choice].tolist():
            if part < 0:
                continue
            code, other = candidates.fresh[[part]], int(partner[part])
            if other < 0 or other in gone:
                added.append(int(code[0]))
                continue
            gone.add(other)
            if code[0] != self.codes[other]:
                added.append(int(self._third(code, self.codes[[other]])[0]))
        kept = np.ones(len(self.codes), dtype=bool)
        kept[list(gone)] = False
        self.codes = np.concatenate([self.codes[kept], np.array(added, dtype=np.uint64)])
        return True
