"""Numba kernels for permutations of four lines, packed in one uint64: bits 4x ... 4x+3 hold the image of x.

Called by `four_lines`, `meeting` and `table_file`, which check what goes in. A *class* is what simultaneous
relabelling of the lines and inversion make of one permutation: at most 48 words, the smallest stands for it.

The hash table of classes is uint64 (a power of two,): bits 0-59 of an entry are those of the word (the image
of 15 follows from the others), bits 60-63 the size of the class; 0 where empty. A gate is given by `target`,
the line, and `controls`, the mask of the lines that must be 1.
"""

from __future__ import annotations

import numpy as np
from numba import njit


@njit(cache=True)
def swapped01(w):  # type: ignore[no-untyped-def]  # pragma: no cover
    """The word after lines 0 and 1 have changed names."""
    x = (w ^ (w >> np.uint64(4))) & np.uint64(0x00F000F000F000F0)
    w = w ^ x ^ (x << np.uint64(4))
    x = (w ^ (w >> np.uint64(1))) & np.uint64(0x1111111111111111)
    return w ^ x ^ (x << np.uint64(1))


@njit(cache=True)
def swapped12(w):  # type: ignore[no-untyped-def]  # pragma: no cover
    """The word after lines 1 and 2 have changed names."""
    x = (w ^ (w >> np.uint64(8))) & np.uint64(0x0000FF000000FF00)
    w = w ^ x ^ (x << np.uint64(8))
    x = (w ^ (w >> np.uint64(1))) & np.uint64(0x2222222222222222)
    return w ^ x ^ (x << np.uint64(1))


@njit(cache=True)
def swapped23(w):  # type: ignore[no-untyped-def]  # pragma: no cover
    """The word after lines 2 and 3 have changed names."""
    x = (w ^ (w >> np.uint64(16))) & np.uint64(0x00000000FFFF0000)
    w = w ^ x ^ (x << np.uint64(16))
    x = (w ^ (w >> np.uint64(1))) & np.uint64(0x4444444444444444)
    return w ^ x ^ (x << np.uint64(1))


@njit(cache=True)
def composed(outer, inner):  # type: ignore[no-untyped-def]  # pragma: no cover
    """The word of x to outer(inner(x))."""
    w = np.uint64(0)
    for place in range(0, 64, 4):
        shift = np.uint64(place)
        image = (inner >> shift) & np.uint64(15)
        w |= ((outer >> (image << np.uint64(2))) & np.uint64(15)) << shift
    return w


@njit(cache=True)
def inverted(w):  # type: ignore[no-untyped-def]  # pragma: no cover
    """The word of the inverse permutation."""
    found = np.uint64(0)
    for x in range(16):
        image = (w >> np.uint64(4 * x)) & np.uint64(15)
        found |= np.uint64(x) << (image << np.uint64(2))
    return found


@njit(cache=True)
def canonical(w):  # type: ignore[no-untyped-def]  # pragma: no cover
    """The smallest word of the class, over the 24 namings by one swap of neighbours after the other.

    The order of swaps is that of Steinhaus, Johnson and Trotter (common practice), which repeats after eight.
    """
    v = inverted(w)
    best = min(w, v)
    for _ in range(3):
        w, v = swapped23(w), swapped23(v)
        best = min(best, min(w, v))
        w, v = swapped12(w), swapped12(v)
        best = min(best, min(w, v))
        w, v = swapped01(w), swapped01(v)
        best = min(best, min(w, v))
        w, v = swapped23(w), swapped23(v)
        best = min(best, min(w, v))
        w, v = swapped01(w), swapped01(v)
        best = min(best, min(w, v))
        w, v = swapped12(w), swapped12(v)
        best = min(best, min(w, v))
        w, v = swapped23(w), swapped23(v)
        best = min(best, min(w, v))
        w, v = swapped01(w), swapped01(v)
        best = min(best, min(w, v))
    return best


@njit(cache=True)
def after_gate(w, target, controls):  # type: ignore[no-untyped-def]  # pragma: no cover
    """The word of the permutation and then a gate."""
    fires = np.uint64(0x1111111111111111)
    for line in range(4):
        if (controls >> np.uint64(line)) & np.uint64(1):
            fires &= w >> np.uint64(line)
    return w ^ (fires << np.uint64(target))


@njit(cache=True)
def before_gate(w, target, controls):  # type: ignore[no-untyped-def]  # pragma: no cover
    """The word of a gate and then the permutation."""
    bit = np.uint64(1) << np.uint64(target)
    shift = bit << np.uint64(2)
    mask = np.uint64(0)
    for x in range(16):
        state = np.uint64(x)
        if not state & bit and (state & controls) == controls:
            mask |= np.uint64(15) << np.uint64(4 * x)
    moved = (w ^ (w >> shift)) & mask
    return w ^ moved ^ (moved << shift)


