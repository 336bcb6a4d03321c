"""The compiled search for products behind `product_search`, which checks what goes in.

Tables are rows of uint64 words, of which `bits` bits count, from bit 0 of word 0 on.
"""

from __future__ import annotations

import numpy as np
from numba import njit

DE_BRUIJN = 0x03F79D71B4CB0A89
"""Multiplied by a power of two it has its exponent's place in the top six bits."""


def _places() -> np.ndarray:
    places = np.zeros(64, dtype=np.int64)
    for exponent in range(64):
        places[(DE_BRUIJN << exponent & 0xFFFFFFFFFFFFFFFF) >> 58] = exponent
    return places


PLACES = _places()
"""int64 (64,): the exponent of a power of two, by the top six bits of its product with the constant."""


@njit(cache=True)
def next_word(state):  # type: ignore[no-untyped-def]  # pragma: no cover
    """The next word of a xorshift sequence (Marsaglia, J. Stat. Software 8, 2003); state: uint64 (1,)."""
    x = state[0]
    x ^= x << np.uint64(13)
    x ^= x >> np.uint64(7)
    x ^= x << np.uint64(17)
    state[0] = x
    return x


@njit(cache=True)
def reduce_row(row, basis, words, masks, rank):  # type: ignore[no-untyped-def]  # pragma: no cover
    """Clear the pivots of a row, in place, by the basis rows in the order in which they were inserted."""
    zero = np.uint64(0)
    for r in range(rank):
        if row[words[r]] & masks[r] != zero:
            for w in range(row.size):
                row[w] ^= basis[r, w]


@njit(cache=True)
def insert_row(row, basis, words, masks, rank):  # type: ignore[no-untyped-def]  # pragma: no cover
    """Reduce a row (in place) and append it to the basis unless nothing is left; returns the new rank."""
    zero = np.uint64(0)
    reduce_row(row, basis, words, masks, rank)
    for w in range(row.size):
        if row[w] != zero:
            words[rank] = w
            masks[rank] = row[w] & (zero - row[w])
            for v in range(row.size):
                basis[rank, v] = row[v]
            return rank + 1
    return rank


@njit(cache=True)
def packed_row(row, free, count):  # type: ignore[no-untyped-def]  # pragma: no cover
    """The bits of a row in the free columns, side by side."""
    word = np.uint64(0)
    one = np.uint64(1)
    for f in range(count):
        column = free[f]
        word |= ((row[column >> 6] >> np.uint64(column & 63)) & one) << np.uint64(f)
    return word


@njit(cache=True)
def reduced_span(vectors, basis, masks):  # type: ignore[no-untyped-def]  # pragma: no cover
    """A fully reduced basis of words, vectors[1:] spanning; each has its own lowest bit alone. The rank."""
    zero = np.uint64(0)
    rank = 0
    for j in range(1, vectors.size):
        v = vectors[j]
        for r in range(rank):
            if v & masks[r] != zero:
                v ^= basis[r]
        if v != zero:
            low = v & (zero - v)
            for r in range(rank):
                if basis[r] & low != zero:
                    basis[r] ^= v
            basis[rank] = v
            masks[rank] = low
            rank += 1
    return rank


@njit(cache=True)
def targets_in_span(basis, masks, rank, slices, count, places, alive):  # type: ignore[no-untyped-def]  # pragma: no cover
    """Which targets lie in a reduced span: `alive` (words of targets) loses the others; False if all.

    slices: (64, words), row f holds bit f of every target. For each column f that is no pivot, bit f of a
    member is the sum of its bits at the pivots of the basis words that have bit f.
    """
    zero = np.uint64(0)
    one = np.uint64(1)
    pivots = zero
    for r in range(rank):
        pivots |= masks[r]
    for f in range(count):
        bit = one << np.uint64(f)
        if pivots & bit != zero:
            continue
        left = zero
        for w in range(alive.size):
            total = slices[f, w]
            for r in range(rank):
                if basis[r] & bit != zero:
                    total ^= slices[places[(masks[r] * np.uint64(0x03F79D71B4CB0A89)) >> np.uint64(58)], w]
            alive[w] &= ~total
            left |= alive[w]
        if left == zero:
            return False
    return True


@njit(cache=True)
def draw_base(signals, products, state, chosen, basis, where, masks):  # type: ignore[no-untyped-def]  # pragma: no cover
    """Eliminate the signals and their products with all left factors but one (drawn here); the rank."""
    zero = np.uint64(0)
    one = np.uint64(1)
    d, words = signals.shape
    row = np.empty(words, np.uint64)
    factor = np.empty(words, np.uint64)
    rank = 0
    for s in range(d):
        row[:] = signals[s]
        rank = insert_row(row, basis, where, masks, rank)
    chosen[:, :] = 0
    for k in range(products - 1):
        factor[:] = zero
        random = zero
        for s in range(d):
            if s & 63 == 0:
                random = next_word(state)
            if s > 0 and (random >> np.uint64(s & 63)) & one != zero:
                chosen[k, s] = 1
                for w in range(words):
                    factor[w] ^= signals[s, w]
        for s in range(1, d):
            for w in range(words):
                row[w] = factor[w] & signals[s, w]
            rank = insert_row(row, basis, where, masks, rank)
    return rank


