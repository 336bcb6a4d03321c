"""Compiled loops of `affine_class_search`; a truth table or normal form is a 32-bit number in an int64.

labels: uint8 (2^26,) by packed normal form. A chain of up to four products is a row of nine numbers: the two
operands of each product as sums over inputs and products (bit i the input i, then the products; no constant,
which changes nothing up to sums of earlier signals), then which products are summed.
"""

from __future__ import annotations

import numpy as np
from numba import njit


@njit(cache=True)
def packed(form):  # type: ignore[no-untyped-def]  # pragma: no cover
    """The 26 coefficients of degree 2 and more of a normal form (32 bits), side by side."""
    return ((form >> 3) & 1) | ((form >> 4) & 0xE) | ((form >> 5) & 0x7F0) | ((form >> 6) & 0x3FFF800)


@njit(cache=True)
def unpacked(state):  # type: ignore[no-untyped-def]  # pragma: no cover
    """The normal form again, its affine part 0."""
    return ((state & 1) << 3) | ((state & 0xE) << 4) | ((state & 0x7F0) << 5) | ((state & 0x3FFF800) << 6)


@njit(cache=True)
def neighbour(form, k):  # type: ignore[no-untyped-def]  # pragma: no cover
    """The form after one of six changes that generate the affine group: x0 + 1, x0 + x1, four swaps."""
    if k == 0:
        return form ^ ((form >> 1) & 0x55555555)
    if k == 1:
        return form ^ ((form & 0x22222222) << 1) ^ ((form & 0x88888888) >> 1)
    if k == 2:
        t = (form ^ (form >> 1)) & 0x22222222
        return form ^ t ^ (t << 1)
    if k == 3:
        t = (form ^ (form >> 2)) & 0x0C0C0C0C
        return form ^ t ^ (t << 2)
    if k == 4:
        t = (form ^ (form >> 4)) & 0x00F000F0
        return form ^ t ^ (t << 4)
    t = (form ^ (form >> 8)) & 0x0000FF00
    return form ^ t ^ (t << 8)


@njit(cache=True)
def walk_orbits(labels, queue, sizes):  # type: ignore[no-untyped-def]  # pragma: no cover
    """Label every state with the number of its orbit, from 1; returns how many there are."""
    count = 0
    for start in range(labels.size):
        if labels[start] != 0:
            continue
        count += 1
        labels[start] = count
        queue[0] = start
        head, tail = 0, 1
        while head < tail:
            form = unpacked(np.int64(queue[head]))
            head += 1
            for k in range(6):
                state = packed(neighbour(form, k))
                if labels[state] == 0:
                    labels[state] = count
                    queue[tail] = state
                    tail += 1
        sizes[count - 1] = tail
    return count


@njit(cache=True)
def normal_form(table):  # type: ignore[no-untyped-def]  # pragma: no cover
    """The normal form of a truth table of 32 bits."""
    table ^= (table & 0x55555555) << 1
    table ^= (table & 0x33333333) << 2
    table ^= (table & 0x0F0F0F0F) << 4
    table ^= (table & 0x00FF00FF) << 8
    return table ^ ((table & 0xFFFF) << 16)


@njit(cache=True)
def fill_span(basis, count, out):  # type: ignore[no-untyped-def]  # pragma: no cover
    """out[m]: the sum of the basis tables in the bits of m."""
    out[0] = 0
    size = 1
    for i in range(count):
        for j in range(size):
            out[size + j] = out[j] ^ basis[i]
        size *= 2


@njit(cache=True)
def ones(x):  # type: ignore[no-untyped-def]  # pragma: no cover
    """Bits set."""
    count = 0
    while x:
        x &= x - 1
        count += 1
    return count


@njit(cache=True)
def note(label, ands, weight, row, fewest, weights, chains):  # type: ignore[no-untyped-def]  # pragma: no cover
    """Keep a chain where it has fewer products, or as many and fewer terms. row: 9 numbers."""
    if ands < fewest[label] or (ands == fewest[label] and weight < weights[label]):
        fewest[label] = ands
        weights[label] = weight
        for i in range(9):
            chains[label, i] = row[i]


@njit(cache=True)
def try_three(labels, variables, inputs, fewest, weights, chains):  # type: ignore[no-untyped-def]  # pragma: no cover
    """All chains of two and three products over `inputs` inputs that begin with x0 x1.

    Signals have no constant: it changes nothing up to sums of earlier signals. The last number of a row says
    which products are summed.
    """
    basis = np.zeros(8, np.int64)
    basis[:inputs] = variables[:inputs]
    first = variables[0] & variables[1]
    basis[inputs] = first
    row = np.zeros(9, np.int64)
    row[0], row[1], row[8] = 1, 2, 1
    note(labels[packed(normal_form(first))], 1, 2, row, fewest, weights, chains)
    two = np.zeros(1 << (inputs + 1), np.int64)
    three = np.zeros(1 << (inputs + 2), np.int64)
    fill_span(basis, inputs + 1, two)
    for a in range(1, two.size):
        for b in range(1, a):
            second = two[a] & two[b]
            basis[inputs + 1] = second
            row[2], row[3], row[4], row[5] = a, b, 0, 0
            for extra in range(2):
                row[8] = 2 + extra
                weight = 3 + ones(a) + ones(b) + extra
                label = labels[packed(normal_form(second ^ (first if extra else 0)))]
                note(label, 2, weight, row, fewest, weights, chains)
            fill_span(basis, inputs + 2, three)
            for p in range(1, three.size):
                for q in range(1, p):
                    third = three[p] & three[q]
                    row[4], row[5] = p, q
                    weight = 3 + ones(a) + ones(b) + ones(p) + ones(q)
                    for extra in range(4):
                        table = third ^ (first if extra & 1 else 0) ^ (second if extra & 2 else 0)
                        row[8] = 4 + extra
                        label = labels[packed(normal_form(table))]
                        note(label, 3, weight + ones(extra), row, fewest, weights, chains)


@njit(cache=True)
def draw_four(labels, variables, draws, seed, fewest, weights, chains):  # type: ignore[no-untyped-def]  # pragma: no cover
    """Chains of four products of few terms, drawn at random."""
    signals = np.zeros(9, np.int64)
    signals[:5] = variables
    row = np.zeros(9, np.int64)
    row[0], row[1] = 1, 2
    signals[5] = variables[0] & variables[1]
    x = np.uint64(seed)
    for _ in range(draws):
        weight = 2
        for k in range(1, 4):
            for side in range(2):
                x ^= x << np.uint64(13)
                x ^= x >> np.uint64(7)
                x ^= x << np.uint64(17)
                terms = np.int64(x >> np.uint64(40)) & np.int64(x >> np.uint64(20)) & ((1 << (5 + k)) - 1)
                row[2 * k + side] = terms
                weight += ones(terms)
            left, right = 0, 0
            for s in range(5 + k):
                if row[2 * k] >> s & 1:
                    left ^= signals[s]
                if row[2 * k + 1] >> s & 1:
                    right ^= signals[s]
            signals[5 + k] = left & right
        for extra in range(8):
            table = signals[8]
            for k in range(3):
                if extra >> k & 1:
                    table ^= signals[5 + k]
            row[8] = 8 + extra
            label = labels[packed(normal_form(table))]
            note(label, 4, weight + ones(extra), row, fewest, weights, chains)