@njit(cache=True)
def slot_of(key, slots):  # type: ignore[no-untyped-def]  # pragma: no cover
    """Where the search for a key of 60 bits starts."""
    x = key ^ (key >> np.uint64(29))
    x = x * np.uint64(0xBF58476D1CE4E5B9)
    x ^= x >> np.uint64(32)
    return np.int64(x & np.uint64(slots - 1))


@njit(cache=True)
def size_of_class(word, table):  # type: ignore[no-untyped-def]  # pragma: no cover
    """The size of the class with this smallest word, or -1 where the table does not hold it."""
    key = word & np.uint64(0x0FFFFFFFFFFFFFFF)
    slot = slot_of(key, table.size)
    while table[slot] != np.uint64(0):
        if (table[slot] & np.uint64(0x0FFFFFFFFFFFFFFF)) == key:
            return np.int64(table[slot] >> np.uint64(60))
        slot = (slot + 1) & (table.size - 1)
    return np.int64(-1)


@njit(cache=True)
def add_class(word, size, table):  # type: ignore[no-untyped-def]  # pragma: no cover
    """Enter a class; False, and nothing done, where it is there already."""
    key = word & np.uint64(0x0FFFFFFFFFFFFFFF)
    slot = slot_of(key, table.size)
    while table[slot] != np.uint64(0):
        if (table[slot] & np.uint64(0x0FFFFFFFFFFFFFFF)) == key:
            return False
        slot = (slot + 1) & (table.size - 1)
    table[slot] = key | (np.uint64(size) << np.uint64(60))
    return True


@njit(cache=True)
def add_level(words, size, table):  # type: ignore[no-untyped-def]  # pragma: no cover
    """Enter the classes with these smallest words; how many were new."""
    count = 0
    for word in words:
        if add_class(word, size, table):
            count += 1
    return count


@njit(cache=True)
def next_level(words, targets, controls, size, table, found):  # type: ignore[no-untyped-def]  # pragma: no cover
    """Enter the classes one gate away from those of `words` that are not in the table; how many there are.

    found: uint64 (capacity,), gets their smallest words; where it is too short the result exceeds its length.
    The classes of one size and inversion make it enough to put each gate on both sides of one word a class.
    """
    count = 0
    for word in words:
        for gate in range(targets.size):
            for side in range(2):
                if side == 0:
                    other = canonical(after_gate(word, targets[gate], controls[gate]))
                else:
                    other = canonical(before_gate(word, targets[gate], controls[gate]))
                if add_class(other, size, table):
                    if count < found.size:
                        found[count] = other
                    count += 1
                    if count > found.size:
                        return count
    return count


@njit(cache=True)
def namings(w, out):  # type: ignore[no-untyped-def]  # pragma: no cover
    """The 24 words under relabelling, in the order of `canonical`, w first; out: uint64 (24,)."""
    for begin in range(0, 24, 8):
        out[begin + 0] = w
        w = swapped23(w)
        out[begin + 1] = w
        w = swapped12(w)
        out[begin + 2] = w
        w = swapped01(w)
        out[begin + 3] = w
        w = swapped23(w)
        out[begin + 4] = w
        w = swapped01(w)
        out[begin + 5] = w
        w = swapped12(w)
        out[begin + 6] = w
        w = swapped23(w)
        out[begin + 7] = w
        w = swapped01(w)


@njit(cache=True)
def words_of_classes(words):  # type: ignore[no-untyped-def]  # pragma: no cover
    """How many different words each class has; words: the smallest ones, uint64 (k,), to uint8 (k,)."""
    counts = np.empty(words.size, dtype=np.uint8)
    some = np.empty(48, dtype=np.uint64)
    for index in range(words.size):
        namings(words[index], some[:24])
        namings(inverted(words[index]), some[24:])
        count = 0
        for place in range(48):
            new = True
            for earlier in range(place):
                if some[earlier] == some[place]:
                    new = False
                    break
            count += new
        counts[index] = count
    return counts


@njit(cache=True)
def signatures(w, point):  # type: ignore[no-untyped-def]  # pragma: no cover
    """Two numbers that all words of a class share: sums over x of point[x, p(x)], and with point[x, p(p(x))].

    point: uint64 (256,), entry 16 x + y, the same for (x, y), (y, x) and both relabelled.
    """
    first = np.uint64(0)
    second = np.uint64(0)
    for x in range(16):
        y = (w >> np.uint64(4 * x)) & np.uint64(15)
        z = (w >> (y << np.uint64(2))) & np.uint64(15)
        first += point[16 * x + np.int64(y)]
        second += point[16 * x + np.int64(z)]
    return first, first ^ (second * np.uint64(0x9E3779B97F4A7C15))


