"""A table as a sum of signals and of a few products of signals, found by linear algebra.

With the left factors g_1 ... g_t drawn at random, h_0 + g_1 h_1 + ... + g_t h_t = target is a linear system
for the right factors, all of them sums of signals; one elimination serves any number of targets.

A table is an integer, bit x the value at input x; signals and sums are those of `product_chain`, the constant
1 being signal 0. Source: D. Goudarzi, M. Rivain, "On the multiplicative complexity of Boolean functions and
bitsliced higher-order masking", CHES 2016 (random bases for one function; several targets and the last left
factor that runs over all sums are this project's own).
"""

from __future__ import annotations

import math
import random
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from revsynth.logic.product_chain import Sum, sum_table

Table = int


class Echelon:
    """A basis of tables that remembers how each was made: label k belongs to the k-th table inserted."""

    def __init__(self, bits: int) -> None:
        self._bits = bits
        self._mask = (1 << bits) - 1
        self._rows: dict[int, int] = {}
        self._pivots = 0
        self._count = 0

    @property
    def rank(self) -> int:
        """Independent tables so far."""
        return len(self._rows)

    def insert(self, table: Table) -> bool:
        """Add a table; whether it was independent of the earlier ones."""
        value = self._reduced(table | 1 << (self._bits + self._count))
        self._count += 1
        rest = value & self._mask
        if rest:
            low = rest & -rest
            self._rows[low] = value
            self._pivots |= low
        return bool(rest)

    def express(self, table: Table) -> int | None:
        """The tables (by label bits) whose sum is `table`; None where there is no such sum."""
        value = self._reduced(table)
        return None if value & self._mask else value >> self._bits

    def residue(self, table: Table) -> Table:
        """What is left of a table after elimination: 0 where it is in the span."""
        return self._reduced(table) & self._mask

    def _reduced(self, value: int) -> int:
        """Lowest pivot first: a row has no bits below its pivot and none of the pivots before it."""
        rows, pivots = self._rows, self._pivots
        hits = value & pivots
        while hits:
            value ^= rows[hits & -hits]
            hits = value & pivots
        return value


@dataclass(frozen=True)
class Found:
    """targets[target] = plain + sum of the products' values."""

    target: int
    products: tuple[tuple[Sum, Sum], ...]
    plain: Sum


@dataclass(frozen=True)
class Work:
    """bases: draws of all left factors but one; tries: sums that the last one runs over (compiled only)."""

    bases: int
    tries: int


