"""Cubes (products of literals) and exclusive sums of them for several outputs, as bit masks.

A cube holds at input x where `x & care == value`: bit i of `care` says that input bit i takes part, bit i of
`value` that it takes part unnegated. Bit j of `feeds` says that the cube takes part in output j.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from revsynth.logic.truth_table import Columns, last_word_mask, unpack, variable, words_for

MAX_OUTPUTS = 64


class Cube(NamedTuple):
    """One cube and the outputs it takes part in."""

    care: int
    value: int
    feeds: int = 1

    def text(self, inputs: int) -> str:
        """One character an input, input bit 0 leftmost: 0, 1, or - where it takes no part."""
        return "".join("-" if not self.care >> i & 1 else str(self.value >> i & 1) for i in range(inputs))


@dataclass(frozen=True, eq=False)
class ExclusiveSum:
    """An exclusive sum of cubes for each of at most 64 outputs; `care`, `value`, `feeds`: uint64."""

    inputs: int
    outputs: int
    care: NDArray[np.uint64]
    value: NDArray[np.uint64]
    feeds: NDArray[np.uint64]

    def __post_init__(self) -> None:
        if not 0 <= self.outputs <= MAX_OUTPUTS:
            raise ValueError(f"an exclusive sum has at most {MAX_OUTPUTS} outputs, not {self.outputs}")

    @classmethod
    def of(cls, inputs: int, outputs: int, cubes: Sequence[Cube]) -> ExclusiveSum:
        """Collect cubes."""
        rows = np.array([tuple(cube) for cube in cubes], dtype=np.uint64).reshape(-1, 3)
        return cls(inputs, outputs, rows[:, 0].copy(), rows[:, 1].copy(), rows[:, 2].copy())

    @classmethod
    def from_coefficients(cls, coefficients: Columns, inputs: int, polarity: int) -> ExclusiveSum:
        """The cubes of fixed-polarity forms, one row of coefficients an output; a shared cube is one cube."""
        outputs = coefficients.shape[0]
        together = (
            np.bitwise_or.reduce(coefficients, axis=0)
            if outputs
            else np.zeros(words_for(inputs), dtype=np.uint64)
        )
        care = np.flatnonzero(unpack(together, inputs)).astype(np.uint64)
        feeds = np.zeros(len(care), dtype=np.uint64)
        word, bit = care >> np.uint64(6), care & np.uint64(63)
        for output in range(outputs):
            feeds |= ((coefficients[output][word] >> bit) & np.uint64(1)) << np.uint64(output)
        return cls(inputs, outputs, care, care & ~np.uint64(polarity), feeds)

    def __len__(self) -> int:
        return len(self.care)

    def __iter__(self) -> Iterator[Cube]:
        for row in zip(self.care.tolist(), self.value.tolist(), self.feeds.tolist(), strict=True):
            yield Cube(*row)

    def sizes(self) -> NDArray[np.int64]:
        """The number of literals of each cube."""
        return np.bitwise_count(self.care).astype(np.int64)

    def price(self, prices: Sequence[int]) -> int:
        """The sum of prices[k] over the cubes of k literals; a cube counts once for all its outputs."""
        return int(np.asarray(prices, dtype=np.int64)[self.sizes()].sum())

    def in_order(self) -> ExclusiveSum:
        """Equal cubes joined, cubes that feed nothing dropped, sorted: fewest literals, then care, value."""
        order = np.lexsort((self.value, self.care))
        care, value, feeds = self.care[order], self.value[order], self.feeds[order]
        if len(order):
            new = np.ones(len(order), dtype=bool)
            new[1:] = (care[1:] != care[:-1]) | (value[1:] != value[:-1])
            starts = np.flatnonzero(new)
            feeds = np.bitwise_xor.reduceat(feeds, starts)
            care, value = care[starts], value[starts]
        keep = feeds != 0
        care, value, feeds = care[keep], value[keep], feeds[keep]
        order = np.lexsort((value, care, np.bitwise_count(care)))
        return ExclusiveSum(self.inputs, self.outputs, care[order], value[order], feeds[order])

    def evaluate(self) -> Columns:
        """The packed values, shape (outputs, words), input 0 in bit 0 of word 0."""
        result = np.zeros((self.outputs, words_for(self.inputs)), dtype=np.uint64)
        literals = [variable(self.inputs, i) for i in range(self.inputs)]
        mask = last_word_mask(self.inputs)
        for care, value, feeds in self:
            product = np.full(result.shape[1], mask, dtype=np.uint64)
            for i in range(self.inputs):
                if care >> i & 1:
                    product &= literals[i] if value >> i & 1 else ~literals[i]
            for output in range(self.outputs):
                if feeds >> output & 1:
                    result[output] ^= product
        return result