@njit(cache=True)
def enter_signatures(words, point, first_bits, second_bits):  # type: ignore[no-untyped-def]  # pragma: no cover
    """Set a bit for each signature of the words; both sets: uint64, a power of two of words."""
    for word in words:
        first, second = signatures(word, point)
        place = np.int64(first >> np.uint64(20)) & (64 * first_bits.size - 1)
        first_bits[place >> 6] |= np.uint64(1) << np.uint64(place & 63)
        place = np.int64(second >> np.uint64(20)) & (64 * second_bits.size - 1)
        second_bits[place >> 6] |= np.uint64(1) << np.uint64(place & 63)


@njit(cache=True)
def meet(named, words, size, table, point, first_bits, second_bits):  # type: ignore[no-untyped-def]  # pragma: no cover
    """The first pair of a class and a naming of the function that leave a class of `size` in the table.

    named: uint8 (24, 16), the images under the 24 `namings`; words: smallest words of classes; bit sets as
    `enter_signatures` makes them of all classes of `size`. Finds the word r, or its inverse, with
    size(named[i] after r) = `size`, and gives 48 * index of r + 2 * i + (1 for the inverse); -1 where none.
    The signatures rule out all but one pair in a thousand before the smallest word is looked for.
    """
    inner = np.empty(16, dtype=np.int64)
    image = np.empty(16, dtype=np.int64)
    first_mask = np.int64(64 * first_bits.size - 1)
    second_mask = np.int64(64 * second_bits.size - 1)
    for index in range(words.size):
        word = words[index]
        for side in range(2):
            for x in range(16):
                inner[x] = np.int64((word >> np.uint64(4 * x)) & np.uint64(15))
            for name in range(24):
                first = np.uint64(0)
                for x in range(16):
                    image[x] = named[name, inner[x]]
                    first += point[16 * x + image[x]]
                place = np.int64(first >> np.uint64(20)) & first_mask
                if not (first_bits[place >> 6] >> np.uint64(place & 63)) & np.uint64(1):
                    continue
                second = np.uint64(0)
                for x in range(16):
                    second += point[16 * x + image[image[x]]]
                second = first ^ (second * np.uint64(0x9E3779B97F4A7C15))
                place = np.int64(second >> np.uint64(20)) & second_mask
                if not (second_bits[place >> 6] >> np.uint64(place & 63)) & np.uint64(1):
                    continue
                rest = np.uint64(0)
                for x in range(16):
                    rest |= np.uint64(image[x]) << np.uint64(4 * x)
                if size_of_class(canonical(rest), table) == size:
                    return np.int64(48 * index + 2 * name + side)
            word = inverted(word)
    return np.int64(-1)


@njit(cache=True)
def peeled(w, targets, controls, table, gates):  # type: ignore[no-untyped-def]  # pragma: no cover
    """The gates of a permutation whose class is in the table, the last one first; how many there are.

    gates: int64 (capacity,). -1 where the class is not in the table.
    """
    size = size_of_class(canonical(w), table)
    for step in range(size):
        for gate in range(targets.size):
            other = after_gate(w, targets[gate], controls[gate])
            if size_of_class(canonical(other), table) == size - step - 1:
                gates[step] = gate
                w = other
                break
    return size


@njit(cache=True)
def varint_encoded(differences, out):  # type: ignore[no-untyped-def]  # pragma: no cover
    """Seven bits a byte, lowest first, bit 7 where more follow; the bytes used of `out`, uint8."""
    place = 0
    for difference in differences:
        rest = difference
        while rest >= np.uint64(128):
            out[place] = np.uint8(rest & np.uint64(127)) | np.uint8(128)
            rest = rest >> np.uint64(7)
            place += 1
        out[place] = np.uint8(rest)
        place += 1
    return place


@njit(cache=True)
def varint_decoded(data, out):  # type: ignore[no-untyped-def]  # pragma: no cover
    """The reverse, sums taken: out[i] = out[i-1] + difference. False where the bytes do not fit `out`."""
    place = 0
    total = np.uint64(0)
    for index in range(out.size):
        difference = np.uint64(0)
        shift = np.uint64(0)
        while True:
            if place == data.size or shift > np.uint64(63):
                return False
            byte = np.uint64(data[place])
            place += 1
            difference |= (byte & np.uint64(127)) << shift
            shift += np.uint64(7)
            if byte < np.uint64(128):
                break
        total += difference
        out[index] = total
    return place == data.size
