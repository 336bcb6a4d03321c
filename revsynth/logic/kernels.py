"""Numba kernels: pair rewriting of sums too long for the numpy walk, and walking long permutations.

Called by `annealing` and `permutation`, which check what goes in.

A sum under rewriting is: codes (capacity,) uint64, two bits an input as in `pair_rewriting`, without outputs,
all different; masks (capacity,) uint64, the outputs each cube feeds; table (a power of two) int64, an
open-addressing hash table of index + 1 by code, 0 where empty; state (2,) int64: number of cubes, price of
the sum.
"""

from __future__ import annotations

import numpy as np
from numba import njit


@njit(cache=True)
def popcount(word):  # type: ignore[no-untyped-def]  # pragma: no cover
    """The number of ones of a uint64."""
    w = np.uint64(word)
    w = w - ((w >> np.uint64(1)) & np.uint64(0x5555555555555555))
    w = (w & np.uint64(0x3333333333333333)) + ((w >> np.uint64(2)) & np.uint64(0x3333333333333333))
    w = (w + (w >> np.uint64(4))) & np.uint64(0x0F0F0F0F0F0F0F0F)
    w = w + (w >> np.uint64(8))
    w = w + (w >> np.uint64(16))
    w = w + (w >> np.uint64(32))
    return np.int64(w & np.uint64(0x7F))


@njit(cache=True)
def random_word(seed):  # type: ignore[no-untyped-def]  # pragma: no cover
    """The next word of a xorshift sequence (Marsaglia, J. Stat. Software 8, 2003); seed: uint64 (1,)."""
    x = seed[0]
    x ^= x << np.uint64(13)
    x ^= x >> np.uint64(7)
    x ^= x << np.uint64(17)
    seed[0] = x
    return x


@njit(cache=True)
def random_below(seed, limit):  # type: ignore[no-untyped-def]  # pragma: no cover
    """A number in 0 ... limit - 1."""
    return np.int64((random_word(seed) >> np.uint64(33)) % np.uint64(limit))


@njit(cache=True)
def slot_of(code, table):  # type: ignore[no-untyped-def]  # pragma: no cover
    """Where the search for a code starts."""
    x = np.uint64(code)
    x ^= x >> np.uint64(29)
    x = x * np.uint64(0xBF58476D1CE4E5B9)
    x ^= x >> np.uint64(32)
    return np.int64(x & np.uint64(table.size - 1))


@njit(cache=True)
def find(code, codes, table):  # type: ignore[no-untyped-def]  # pragma: no cover
    """The index of a code, or -1."""
    slot = slot_of(code, table)
    while table[slot] != 0:
        index = table[slot] - 1
        if codes[index] == code:
            return index
        slot = (slot + 1) & (table.size - 1)
    return np.int64(-1)


@njit(cache=True)
def price_of(code, inputs, prices):  # type: ignore[no-untyped-def]  # pragma: no cover
    """The price of a cube."""
    c = np.uint64(code)
    return prices[inputs - popcount(c & (c >> np.uint64(1)) & np.uint64(0x5555555555555555))]


@njit(cache=True)
def insert(code, mask, codes, masks, table, state, inputs, prices):  # type: ignore[no-untyped-def]  # pragma: no cover
    """Append a cube whose code is not there yet."""
    index = state[0]
    codes[index] = code
    masks[index] = mask
    slot = slot_of(code, table)
    while table[slot] != 0:
        slot = (slot + 1) & (table.size - 1)
    table[slot] = index + 1
    state[0] = index + 1
    state[1] += price_of(code, inputs, prices)


@njit(cache=True)
def remove(index, codes, masks, table, state, inputs, prices):  # type: ignore[no-untyped-def]  # pragma: no cover
    """Take a cube out; the last one moves to its index. Later entries of the hash run move up."""
    state[1] -= price_of(codes[index], inputs, prices)
    last = state[0] - 1
    size = table.size
    slot = slot_of(codes[index], table)
    while table[slot] != index + 1:
        slot = (slot + 1) & (size - 1)
    hole = slot
    slot = (slot + 1) & (size - 1)
    while table[slot] != 0:
        home = slot_of(codes[table[slot] - 1], table)
        if ((slot - home) & (size - 1)) >= ((slot - hole) & (size - 1)):
            table[hole] = table[slot]
            hole = slot
        slot = (slot + 1) & (size - 1)
    table[hole] = 0
    if index != last:
        slot = slot_of(codes[last], table)
        while table[slot] != last + 1:
            slot = (slot + 1) & (size - 1)
        table[slot] = index + 1
        codes[index] = codes[last]
        masks[index] = masks[last]
    state[0] = last


