"""Numba kernel: random changes of a cascade that still has to do what is fixed of a target.

Called by `exchanges`, which checks what goes in. Gates are target (capacity,) int64, care and value
(capacity,) uint64: the target is turned where the lines in `care` have the values in `value`. States are
columns, shape (lines, words) uint64, one bit a state that matters.
"""

from __future__ import annotations

import numpy as np
from numba import njit

from revsynth.logic.kernels import popcount, random_below, random_word


@njit(cache=True)
def meets(target, care, value, count, start, wanted, fixed, state):  # type: ignore[no-untyped-def]  # pragma: no cover
    """Whether the gates take `start` to `wanted` wherever `fixed` is 1. state: overwritten, as start."""
    lines, words = start.shape
    for word in range(words):
        for line in range(lines):
            state[line, word] = start[line, word]
        for gate in range(count):
            holds = ~np.uint64(0)
            for line in range(lines):
                bit = np.uint64(line)
                if (care[gate] >> bit) & np.uint64(1):
                    if (value[gate] >> bit) & np.uint64(1):
                        holds &= state[line, word]
                    else:
                        holds &= ~state[line, word]
            state[target[gate], word] ^= holds
        for line in range(lines):
            if (state[line, word] ^ wanted[line, word]) & fixed[line, word]:
                return False
    return True


@njit(cache=True)
def total_price(care, count, prices):  # type: ignore[no-untyped-def]  # pragma: no cover
    """The sum of prices[number of controls]."""
    total = np.int64(0)
    for gate in range(count):
        total += prices[popcount(care[gate])]
    return total


@njit(cache=True)
def change(target, care, value, count, capacity, lines, positive, seed):  # type: ignore[no-untyped-def]  # pragma: no cover
    """One random change in place, on under 64 lines; returns the number of gates then.

    A gate goes, moves, comes, gets another target, or one of its controls goes, comes or turns.
    """
    kind = random_below(seed, 16)
    if kind < 2 or (kind < 4 and count == capacity) or count == 0:
        if count == 0:
            return count
        gone = random_below(seed, count)
        for gate in range(gone, count - 1):
            target[gate], care[gate], value[gate] = target[gate + 1], care[gate + 1], value[gate + 1]
        return count - 1
    if kind < 4:
        at = random_below(seed, count + 1)
        for gate in range(count, at, -1):
            target[gate], care[gate], value[gate] = target[gate - 1], care[gate - 1], value[gate - 1]
        target[at] = random_below(seed, lines)
        chosen = random_word(seed) & random_word(seed) & ((np.uint64(1) << np.uint64(lines)) - np.uint64(1))
        chosen &= ~(np.uint64(1) << np.uint64(target[at]))
        care[at] = chosen
        value[at] = chosen if positive else chosen & random_word(seed)
        return count + 1
    if kind < 7:
        at, to = random_below(seed, count), random_below(seed, count)
        step = 1 if to > at else -1
        moved_target, moved_care, moved_value = target[at], care[at], value[at]
        gate = at
        while gate != to:
            target[gate], care[gate], value[gate] = target[gate + step], care[gate + step], value[gate + step]
            gate += step
        target[to], care[to], value[to] = moved_target, moved_care, moved_value
        return count
    gate = random_below(seed, count)
    line = random_below(seed, lines)
    bit = np.uint64(1) << np.uint64(line)
    if line == target[gate]:
        return count
    if kind < 8:
        old = np.uint64(1) << np.uint64(target[gate])
        if care[gate] & bit:
            care[gate] = (care[gate] & ~bit) | old
            value[gate] &= ~bit
            if positive or random_below(seed, 2):
                value[gate] |= old
        target[gate] = line
        return count
    if care[gate] & bit and (positive or random_below(seed, 2)):
        care[gate] &= ~bit
        value[gate] &= ~bit
    elif care[gate] & bit:
        value[gate] ^= bit
    else:
        care[gate] |= bit
        if positive or random_below(seed, 2):
            value[gate] |= bit
    return count


@njit(cache=True)
def copy_gates(from_target, from_care, from_value, target, care, value, count):  # type: ignore[no-untyped-def]  # pragma: no cover
    """Copy the first `count` gates."""
    for gate in range(count):
        target[gate] = from_target[gate]
        care[gate] = from_care[gate]
        value[gate] = from_value[gate]


@njit(cache=True)
def walk(  # type: ignore[no-untyped-def]  # pragma: no cover
    target, care, value, count, start, wanted, fixed, prices, moves, heat, positive, seed, best_target,
    best_care, best_value
):  # fmt: skip
    """Make `moves` tries of one to three changes; returns the number of gates of the cheapest cascade met.

    A try is kept where the cascade still does what it must and is no dearer, or with a chance that cools
    down linearly from `heat` (in prices). best_*: filled with the cheapest cascade.
    """
    capacity = target.size
    lines = start.shape[0]
    state = np.zeros_like(start)
    new_target, new_care, new_value = np.zeros_like(target), np.zeros_like(care), np.zeros_like(value)
    price = total_price(care, count, prices)
    best, best_count = price, count
    copy_gates(target, care, value, best_target, best_care, best_value, count)
    for move in range(moves):
        copy_gates(target, care, value, new_target, new_care, new_value, count)
        size = count
        for _ in range(1 + random_below(seed, 3)):
            size = change(new_target, new_care, new_value, size, capacity, lines, positive, seed)
        after = total_price(new_care, size, prices)
        if after > price:
            warm = heat * (moves - move) / moves
            chance = (random_word(seed) >> np.uint64(11)) / 9007199254740992.0
            if warm <= 0.0 or chance >= np.exp((price - after) / warm):
                continue
        if not meets(new_target, new_care, new_value, size, start, wanted, fixed, state):
            continue
        copy_gates(new_target, new_care, new_value, target, care, value, size)
        count, price = size, after
        if price < best:
            best, best_count = price, count
            copy_gates(target, care, value, best_target, best_care, best_value, count)
    return best_count
