"""Values of all nodes on many inputs, one Python integer a node: the signatures of linear resubstitution."""

from __future__ import annotations

from collections.abc import Sequence
from random import Random

import numpy as np

from revsynth.logic.network import Network
from revsynth.logic.truth_table import variable

Row = int
"""Bit j: the value for sample j."""


def node_rows(network: Network, inputs: Sequence[Row], width: int) -> list[Row]:
    """The value of every node for `width` samples; inputs[i] holds those of input i."""
    everything = (1 << width) - 1
    values = [0, *inputs]
    rows = zip(network.is_xor.tolist(), network.left.tolist(), network.right.tolist(), strict=True)
    for is_xor, left, right in rows:
        a = values[left >> 1] ^ everything if left & 1 else values[left >> 1]
        b = values[right >> 1] ^ everything if right & 1 else values[right >> 1]
        values.append(a ^ b if is_xor else a & b)
    return values


def all_inputs(inputs: int) -> list[Row]:
    """The columns of the inputs over all 2**inputs inputs, input 0 in bit 0."""
    mask = (1 << (1 << inputs)) - 1
    return [
        int.from_bytes(variable(inputs, i).astype("<u8").tobytes(), "little") & mask for i in range(inputs)
    ]


class Samples:
    """Inputs drawn at random, sparse and dense ones among them, and counterexamples as they come."""

    def __init__(self, inputs: int, width: int, seed: int) -> None:
        random = Random(seed)
        self.inputs = inputs
        self.width = width // 2
        self.columns = [random.getrandbits(self.width) if self.width else 0 for _ in range(inputs)]
        sparse = []
        for turn in range(width - width // 2):
            # Few bits differ from all 0 or all 1.
            base = (0, (1 << inputs) - 1)[turn & 1]
            for _ in range(1 + turn % 3):
                base ^= 1 << random.randrange(inputs)
            sparse.append(base)
        self._add_all(sparse)
        self._random = random

    def _add_all(self, samples: list[int]) -> None:
        """Inputs as integers; bit i is input i."""
        size = (self.inputs + 7) // 8
        packed = b"".join(sample.to_bytes(size, "little") for sample in samples)
        bits = np.unpackbits(
            np.frombuffer(packed, np.uint8).reshape(len(samples), size), axis=1, bitorder="little"
        )
        columns = np.packbits(bits.T, axis=1, bitorder="little")
        for i in range(self.inputs):
            self.columns[i] |= int.from_bytes(columns[i].tobytes(), "little") << self.width
        self.width += len(samples)

    def add_with_neighbours(self, sample: int, count: int = 16) -> None:
        """A counterexample and inputs that differ from it in one to three bits."""
        near_by = [sample]
        for turn in range(count):
            near = sample
            for _ in range(1 + turn % 3):
                near ^= 1 << self._random.randrange(self.inputs)
            near_by.append(near)
        self._add_all(near_by)
