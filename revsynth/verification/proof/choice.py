"""Inputs to try: satisfying ones that a solver finds, their neighbours, and a million at random.

Rare predicates are 0 nearly everywhere, so random inputs alone would show little.
"""

from __future__ import annotations

import random
from collections.abc import Sequence

import numpy as np

from revsynth.verification.lifting.parities import FALSE, Literal, Parities
from revsynth.verification.proof.cone import Words
from revsynth.verification.proof.encoding import Encoding
from revsynth.verification.translation import Translation

SATISFYING = 24
"""Satisfying inputs looked for in all, with at least one for each of the first output bits."""
MOST_OUTPUTS = 64
NEIGHBOURS = 4096
"""Neighbours (one bit changed) of satisfying inputs."""
CONFLICTS = 10_000
"""Of the solver, for one input."""
ALL_CONFLICTS = 40_000
"""The same for all of them: rare predicates may be hard to satisfy, which is not the point here."""
"""Conflicts for each question, where that is a second or two; fewer where a conflict costs more."""
NODE_CONFLICTS = 100_000_000
"""Conflicts times nodes for each question: a conflict visits more of a large encoding."""
HOPELESS = 2
"""Output bits for which nothing could be decided, after which no more is looked for."""


class Choice:
    """Inputs by combined index."""

    def __init__(self, parities: Parities, inputs: Sequence[Literal], translation: Translation) -> None:
        self._parities = parities
        self._inputs = list(inputs)
        self._translation = translation
        self._draw = random.Random(0)
        self.satisfying = self._satisfying()
        self.chosen = list(dict.fromkeys([*self.satisfying, *self._neighbours()]))

    def _satisfying(self) -> list[int]:
        """Inputs of the domain at which an output bit is 1, as different as some forced bits make them."""
        found: dict[int, None] = {}
        bits = [bit for bit in dict.fromkeys(self._translation.bits) if bit != FALSE][:MOST_OUTPUTS]
        encoding = Encoding(self._parities)
        hopeless = 0
        try:
            for bit in bits:
                for attempt in range(max(SATISFYING // len(bits), 1)):
                    answer = self._ask(encoding, bit, self._forced(4 * attempt))
                    if answer:
                        found[number(encoding.model(self._inputs))] = None
                    elif answer is None and attempt == 0:
                        hopeless += 1
                        break
                if hopeless == HOPELESS:
                    break
        finally:
            encoding.close()
        return list(found)

    def _ask(self, encoding: Encoding, bit: Literal, forced: list[Literal]) -> bool | None:
        """Whether the bit is 1 somewhere in the domain, with as many forced bits as go with that."""
        answer: bool | None = False
        for literals in (forced, forced[: len(forced) // 4], []):
            wanted = [bit, self._translation.domain, *literals]
            nodes = encoding.size(wanted)
            answer = encoding.ever(wanted, min(CONFLICTS, NODE_CONFLICTS // nodes))
            if answer is not False:
                break
        return answer

    def _forced(self, count: int) -> list[Literal]:
        """Random values for some of the inputs."""
        chosen = self._draw.sample(self._inputs, min(count, len(self._inputs) // 2))
        return [literal ^ self._draw.getrandbits(1) for literal in chosen]

    def _neighbours(self) -> list[int]:
        size = len(self._inputs)
        pairs = [(index, bit) for index in self.satisfying for bit in range(size)]
        if len(pairs) > NEIGHBOURS:
            pairs = self._draw.sample(pairs, NEIGHBOURS)
        return [index ^ (1 << bit) for index, bit in pairs]


def number(bits: Sequence[int]) -> int:
    """The combined index with these bits, bit 0 first."""
    return sum(bit << place for place, bit in enumerate(bits))


def packed(indices: Sequence[int], inputs: int) -> Words:
    """Columns of input bits, 64 indices a word; the last index fills the last word."""
    indices = [*indices, *[indices[-1]] * (-len(indices) % 64)]
    size = -(-inputs // 8)
    raw = b"".join(index.to_bytes(size, "little") for index in indices)
    octets = np.frombuffer(raw, dtype=np.uint8).reshape(len(indices), size)
    bits = np.unpackbits(octets, axis=1, bitorder="little")[:, :inputs].T
    columns = np.ascontiguousarray(np.packbits(bits, axis=1, bitorder="little"))
    return columns.view("<u8").astype(np.uint64)
