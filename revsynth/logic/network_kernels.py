"""Compiled loops over networks, used through `network_simulation`."""

from __future__ import annotations

import numpy as np
from numba import njit
from numpy.typing import NDArray

Words = NDArray[np.uint64]


@njit(cache=True)
def run_nodes(  # pragma: no cover
    is_xor: NDArray[np.bool_], left: NDArray[np.uint32], right: NDArray[np.uint32], values: Words
) -> None:
    """values: (nodes, words), rows of constant and inputs filled in; the rows of the gates are written."""
    one = np.uint32(1)
    zero = np.uint64(0)
    first = values.shape[0] - len(is_xor)
    words = values.shape[1]
    for gate in range(len(is_xor)):
        a = values[left[gate] >> one]
        b = values[right[gate] >> one]
        out = values[first + gate]
        if is_xor[gate]:
            for w in range(words):
                out[w] = a[w] ^ b[w]
        else:
            flip_a = zero - np.uint64(left[gate] & one)
            flip_b = zero - np.uint64(right[gate] & one)
            for w in range(words):
                out[w] = (a[w] ^ flip_a) & (b[w] ^ flip_b)


@njit(cache=True)
def run_blocks(  # pragma: no cover
    is_xor: NDArray[np.bool_],
    left: NDArray[np.uint32],
    right: NDArray[np.uint32],
    outputs: NDArray[np.uint32],
    inputs: Words,
    block: Words,
    result: Words,
) -> None:
    """inputs: (inputs, words); block: (nodes, b), row 0 zero; result: (outputs, words), written.

    The last block is run whole; what stands beyond the inputs in it is not used.
    """
    one = np.uint32(1)
    zero = np.uint64(0)
    width = block.shape[1]
    words = inputs.shape[1]
    for begin in range(0, words, width):
        size = min(width, words - begin)
        for i in range(inputs.shape[0]):
            for w in range(size):
                block[1 + i, w] = inputs[i, begin + w]
        run_nodes(is_xor, left, right, block)
        for i in range(len(outputs)):
            flip = zero - np.uint64(outputs[i] & one)
            row = block[outputs[i] >> one]
            for w in range(size):
                result[i, begin + w] = row[w] ^ flip
