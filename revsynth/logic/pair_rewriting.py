"""Shortening an exclusive sum by rewriting pairs of cubes.

Two cubes that differ in d places are worth d other cubes: d = 0 cancels, d = 1 merges, d = 2 and d = 3
exchange a pair for two or three that may merge with others. A walk looks at all exchanges of the sum at once,
takes the one that saves most, and wanders among equally good sums (now and then a worse one) where none
saves.

Where values are free, a cube may also change in one place if the cube of the third value lies wholly on
free values, and a new cube that lies on free values is dropped.

Source: N. Song, M. Perkowski, "Minimization of exclusive sum-of-products expressions for multiple-valued
input, incompletely specified functions", IEEE TCAD 15(4), 1996 (the exchanges).
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from revsynth.logic.cube_codes import Codes, CodeSpace, decode, encode
from revsynth.logic.cubes import ExclusiveSum
from revsynth.logic.free_cubes import FreeCubes
from revsynth.logic.random_words import Random

Indices = NDArray[np.int64]
Layout = tuple[tuple[int, int, int], ...]

_ONE = np.uint64(1)
_DROPPED = -2
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


def rewrite(
    cubes: ExclusiveSum,
    prices: Sequence[int],
    *,
    steps: int,
    seed: int = 0,
    heat: float = 0.06,
    free: FreeCubes | None = None,
) -> ExclusiveSum:
    """Walk `steps` steps from a sum and return the cheapest sum met, for the same fixed values.

    prices: the price of a cube of 0 ... n literals. heat: how much worse an exchange may be, as a part of the
    mean price of a cube; 0 takes only what saves or costs nothing. Deterministic for a seed.
    """
    walk = Walk(encode(cubes), CodeSpace(cubes.inputs, prices), seed, free)
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

    def __init__(self, codes: Codes, space: CodeSpace, seed: int = 0, free: FreeCubes | None = None) -> None:
        self.codes = codes
        self._space = space
        self._random = Random(seed)
        self._free = free
        if free is not None and len(codes):
            self.codes = codes[~free(codes)]

    def total(self) -> int:
        """The price of the sum."""
        return int(self._space.price(self.codes).sum())

    def step(self, heat: float) -> bool:
        """Merge what can be merged, or else make one exchange; False where nothing can be done at all."""
        first, second, distance = self._close_pairs()
        near = distance <= 1
        if near.any():
            self._merge(first[near].tolist(), second[near].tolist())
            return True
        candidates = self._candidates(first, second, distance)
        if not len(candidates.parts):
            return False
        self._apply_best(candidates, heat)
        return True

    def _close_pairs(self) -> tuple[Indices, Indices, NDArray[np.uint8]]:
        """Pairs at distance 0 ... 3."""
        size = len(self.codes)
        distance = np.bitwise_count(self._space.places(self.codes[:, None] ^ self.codes))
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
            codes[a] = 0 if pair[0] == pair[1] else self._space.third(*pair)[0]
            codes[b] = 0
        self.codes = codes[codes != 0]

    def _candidates(self, first: Indices, second: Indices, distance: NDArray[np.uint8]) -> _Candidates:
        """All exchanges of pairs at distance 2 and 3: their new cubes, and which three make a candidate."""
        room = max(MAX_COMPARED // max(len(self.codes), 1), 24)
        two = self._sample(np.flatnonzero(distance == 2), room // 8)
        three = self._sample(np.flatnonzero(distance == 3), (room - 4 * len(two)) // 12)
        fresh, left, right, parts = self._single_changes()
        base = len(fresh[0])
        for pairs, build in ((two, self._exchange_two), (three, self._exchange_three)):
            if not len(pairs):
                continue
            made, layout = build(self.codes[first[pairs]], self.codes[second[pairs]])
            count = len(pairs)
            fresh.extend(made)
            left.extend([first[pairs]] * len(made))
            right.extend([second[pairs]] * len(made))
            for way in layout:
                rows = [np.full(count, -1) if m < 0 else base + m * count + np.arange(count) for m in way]
                parts.append(np.stack(rows, axis=1))
            base += len(made) * count
        return _Candidates(
            np.concatenate(fresh), np.concatenate(left), np.concatenate(right), np.concatenate(parts)
        )

    def _single_changes(self) -> tuple[list[Codes], list[Indices], list[Indices], list[Indices]]:
        """One cube changed in one place, the third cube lying on free values; that cube owns both ends."""
        if self._free is None:
            nothing = np.zeros(0, dtype=np.int64)
            return [np.zeros(0, dtype=np.uint64)], [nothing], [nothing], [nothing.reshape(0, 3)]
        fresh, owners = self._free.changes(self.codes)
        room = max(MAX_COMPARED // max(len(self.codes), 1), 24) // 4
        if len(fresh) > room:
            kept = self._sample(np.arange(len(fresh)), room)
            fresh, owners = fresh[kept], owners[kept]
        parts = np.full((len(fresh), 3), -1, dtype=np.int64)
        parts[:, 0] = np.arange(len(fresh))
        return [fresh], [owners], [owners], [parts]

    def _sample(self, pairs: Indices, limit: int) -> Indices:
        """At most `limit` of the pairs, at random."""
        if len(pairs) <= limit:
            return pairs
        return pairs[np.sort(np.argsort(self._random.words(len(pairs)), kind="stable")[:limit])]

    def _exchange_two(self, a: Codes, b: Codes) -> tuple[list[Codes], Layout]:
        places = self._space.places(a ^ b)
        p = places & (~places + _ONE)
        p, q = self._space.whole(p), self._space.whole(places ^ p)
        return [a ^ (b & p), b ^ (a & q), b ^ (a & p), a ^ (b & q)], ((0, 1, -1), (2, 3, -1))

    def _exchange_three(self, a: Codes, b: Codes) -> tuple[list[Codes], Layout]:
        x = a ^ b
        places = self._space.places(x)
        p = places & (~places + _ONE)
        rest = places ^ p
        q = rest & (~rest + _ONE)
        masks = [self._space.whole(part) for part in (p, q, rest ^ q)]
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
        near = np.flatnonzero(np.bitwise_count(self._space.places(fresh[:, None] ^ self.codes)) <= 1)
        new, old = np.divmod(near, size)
        keep = (old != candidates.first[new]) & (old != candidates.second[new])
        new, old = new[keep], old[keep]
        a, b = fresh[new], self.codes[old]
        merged = np.where(a == b, 0, self._space.price(self._space.third(a, b)))
        saved = self._space.price(a) + self._space.price(b) - merged
        gain = np.zeros(len(fresh), dtype=np.int64)
        partner = np.full(len(fresh), -1, dtype=np.int64)
        order = np.argsort(saved, kind="stable")
        partner[new[order]] = old[order]
        gain[new[order]] = saved[order]
        if self._free is not None:
            dropped = self._free(fresh)
            gain[dropped] = self._space.price(fresh[dropped])
            partner[dropped] = _DROPPED
        return gain, partner

    def _apply_best(self, candidates: _Candidates, heat: float) -> None:
        """Take the exchange of the least cost after a random handicap, together with its merges."""
        gain, partner = self._gains(candidates)
        own = self._space.price(candidates.fresh)
        parts = candidates.parts
        first, second = candidates.first[parts[:, 0]], candidates.second[parts[:, 0]]
        cost = self._space.price(self.codes)
        net = np.concatenate([own - gain, [0]])
        whom = np.concatenate([partner, [-1]])
        delta = net[parts].sum(axis=1) - cost[first] - np.where(first == second, 0, cost[second])
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
            if other == _DROPPED:
                continue
            if other < 0 or other in gone:
                added.append(int(code[0]))
                continue
            gone.add(other)
            if code[0] != self.codes[other]:
                added.append(int(self._space.third(code, self.codes[[other]])[0]))
        kept = np.ones(len(self.codes), dtype=bool)
        kept[list(gone)] = False
        self.codes = np.concatenate([self.codes[kept], np.array(added, dtype=np.uint64)])
