"""The spec's gates against the spec evaluated in plain integers: at satisfying inputs first, then at others.

Rare predicates are 0 nearly everywhere, so random inputs alone would show little: a solver finds inputs at
which they are 1, and their neighbours are tried too.
"""

from __future__ import annotations

import random
from collections.abc import Sequence

import numpy as np

from revsynth.spec.expectation import Expectation
from revsynth.spec.layout import describe
from revsynth.spec.understand import Understanding
from revsynth.verification.lifting.parities import FALSE, Literal, Parities
from revsynth.verification.proof.cone import Cone, Words
from revsynth.verification.proof.encoding import Encoding
from revsynth.verification.translation import Translation

SATISFYING = 16
"""Satisfying inputs looked for, for each of the first output bits."""
NEIGHBOURS = 256
"""Neighbours (one bit changed) of satisfying inputs."""
RANDOM = 2048
CONFLICTS = 20_000


class Samples:
    """Inputs by combined index, and the comparison at them."""

    def __init__(
        self,
        understanding: Understanding,
        parities: Parities,
        inputs: Sequence[Literal],
        translation: Translation,
    ) -> None:
        self._understanding = understanding
        self._parities = parities
        self._inputs = list(inputs)
        self._translation = translation
        self._draw = random.Random(0)
        self.satisfying = self._satisfying()
        near = self._neighbours()
        others = [self._draw.getrandbits(len(self._inputs)) for _ in range(RANDOM)]
        self._chosen = list(dict.fromkeys([*self.satisfying, *near, *others]))

    @property
    def count(self) -> int:
        """Inputs compared."""
        return len(self._chosen)

    def _satisfying(self) -> list[int]:
        """Inputs of the domain at which an output bit is 1, as different as a few forced bits make them."""
        found: dict[int, None] = {}
        encoding = Encoding(self._parities)
        try:
            for bit in self._translation.bits[:SATISFYING]:
                if bit == FALSE:
                    continue
                for attempt in range(max(SATISFYING // len(self._translation.bits), 1)):
                    forced = self._forced(4 * attempt)
                    for literals in (forced, forced[: len(forced) // 4]):
                        if encoding.ever([bit, self._translation.domain, *literals], CONFLICTS):
                            model = encoding.model(self._inputs)
                            found[sum(one << place for place, one in enumerate(model))] = None
                            break
        finally:
            encoding.close()
        return list(found)

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

    def check(self) -> list[str]:
        """Compare at all of them; what was done, in words.

        Raises ExpressionError where the spec is undefined at one, AssertionError at a difference.
        """
        translation = self._translation
        literals = [translation.domain, *translation.bits, *translation.free]
        cone = Cone(self._parities, self._inputs, literals)
        values = cone.values(literals, self._words())
        expectation = Expectation(self._understanding)
        size = len(translation.bits)
        for place, (index, wanted) in enumerate(zip(self._chosen, expectation.at(self._chosen), strict=True)):
            column = [int(row[place >> 6]) >> (place & 63) & 1 for row in values]
            inside = expectation.in_domain(index)
            bits = tuple(
                None if free else bit
                for bit, free in zip(column[1 : 1 + size], column[1 + size :], strict=True)
            )
            if bool(column[0]) != inside or (inside and bits != wanted):
                raise AssertionError(
                    f"a defect of revsynth: {self._understanding.spec.source} written in gates and evaluated "
                    f"differ at {describe(self._understanding.spec.inputs, index)}"
                )
        return [
            "spec: written a second time in gates, which agree with its evaluation in plain integers at "
            f"{len(self.satisfying)} satisfying inputs found by a solver, at neighbours of them, and at "
            f"random ones: {self.count} in all"
        ]

    def _words(self) -> Words:
        return packed(self._chosen, len(self._inputs))

    def starts(self, variables: int) -> Words:
        """The first of the inputs as tests for a proof, variables beyond the inputs at random."""
        some = self._chosen[: 64 * 8]
        some += self._chosen[: -len(some) % 64]
        words = packed(some, len(self._inputs))
        draw = np.random.default_rng(2)
        rest = draw.integers(0, 1 << 64, (variables - len(self._inputs), words.shape[1]), dtype=np.uint64)
        return np.concatenate([words, rest])


def packed(indices: Sequence[int], inputs: int) -> Words:
    """Columns of input bits, 64 indices a word."""
    count = len(indices)
    size = -(-inputs // 8)
    raw = b"".join(index.to_bytes(size, "little") for index in indices)
    octets = np.frombuffer(raw, dtype=np.uint8).reshape(count, size)
    bits = np.unpackbits(octets, axis=1, bitorder="little")[:, :inputs].T
    padded = np.zeros((inputs, -(-count // 64) * 64), dtype=np.uint8)
    padded[:, :count] = bits
    return np.packbits(padded, axis=1, bitorder="little").view("<u8").astype(np.uint64)
