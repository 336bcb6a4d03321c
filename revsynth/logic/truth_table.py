"""Packed truth tables: 64 inputs a word.

A *column* over n inputs is a `uint64` array of `words_for(n)` words; the value at input x is bit
`x % 64` (least significant first) of word `x // 64`. Below 6 inputs the one word's upper bits are 0.
"""

from __future__ import annotations

from typing import TypeAlias

import numpy as np
from numpy.typing import NDArray

Column: TypeAlias = NDArray[np.uint64]
"""Shape (words,): one bit an input."""
Columns: TypeAlias = NDArray[np.uint64]
"""Shape (k, words): k columns, column 0 the least significant bit of a value."""

ALL_ONES = np.uint64(0xFFFFFFFFFFFFFFFF)
_PATTERNS = (
    0xAAAAAAAAAAAAAAAA,
    0xCCCCCCCCCCCCCCCC,
    0xF0F0F0F0F0F0F0F0,
    0xFF00FF00FF00FF00,
    0xFFFF0000FFFF0000,
    0xFFFFFFFF00000000,
)


def words_for(inputs: int) -> int:
    """Number of 64-bit words of a column over `inputs` input bits (at least 1)."""
    return 1 << max(inputs - 6, 0)


def last_word_mask(inputs: int) -> np.uint64:
    """Ones at the valid bits of each word (all 64 from 6 inputs on)."""
    return ALL_ONES if inputs >= 6 else np.uint64((1 << (1 << inputs)) - 1)


def zeros(inputs: int) -> Column:
    """The constant-0 column."""
    return np.zeros(words_for(inputs), dtype=np.uint64)


def ones(inputs: int) -> Column:
    """The constant-1 column."""
    return np.full(words_for(inputs), last_word_mask(inputs), dtype=np.uint64)


def variable(inputs: int, index: int) -> Column:
    """The column of input bit `index` (0 is the least significant bit of the input number)."""
    if not 0 <= index < inputs:
        raise ValueError(f"variable {index} of {inputs} inputs does not exist")
    if index < 6:
        word = np.uint64(_PATTERNS[index]) & last_word_mask(inputs)
        return np.full(words_for(inputs), word, dtype=np.uint64)
    block = 1 << (index - 6)
    halves = np.array([0, ALL_ONES], dtype=np.uint64).repeat(block)
    return np.tile(halves, words_for(inputs) // (2 * block))


def pack(bits: NDArray[np.bool_] | NDArray[np.uint8]) -> Column:
    """Pack a 0/1 array of shape (2**n,), input 0 first, into a column."""
    flat = np.ascontiguousarray(bits).astype(np.uint8, copy=False)
    if flat.ndim != 1 or flat.size & (flat.size - 1) or flat.size == 0:
        raise ValueError(f"a truth table needs 2**n entries in one row, not shape {flat.shape}")
    packed = np.packbits(flat, bitorder="little")
    if packed.size < 8:
        packed = np.concatenate([packed, np.zeros(8 - packed.size, dtype=np.uint8)])
    return packed.view("<u8").astype(np.uint64, copy=False)


def unpack(column: Column, inputs: int) -> NDArray[np.uint8]:
    """The 0/1 array of shape (2**inputs,), input 0 first."""
    as_bytes = np.ascontiguousarray(column).astype("<u8", copy=False).view(np.uint8)
    return np.unpackbits(as_bytes, bitorder="little", count=1 << inputs)


def pack_values(values: NDArray[np.integer], bits: int) -> Columns:
    """Columns (bits, words) of the low `bits` bits of integer `values`, shape (2**n,), bit 0 first."""
    return (
        np.stack([pack(((values >> bit) & 1).astype(np.uint8)) for bit in range(bits)])
        if bits
        else (np.zeros((0, words_for(values.size.bit_length() - 1)), dtype=np.uint64))
    )


def unpack_values(columns: Columns, inputs: int) -> NDArray[np.int64]:
    """Values of shape (2**inputs,) from at most 63 columns, column 0 the least significant bit."""
    if columns.shape[0] > 63:
        raise ValueError(f"{columns.shape[0]} columns do not fit a 64-bit integer")
    total = np.zeros(1 << inputs, dtype=np.int64)
    for bit in range(columns.shape[0]):
        total |= unpack(columns[bit], inputs).astype(np.int64) << bit
    return total


def count_ones(column: Column) -> int:
    """How many inputs have value 1."""
    return int(np.bitwise_count(column).sum(dtype=np.int64))


def first_inputs(column: Column, limit: int) -> list[int]:
    """The first `limit` inputs with value 1, ascending."""
    found: list[int] = []
    for word_index in np.flatnonzero(column):
        word = int(column[word_index])
        while word and len(found) < limit:
            low = word & -word
            found.append(int(word_index) * 64 + low.bit_length() - 1)
            word ^= low
        if len(found) >= limit:
            break
    return found