@njit(cache=True)
def other_value(code, place, which):  # type: ignore[no-untyped-def]  # pragma: no cover
    """The code with one of the two other values (which: 0 or 1) at an input place."""
    shift = np.uint64(2 * place)
    here = (np.uint64(code) >> shift) & np.uint64(3)
    new = here % np.uint64(3) + np.uint64(1)
    if which:
        new = new % np.uint64(3) + np.uint64(1)
    return np.uint64(code) ^ ((here ^ new) << shift)


@njit(cache=True)
def add(code, mask, codes, masks, table, state, inputs, prices, seed):  # type: ignore[no-untyped-def]  # pragma: no cover
    """Add a cube, cancelling and merging as long as that is possible."""
    merged = True
    while merged:
        merged = False
        index = find(code, codes, table)
        if index >= 0:
            mask = mask ^ masks[index]
            remove(index, codes, masks, table, state, inputs, prices)
            if mask == np.uint64(0):
                return
            merged = True
            continue
        start = random_below(seed, 2 * inputs) if inputs else 0
        for offset in range(2 * inputs):
            at = (start + offset) % (2 * inputs)
            neighbour = other_value(code, at >> 1, at & 1)
            index = find(neighbour, codes, table)
            if index >= 0 and masks[index] == mask:
                remove(index, codes, masks, table, state, inputs, prices)
                code = other_value(code, at >> 1, 1 - (at & 1))
                merged = True
                break
    insert(code, mask, codes, masks, table, state, inputs, prices)


@njit(cache=True)
def gain_of(code, mask, a, b, codes, masks, table, inputs, prices):  # type: ignore[no-untyped-def]  # pragma: no cover
    """What the best merge of a new cube with a cube other than a and b would save; 0 for none."""
    index = find(code, codes, table)
    own = price_of(code, inputs, prices)
    if index >= 0 and index != a and index != b:
        return 2 * own if masks[index] == mask else own
    best = np.int64(0)
    for at in range(2 * inputs):
        neighbour = other_value(code, at >> 1, at & 1)
        index = find(neighbour, codes, table)
        if index >= 0 and index != a and index != b and masks[index] == mask:
            third = other_value(code, at >> 1, 1 - (at & 1))
            saved = own + price_of(neighbour, inputs, prices) - price_of(third, inputs, prices)
            best = max(best, saved)
    return best


@njit(cache=True)
def partner_two(a, codes, masks, table, inputs, seed):  # type: ignore[no-untyped-def]  # pragma: no cover
    """A cube at distance 2 from cube a, from a random start, of at most 96 pairs of places; -1 for none."""
    code = codes[a]
    pairs = inputs * (inputs + 1) // 2
    start = random_below(seed, pairs)
    for offset in range(min(pairs, 96)):
        at = (start + offset) % pairs
        i = np.int64(0)
        while at >= inputs - i:
            at -= inputs - i
            i += 1
        j = i + at
        for first in range(2):
            half = other_value(code, i, first)
            if i == j:
                index = find(half, codes, table)
                if index >= 0 and masks[index] != masks[a]:
                    return index
                continue
            for second in range(2):
                index = find(other_value(half, j, second), codes, table)
                if index >= 0 and masks[index] == masks[a]:
                    return index
    return np.int64(-1)


@njit(cache=True)
def places_between(a, b, codes, masks, inputs, found):  # type: ignore[no-untyped-def]  # pragma: no cover
    """Write the first three differing places (inputs for the outputs) to `found`; returns the distance."""
    x = codes[a] ^ codes[b]
    x = (x | (x >> np.uint64(1))) & np.uint64(0x5555555555555555)
    distance = popcount(x)
    count = 0
    for place in range(inputs):
        if (x >> np.uint64(2 * place)) & np.uint64(1) and count < 3:
            found[count] = place
            count += 1
    if masks[a] != masks[b]:
        distance += 1
        if count < 3:
            found[count] = inputs
    return distance


