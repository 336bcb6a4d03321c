"""Running a network on many inputs at once, 64 to a word.

Large runs go block by block, so that the values of all nodes for a block stay in the cache; without blocks
the speed drops threefold.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from revsynth.logic.network import Network
from revsynth.logic.truth_table import Columns, last_word_mask, words_for

Words = NDArray[np.uint64]
Literals = NDArray[np.uint32]

BLOCK = 64
"""Words a node and block."""
COMPILED = 2_000_000
"""From so many node-words on the compiled loop pays for its start."""
MOST_INPUTS = 24
"""Up to so many inputs all of them are tabulated."""


def simulate(network: Network, inputs: Words) -> Words:
    """The outputs for `inputs`: uint64 (inputs, words), bit b of word w is sample 64 w + b.

    Returns uint64 (outputs, words). Raises ValueError for another shape or dtype.
    """
    _check(network, inputs)
    words = inputs.shape[1]
    if network.nodes * words >= COMPILED:
        from revsynth.logic.network_kernels import run_blocks

        result = np.empty((len(network.outputs), words), dtype=np.uint64)
        block = np.zeros((network.nodes, min(BLOCK, max(words, 1))), dtype=np.uint64)
        left, right, outputs = _unsigned(network)
        run_blocks(network.is_xor, left, right, outputs, np.ascontiguousarray(inputs), block, result)
        return result
    values = simulate_nodes(network, inputs)
    flips = np.uint64(0) - (network.outputs & 1).astype(np.uint64)[:, None]
    found: Words = values[network.outputs >> 1] ^ flips
    return found


def simulate_nodes(network: Network, inputs: Words) -> Words:
    """The value of every node, uint64 (nodes, words): memory grows with both."""
    _check(network, inputs)
    words = inputs.shape[1]
    if network.nodes * words >= COMPILED:
        from revsynth.logic.network_kernels import run_nodes

        values = np.zeros((network.nodes, words), dtype=np.uint64)
        values[1 : 1 + network.inputs] = inputs
        left, right, _ = _unsigned(network)
        run_nodes(network.is_xor, left, right, values)
        return values
    return _simulate_plain(network, inputs)


def _simulate_plain(network: Network, inputs: Words) -> Words:
    """The same in plain Python integers, one a node: quick for small networks, nothing to compile."""
    words = inputs.shape[1]
    everything = (1 << 64 * words) - 1
    values = [0, *(int.from_bytes(np.ascontiguousarray(row).tobytes(), "little") for row in inputs)]
    rows = zip(network.is_xor.tolist(), network.left.tolist(), network.right.tolist(), strict=True)
    for is_xor, left, right in rows:
        a = values[left >> 1] ^ everything if left & 1 else values[left >> 1]
        b = values[right >> 1] ^ everything if right & 1 else values[right >> 1]
        values.append(a ^ b if is_xor else a & b)
    flat = b"".join(value.to_bytes(8 * words, "little") for value in values)
    return np.frombuffer(flat, dtype="<u8").astype(np.uint64).reshape(len(values), words)


def tabulate(network: Network) -> Columns:
    """The packed truth tables of all outputs, shape (outputs, words), as in `truth_table`.

    Raises ValueError for more than MOST_INPUTS inputs.
    """
    if network.inputs > MOST_INPUTS:
        raise ValueError(f"{network.inputs} inputs: up to {MOST_INPUTS} are tabulated")
    words = words_for(network.inputs)
    table = np.empty((len(network.outputs), words), dtype=np.uint64)
    chunk = min(words, 1 << 14)
    for begin in range(0, words, chunk):
        table[:, begin : begin + chunk] = simulate(network, input_columns(network.inputs, begin, chunk))
    table &= last_word_mask(network.inputs)
    return table


_PATTERNS = np.array(
    [
        0xAAAAAAAAAAAAAAAA,
        0xCCCCCCCCCCCCCCCC,
        0xF0F0F0F0F0F0F0F0,
        0xFF00FF00FF00FF00,
        0xFFFF0000FFFF0000,
        0xFFFFFFFF00000000,
    ],
    dtype=np.uint64,
)


def input_columns(inputs: int, begin: int, words: int) -> Words:
    """Words `begin` ... of the columns of all inputs: bit b of word w belongs to input 64 w + b."""
    columns = np.empty((inputs, words), dtype=np.uint64)
    columns[:6] = _PATTERNS[:inputs, None]
    index = np.arange(begin, begin + words, dtype=np.uint64)
    for bit in range(6, inputs):
        columns[bit] = np.uint64(0) - ((index >> np.uint64(bit - 6)) & np.uint64(1))
    return columns


def _check(network: Network, inputs: Words) -> None:
    if inputs.ndim != 2 or inputs.shape[0] != network.inputs or inputs.dtype != np.uint64:
        raise ValueError(
            f"uint64 of shape ({network.inputs}, words) wanted, not {inputs.dtype} {inputs.shape}"
        )


def _unsigned(network: Network) -> tuple[Literals, Literals, Literals]:
    left, right, outputs = (x.astype(np.uint32) for x in (network.left, network.right, network.outputs))
    return left, right, outputs
