"""Transformation-based synthesis of one large permutation on bit-sliced columns, compiled.

Source: Miller, Maslov, Dueck, "A transformation based algorithm for reversible logic synthesis", DAC 2003.
The value bits of all 2**n rows are n columns of 64 rows a word, so a gate is one AND a control and one XOR
over the columns. Importing this module imports numba: do so only where the permutation is large.
"""

from __future__ import annotations

import numpy as np
from numba import njit
from numpy.typing import NDArray

from revsynth.logic.truth_table import pack_values, words_for
from revsynth.synthesis.rows import ControlChoice, Directions, GateLists

MAX_LINES = 20


@njit(cache=True)
def read_value(columns, index):  # type: ignore[no-untyped-def]  # pragma: no cover
    """The value of row `index`: bit b from column b. columns: uint64 (n, words); index: uint64."""
    word = np.int64(index >> np.uint64(6))
    shift = index & np.uint64(63)
    value = np.uint64(0)
    for bit in range(columns.shape[0]):
        value |= ((columns[bit, word] >> shift) & np.uint64(1)) << np.uint64(bit)
    return np.uint64(value)


@njit(cache=True)
def find_value(columns, valid, value):  # type: ignore[no-untyped-def]  # pragma: no cover
    """The row that holds `value`. columns: uint64 (n, words); valid: uint64 mask of the rows of a word.

    The value must occur; 0 otherwise.
    """
    for word in range(columns.shape[1]):
        same = valid
        for bit in range(columns.shape[0]):
            if (value >> np.uint64(bit)) & np.uint64(1):
                same &= columns[bit, word]
            else:
                same &= ~columns[bit, word]
            if same == np.uint64(0):
                break
        if same != np.uint64(0):
            row = np.uint64(word) << np.uint64(6)
            while same & np.uint64(1) == np.uint64(0):
                same >>= np.uint64(1)
                row += np.uint64(1)
            return np.uint64(row)
    return np.uint64(0)


@njit(cache=True)
def apply_gate(columns, scratch, start, care, target):  # type: ignore[no-untyped-def]  # pragma: no cover
    """XOR the AND of the columns in `care` into column `target`, from word `start` on.

    columns: uint64 (n, words); scratch: uint64 (words,), overwritten; care: uint64 mask of the controls.
    """
    words = columns.shape[1]
    for word in range(start, words):
        scratch[word] = ~np.uint64(0)
    for bit in range(columns.shape[0]):
        if (care >> np.uint64(bit)) & np.uint64(1):
            for word in range(start, words):
                scratch[word] &= columns[bit, word]
    for word in range(start, words):
        columns[target, word] ^= scratch[word]


@njit(cache=True)
def choose_controls(value, row, lines, minimal):  # type: ignore[no-untyped-def]  # pragma: no cover
    """The highest ones of `value` until they reach `row` (all of them unless `minimal`); uint64 masks."""
    if not minimal:
        return np.uint64(value)
    chosen = np.uint64(0)
    for step in range(lines):
        if chosen >= row:
            break
        chosen |= value & (np.uint64(1) << np.uint64(lines - 1 - step))
    return np.uint64(chosen)


@njit(cache=True)
def differing_bits(one, other):  # type: ignore[no-untyped-def]  # pragma: no cover
    """How many bits of two uint64 differ."""
    rest = one ^ other
    count = 0
    while rest != np.uint64(0):
        rest &= rest - np.uint64(1)
        count += 1
    return count


@njit(cache=True)
def transform(  # type: ignore[no-untyped-def]  # pragma: no cover
    after, before, forward, inverse, valid, both, minimal, target, care, on_input
):
    """Synthesise; the gates in the order found go to target, care and on_input. Returns how many.

    after, before: uint64 (n, words), the columns of the permutation and of its inverse, overwritten;
    forward, inverse: uint32 (2**n,), the two tables (length 0 and `before` unused unless `both`);
    valid: uint64, the rows of one word; target: int32; care: uint64; on_input: uint8, all long enough.
    """
    lines = after.shape[0]
    scratch = np.zeros(after.shape[1], dtype=np.uint64)
    count = 0
    for number in range(1 << lines):
        row = np.uint64(number)
        side = np.uint8(0)
        start = number >> 6
        if both:
            start = 0
            value = read_value(after, np.uint64(inverse[find_value(before, valid, row)]))
            source = read_value(before, np.uint64(forward[find_value(after, valid, row)]))
            here, there = differing_bits(value, row), differing_bits(source, row)
            if there < here or (there == here and source < value):
                side = np.uint8(1)
                value = source
        else:
            value = read_value(after, row)
        for step in range(2 * lines):
            bit = np.uint64(step % lines)
            one = np.uint64(1) << bit
            wanted = np.uint64(1) if step < lines else np.uint64(0)
            if (row >> bit) & np.uint64(1) != wanted or (value >> bit) & np.uint64(1) == wanted:
                continue
            controls = choose_controls(value & ~one, row, lines, minimal)
            target[count] = np.int32(bit)
            care[count] = controls
            on_input[count] = side
            count += 1
            if side == np.uint8(1):
                apply_gate(before, scratch, start, controls, np.int64(bit))
            else:
                apply_gate(after, scratch, start, controls, np.int64(bit))
            value ^= one
    return count


def transform_one(
    table: NDArray[np.integer],
    *,
    directions: Directions = "both",
    controls: ControlChoice = "minimal",
) -> GateLists:
    """Synthesise one permutation, shape (2**lines,), entry x the image of x, up to 20 lines.

    The result (a batch of one) is exactly that of `rows.transform_many` with side `distance`. Raises
    ValueError for another shape, too many lines, or a table that is no permutation. Time and gates grow as
    lines * 2**lines, each gate a pass over 2**lines bits.
    """
    size = table.shape[0] if table.ndim == 1 else 0
    lines = size.bit_length() - 1
    if size == 0 or size & (size - 1) or lines > MAX_LINES:
        raise ValueError(f"a table of 2**lines entries, at most 2**{MAX_LINES}, wanted, not {table.shape}")
    wide = np.asarray(table, dtype=np.int64)
    if wide.min() < 0 or wide.max() >= size or np.any(np.bincount(wide, minlength=size) != 1):
        raise ValueError("the table must hold each of 0 ... 2**lines - 1 once")
    both = directions == "both"
    inverse = np.zeros(size if both else 0, dtype=np.uint32)
    if both:
        inverse[wide] = np.arange(size, dtype=np.uint32)
    after = pack_values(wide, lines).reshape(lines, words_for(lines))
    before = pack_values(inverse.astype(np.int64), lines) if both else after[:0]
    most = max(lines, 1) * size
    target = np.zeros(most, dtype=np.int32)
    care = np.zeros(most, dtype=np.uint64)
    on_input = np.zeros(most, dtype=np.uint8)
    valid = np.uint64((1 << min(size, 64)) - 1)
    forward = wide.astype(np.uint32) if both else inverse
    count = int(
        transform(after, before, forward, inverse, valid, both, controls == "minimal", target, care, on_input)
    )
    first = on_input[:count].astype(bool)
    order = np.concatenate([np.flatnonzero(first), np.flatnonzero(~first)[::-1]])
    return GateLists(lines, np.array([0, count], dtype=np.int64), target[order], care[order])