@njit(cache=True)
def free_columns(where, masks, rank, bits, places, free):  # type: ignore[no-untyped-def]  # pragma: no cover
    """The first columns, at most 64, that are no pivots, into `free`; how many."""
    pivot = np.zeros(bits, np.bool_)
    for r in range(rank):
        exponent = places[(masks[r] * np.uint64(0x03F79D71B4CB0A89)) >> np.uint64(58)]
        pivot[(where[r] << 6) + exponent] = True
    count = 0
    for column in range(bits):
        if not pivot[column] and count < 64:
            free[count] = column
            count += 1
    return count


@njit(cache=True)
def project(signals, targets, basis, where, masks, rank, free, count, slices, pairs):  # type: ignore[no-untyped-def]  # pragma: no cover
    """What is left, in the free columns, of the targets (slices, by column) and of all products."""
    one = np.uint64(1)
    d, words = signals.shape
    row = np.empty(words, np.uint64)
    slices[:, :] = np.uint64(0)
    for k in range(targets.shape[0]):
        row[:] = targets[k]
        reduce_row(row, basis, where, masks, rank)
        word = packed_row(row, free, count)
        for f in range(count):
            slices[f, k >> 6] |= ((word >> np.uint64(f)) & one) << np.uint64(k & 63)
    for i in range(1, d):
        for j in range(i + 1, d):
            for w in range(words):
                row[w] = signals[i, w] & signals[j, w]
            reduce_row(row, basis, where, masks, rank)
            pairs[i, j] = packed_row(row, free, count)
            pairs[j, i] = pairs[i, j]


@njit(cache=True)
def run_last(targets, tries, state, places, slices, pairs, count, chosen):  # type: ignore[no-untyped-def]  # pragma: no cover
    """Run the last left factor, `chosen`: uint8 (d,), over sums of signals; a target within reach, or -1.

    One signal comes or goes at each step: in Gray-code order where all sums are tried, else at random.
    """
    zero = np.uint64(0)
    one = np.uint64(1)
    d = chosen.size
    everything = d - 1 < 40 and (1 << (d - 1)) <= tries
    vectors = np.zeros(d, np.uint64)
    basis = np.empty(64, np.uint64)
    masks = np.empty(64, np.uint64)
    alive = np.empty((targets + 63) >> 6, np.uint64)
    if not everything:
        for i in range(1, d):
            if next_word(state) >> np.uint64(63) != zero:
                chosen[i] ^= 1
                for j in range(1, d):
                    vectors[j] ^= pairs[i, j]
    steps = (1 << (d - 1)) if everything else tries
    for step in range(steps):
        rank = reduced_span(vectors, basis, masks)
        alive[:] = ~zero
        if targets & 63:
            alive[alive.size - 1] = (one << np.uint64(targets & 63)) - one
        if targets_in_span(basis, masks, rank, slices, count, places, alive):
            for k in range(targets):
                if (alive[k >> 6] >> np.uint64(k & 63)) & one != zero:
                    return k
        if everything:
            turned = 1
            while (step + 1) >> (turned - 1) & 1 == 0:
                turned += 1
            if turned >= d:
                break
        else:
            turned = 1 + int((next_word(state) >> np.uint64(33)) % np.uint64(d - 1))
        chosen[turned] ^= 1
        for j in range(1, d):
            vectors[j] ^= pairs[turned, j]
    return -1


@njit(cache=True)
def search(signals, targets, bits, products, bases, tries, state, places, chosen):  # type: ignore[no-untyped-def]  # pragma: no cover
    """Draw left factors of `products` products until some target is a sum of signals and products.

    signals: (d, words), the constant 1 first; targets: (k, words). All but one left factor are drawn `bases`
    times; then the last one runs over `tries` sums of signals, all of them where they are no more. Returns
    the number of a target, with the left factors in chosen: uint8 (products, d); or -1.
    """
    d, words = signals.shape
    basis = np.empty((bits + 1, words), np.uint64)
    where = np.empty(bits + 1, np.int64)
    masks = np.empty(bits + 1, np.uint64)
    pairs = np.zeros((d, d), np.uint64)
    free = np.empty(64, np.int64)
    slices = np.zeros((64, (targets.shape[0] + 63) >> 6), np.uint64)
    for _ in range(bases):
        rank = draw_base(signals, products, state, chosen, basis, where, masks)
        count = free_columns(where, masks, rank, bits, places, free)
        project(signals, targets, basis, where, masks, rank, free, count, slices, pairs)
        k = run_last(targets.shape[0], tries, state, places, slices, pairs, count, chosen[products - 1])
        if k >= 0:
            return k
    return -1