@njit(cache=True)
def mixed(a, b, places, kinds, count, codes, masks, inputs, out_code, out_mask, slot):  # type: ignore[no-untyped-def]  # pragma: no cover
    """A cube that equals a but at `places`: there the value of a, of b or the third (kinds 0, 1, 2)."""
    code, mask = codes[a], masks[a]
    for k in range(count):
        place = places[k]
        if place == inputs:
            if kinds[k] == 1:
                mask = masks[b]
            elif kinds[k] == 2:
                mask = masks[a] ^ masks[b]
            continue
        field = np.uint64(3) << np.uint64(2 * place)
        if kinds[k] == 1:
            code = (code & ~field) | (codes[b] & field)
        elif kinds[k] == 2:
            code = code ^ (codes[b] & field)
    out_code[slot] = code
    out_mask[slot] = mask


@njit(cache=True)
def anneal(codes, masks, table, state, inputs, prices, moves, heat, seed, best_codes, best_masks):  # type: ignore[no-untyped-def]  # pragma: no cover
    """Random exchanges of pairs, cooling linearly from `heat` (in prices) to 0; returns the best sum's size.

    best_codes, best_masks: filled with the best sum met; state[1] is kept as the price.
    """
    places = np.zeros(3, dtype=np.int64)
    kinds = np.zeros(3, dtype=np.int64)
    order = np.zeros(3, dtype=np.int64)
    new_code = np.zeros(3, dtype=np.uint64)
    new_mask = np.zeros(3, dtype=np.uint64)
    best = state[1]
    size = state[0]
    best_codes[:size] = codes[:size]
    best_masks[:size] = masks[:size]
    since = 0
    idle = 0
    for move in range(moves):
        # A sum without partners, as of a regular function, is found out soon.
        if state[0] < 2 or idle > 50 * state[0] + 1000:
            break
        since += 1
        idle += 1
        if state[1] < best and (since >= state[0] or move == moves - 1):
            best, size, since = state[1], state[0], 0
            best_codes[:size] = codes[:size]
            best_masks[:size] = masks[:size]
        a = random_below(seed, state[0])
        if random_below(seed, 4) < 3:
            b = partner_two(a, codes, masks, table, inputs, seed)
        else:
            b = random_below(seed, state[0])
        if b < 0 or a == b:
            continue
        distance = places_between(a, b, codes, masks, inputs, places)
        if distance > 3 or distance < 2:
            continue
        shuffle(order, distance, seed)
        spent = np.int64(0)
        for k in range(distance):
            for m in range(distance):
                kinds[m] = 1 if order[m] < k else (2 if order[m] == k else 0)
            mixed(a, b, places, kinds, distance, codes, masks, inputs, new_code, new_mask, k)
            spent += price_of(new_code[k], inputs, prices)
            spent -= gain_of(new_code[k], new_mask[k], a, b, codes, masks, table, inputs, prices)
        delta = spent - price_of(codes[a], inputs, prices) - price_of(codes[b], inputs, prices)
        if delta > 0:
            warm = heat * (moves - move) / moves
            chance = (random_word(seed) >> np.uint64(11)) / 9007199254740992.0
            if warm <= 0.0 or chance >= np.exp(-delta / warm):
                continue
        idle = 0
        remove(max(a, b), codes, masks, table, state, inputs, prices)
        remove(min(a, b), codes, masks, table, state, inputs, prices)
        for k in range(distance):
            add(new_code[k], new_mask[k], codes, masks, table, state, inputs, prices, seed)
    if state[1] < best:
        size = state[0]
        best_codes[:size] = codes[:size]
        best_masks[:size] = masks[:size]
    return size


@njit(cache=True)
def shuffle(order, count, seed):  # type: ignore[no-untyped-def]  # pragma: no cover
    """A random order of 0 ... count - 1."""
    for k in range(count):
        order[k] = k
    for k in range(count - 1, 0, -1):
        other = random_below(seed, k + 1)
        order[k], order[other] = order[other], order[k]


@njit(cache=True)
def add_all(new_codes, new_masks, codes, masks, table, state, inputs, prices, seed):  # type: ignore[no-untyped-def]  # pragma: no cover
    """Start a sum: add cubes one by one."""
    for k in range(new_codes.size):
        add(new_codes[k], new_masks[k], codes, masks, table, state, inputs, prices, seed)


@njit(cache=True)
def cycle_lengths(images):  # type: ignore[no-untyped-def]  # pragma: no cover
    """The lengths of the cycles of a permutation, in order of their least elements. images: int64 (size,)."""
    seen = np.zeros(images.size, dtype=np.uint8)
    lengths = np.zeros(images.size, dtype=np.int64)
    count = 0
    for start in range(images.size):
        if seen[start]:
            continue
        at = start
        while not seen[at]:
            seen[at] = 1
            at = images[at]
            lengths[count] += 1
        count += 1
    return lengths[:count]