class ProductSearch:
    """Draws left factors, reproducibly for a seed; compiled or in plain Python."""

    def __init__(self, seed: int, compiled: bool) -> None:
        self._random = random.Random(seed)
        self.compiled = compiled
        self._state = np.array([self._random.getrandbits(63) | 1], dtype=np.uint64)

    def sum_of(self, signals: int) -> Sum:
        """A random sum of signals, without the constant."""
        return self._random.getrandbits(signals - 1) << 1

    def below(self, limit: int) -> int:
        """A random number in 0 ... limit - 1."""
        return self._random.randrange(limit)

    def sample(self, count: int, limit: int) -> list[int]:
        """`count` different numbers below the limit (all where there are no more), in random order."""
        return self._random.sample(range(limit), min(count, limit))

    def extra_products(self, signals: list[Table], count: int) -> list[tuple[Sum, Sum]]:
        """Random products, each of sums of the signals and the products before; their tables are appended."""
        products = []
        for _ in range(count):
            left, right = self.sum_of(len(signals)), self.sum_of(len(signals))
            products.append((left, right))
            signals.append(sum_table(signals, left) & sum_table(signals, right))
        return products

    def find(
        self, signals: Sequence[Table], targets: Sequence[Table], bits: int, products: int, work: Work
    ) -> Found | None:
        """One of the targets as a sum of signals and at most `products` products; None where none was met.

        The tables have `bits` bits. Every answer is checked before it is returned.
        """
        if not targets:
            return None
        if products == 0:
            return self._in_span(signals, targets, bits)
        if self.compiled:
            return self._compiled(signals, targets, bits, products, work)
        return self._plain(signals, targets, bits, products, work.bases)

    def _in_span(self, signals: Sequence[Table], targets: Sequence[Table], bits: int) -> Found | None:
        echelon = Echelon(bits)
        for signal in signals:
            echelon.insert(signal)
        for k, target in enumerate(targets):
            plain = echelon.express(target)
            if plain is not None:
                return Found(k, (), plain)
        return None

    def _plain(
        self, signals: Sequence[Table], targets: Sequence[Table], bits: int, products: int, draws: int
    ) -> Found | None:
        for _ in range(draws):
            factors = [self.sum_of(len(signals)) for _ in range(products)]
            echelon = _products_echelon(signals, factors, bits)
            for k, target in enumerate(targets):
                combination = echelon.express(target)
                if combination is not None:
                    return _found(signals, factors, k, combination)
        return None

    def _compiled(
        self, signals: Sequence[Table], targets: Sequence[Table], bits: int, products: int, work: Work
    ) -> Found | None:
        from revsynth.logic.tables.product_kernels import PLACES, search

        rows, wanted = words_of(signals, bits), words_of(targets, bits)
        chosen = np.zeros((products, len(signals)), dtype=np.uint8)
        left = work.bases
        while left > 0:
            step = 1 if len(signals) > 64 else left
            k = int(search(rows, wanted, bits, products, step, work.tries, self._state, PLACES, chosen))
            left -= step
            if k < 0:
                continue
            factors = [sum(int(bit) << s for s, bit in enumerate(row)) for row in chosen]
            combination = _products_echelon(signals, factors, bits).express(targets[k])
            if combination is not None:
                return _found(signals, factors, k, combination)
        return None


def words_of(tables: Sequence[Table], bits: int) -> NDArray[np.uint64]:
    """uint64 (k, words): the tables' bits, bit 0 of word 0 first."""
    length = 8 * max(1, (bits + 63) // 64)
    flat = b"".join(table.to_bytes(length, "little") for table in tables)
    return np.frombuffer(flat, dtype="<u8").astype(np.uint64).reshape(len(tables), -1)


def within_reach(
    signals: Sequence[Table], targets: Sequence[Table], bits: int
) -> tuple[int, Sequence[Table]]:
    """The rank of all products of two signals, and the targets that are sums of such products at all."""
    rows: dict[int, Table] = {}

    def residue(table: Table) -> Table:
        while table:
            row = rows.get(table.bit_length())
            if row is None:
                break
            table ^= row
        return table

    for place, one in enumerate(signals):
        for other in signals[: place + 1]:
            rest = residue(one & other)
            if rest:
                rows[rest.bit_length()] = rest
                if len(rows) == bits:
                    return bits, targets
    return len(rows), [table for table in targets if not residue(table)]


def hits_expected(reach: int, signals: int, products: int, targets: int, draws: float) -> float:
    """The logarithm (base 2) of the number of successes to expect of as many draws of left factors.

    reach: the rank of all products of two signals, in whose span the targets lie; `signals` with the
    constant. With d = signals - 1, the products of t left factors with all signals have rank
    t d - t (t + 1) / 2 beyond the d + 1 signals themselves.
    """
    d = signals - 1
    t = min(products, d)
    rank = min(t * d - t * (t + 1) // 2 + d + 1, reach)
    return math.log2(targets * draws) - (reach - rank)


def _products_echelon(signals: Sequence[Table], factors: Sequence[Sum], bits: int) -> Echelon:
    echelon = Echelon(bits)
    for signal in signals:
        echelon.insert(signal)
    for factor in factors:
        table = sum_table(signals, factor)
        for signal in signals:
            echelon.insert(table & signal)
    return echelon


def _found(signals: Sequence[Table], factors: Sequence[Sum], target: int, combination: int) -> Found:
    size = len(signals)
    mask = (1 << size) - 1
    parts = [combination >> (size * (k + 1)) & mask for k in range(len(factors))]
    products = tuple((g, h) for g, h in zip(factors, parts, strict=True) if h)
    return Found(target, products, combination & mask)
