"""Networks on chosen inputs: values of words in, values of outputs out."""

from __future__ import annotations

import random
from collections.abc import Mapping, Sequence

import numpy as np

from revsynth.logic.network import Network
from revsynth.logic.network_simulation import simulate
from revsynth.spec.layout import Value, decode
from revsynth.spec.model import Word


def run(network: Network, indices: Sequence[int]) -> list[int]:
    """The outputs as one number each, output 0 the lowest bit, at inputs given by their combined index."""
    words = -(-len(indices) // 64)
    inputs = np.zeros((network.inputs, words), dtype=np.uint64)
    for sample, index in enumerate(indices):
        for bit in range(network.inputs):
            inputs[bit, sample // 64] |= np.uint64((index >> bit & 1) << sample % 64)
    rows = [[int(word) for word in row] for row in simulate(network, inputs)]
    return [
        sum((row[sample // 64] >> sample % 64 & 1) << bit for bit, row in enumerate(rows))
        for sample in range(len(indices))
    ]


def some_inputs(words: Sequence[Word], seed: int, count: int = 64) -> list[int]:
    """Combined indices: each word is random, near an end, small, a power of two, or near another word."""
    draw = random.Random(seed)
    found = []
    for _ in range(count):
        index = shift = 0
        last = 0
        for word in words:
            for _ in range(word.count or 1):
                mask = (1 << word.bits) - 1
                last = draw.choice(
                    [
                        draw.getrandbits(word.bits),
                        draw.getrandbits(word.bits),
                        mask - draw.randrange(3),
                        draw.randrange(8),
                        1 << draw.randrange(word.bits),
                        (1 << word.bits - 1) - draw.randrange(2),
                        last + draw.randrange(-1, 2),
                    ]
                )
                index |= (last & mask) << shift
                shift += word.bits
        found.append(index)
    return found


def at(words: Sequence[Word], index: int) -> Mapping[str, Value]:
    """The values of the words at a combined index."""
    return decode(words, index)
