"""Values of all nodes on many inputs, one Python integer a node: the signatures of linear resubstitution."""

from __future__ import annotations

from collections.abc import Sequence
from random import Random

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
        self.width = 0
        self.columns = [0] * inputs
        for _ in range(width // 2):
            self.add(random.getrandbits(inputs))
        for turn in range(width - width // 2):
            # Few bits differ from all 0, all 1 or the complement of a random word's copy.
            base = (0, (1 << inputs) - 1)[turn & 1]
            for _ in range(1 + turn % 3):
                base ^= 1 << random.randrange(inputs)
            self.add(base)
        self._random = random

    def add(self, sample: int) -> None:
        """One input; bit i is input i."""
        place = 1 << self.width
        self.width += 1
        for i in range(self.inputs):
            if sample >> i & 1:
                self.columns[i] |= place

    def add_with_neighbours(self, sample: int, count: int = 16) -> None:
        """A counterexample and inputs that differ from it in one to three bits."""
        self.add(sample)
        for turn in range(count):
            near = sample
            for _ in range(1 + turn % 3):
                near ^= 1 << self._random.randrange(self.inputs)
            self.add(near)
