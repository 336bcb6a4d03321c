"""The spec evaluated in exact integers against its gates and against the circuit, at chosen inputs.

At satisfying inputs first, then at their neighbours, then at random ones. Where the spec could not be
written in gates, its values are variables of their own, filled in from the evaluation.
"""

from __future__ import annotations

from collections.abc import Callable, Iterator, Sequence
from dataclasses import dataclass

import numpy as np

from revsynth.spec.layout import describe
from revsynth.spec.sampled import SampledSpec, Wanted
from revsynth.spec.understand import Understanding
from revsynth.verification.lifting.parities import Literal, Parities
from revsynth.verification.proof.choice import number, packed
from revsynth.verification.proof.cone import Cone, Words
from revsynth.verification.translation import Translation

RANDOM = 1 << 20
"""Random inputs, where they take about a second; fewer where one takes longer."""
BLOCK = 1 << 18
"""Inputs at a time."""
LEAST = 1 << 16
"""Random inputs that are simulated in any case."""
TESTS = 512
NODE_WORDS = 1 << 31
"""Nodes times words of 64 inputs that are simulated: a second or two."""


@dataclass(frozen=True)
class Hit:
    """A literal (by its place) that is 1 for these values of all variables."""

    place: int
    variables: tuple[int, ...]


class Samples:
    """Compares at inputs given, and at random ones.

    variables: all free literals, the inputs' first; where the spec is not `translated`, those that stand for
    its domain, bits and free places are the last. count: inputs compared; random: the random ones among
    them; inside: those of the random ones that are inside the domain.
    """

    def __init__(
        self,
        understanding: Understanding,
        parities: Parities,
        variables: Sequence[Literal],
        translation: Translation,
        *,
        translated: bool,
        progress: Callable[[str], None],
    ) -> None:
        self._understanding = understanding
        self._parities = parities
        self._variables = list(variables)
        self.translation = translation
        self._translated = translated
        self._progress = progress
        self._spec = SampledSpec(understanding)
        self.count = self.random = self.inside = 0

    def first_hit(
        self, chosen: Sequence[int], literals: Sequence[Literal], most: int | None = None
    ) -> Hit | None:
        """Compare the spec with its gates, and find an input at which one of the literals is 1.

        chosen: inputs by combined index, before the random ones; most: a limit to those. Inputs are counted
        only where there is none. Raises ExpressionError where the spec is
        undefined at an input inside its domain, AssertionError where its gates are not the spec.
        """
        size = self._understanding.input_bits
        said = [self.translation.domain, *self.translation.bits, *self.translation.free]
        cone = Cone(self._parities, self._variables, [*said, *literals])
        random = min(self._spec.count(RANDOM), max(64 * NODE_WORDS // max(len(cone), 1), LEAST) & -64)
        if most is not None:
            random = min(random, most)
        for inputs, lanes, drawn in self._blocks(chosen, random):
            wanted = self._spec.wanted(inputs)
            starts = self._starts(inputs, wanted)
            values = cone.values([*said, *literals], starts)
            if self._translated:
                self._compare(wanted, values[: len(said)], inputs[:size])
            if most is None:
                self._add(wanted, lanes, drawn)
            hit = _first(values[len(said) :], starts)
            if hit is not None:
                return hit
        return None

    def _add(self, wanted: Wanted, lanes: int, drawn: bool) -> None:
        self.count += lanes
        if drawn:
            self.random += lanes
            self.inside += int(np.bitwise_count(wanted.domain).sum())

    def _blocks(self, chosen: Sequence[int], random: int) -> Iterator[tuple[Words, int, bool]]:
        """Columns of inputs, how many inputs they are, and whether they are random."""
        size = self._understanding.input_bits
        for begin in range(0, len(chosen), BLOCK):
            some = chosen[begin : begin + BLOCK]
            yield packed(some, size), len(some), False
        draw = np.random.default_rng(0)
        for begin in range(0, random, BLOCK):
            self._progress(f"verifying: {begin} of {random} random inputs")
            lanes = min(BLOCK, random - begin)
            yield draw.integers(0, 1 << 64, (size, lanes // 64), dtype=np.uint64), lanes, True

    def _starts(self, inputs: Words, wanted: Wanted) -> Words:
        """All variables: those beyond the inputs are random."""
        rest = len(self._variables) - len(inputs)
        words = inputs.shape[1]
        draw = np.random.default_rng(words)
        others = draw.integers(0, 1 << 64, (rest, words), dtype=np.uint64)
        starts = np.concatenate([inputs, others])
        if not self._translated:
            rows = {literal: row for row, literal in enumerate(self._variables)}
            said = [self.translation.domain, *self.translation.bits, *self.translation.free]
            for literal, row in zip(said, (wanted.domain, *wanted.bits, *wanted.free), strict=True):
                starts[rows[literal]] = row
        return starts

    def bound(self) -> str:
        """What the random inputs support, in words (rule of three: common practice)."""
        if not self.inside:
            return f"{self.count} inputs are right, none of them random and inside the domain: no proof"
        return (
            f"{self.count} inputs are right, which is no proof: with {self.inside} random ones among them, "
            f"at 95 % confidence at most 3 in {self.inside} of the domain's inputs are wrong (rule of three)"
        )

    def tests(self, chosen: Sequence[int]) -> Words:
        """The first of the inputs as tests for a proof, variables beyond the inputs at random."""
        inputs = packed(chosen[:TESTS], self._understanding.input_bits)
        rest = (len(self._variables) - len(inputs), inputs.shape[1])
        others = np.random.default_rng(2).integers(0, 1 << 64, rest, dtype=np.uint64)
        return np.concatenate([inputs, others])

    def _compare(self, wanted: Wanted, values: Words, inputs: Words) -> None:
        size = len(wanted.bits)
        domain, bits, free = values[0], values[1 : 1 + size], values[1 + size :]
        wrong = domain ^ wanted.domain
        inside = np.bitwise_or.reduce((free ^ wanted.free) | ((bits ^ wanted.bits) & ~free), axis=0)
        wrong |= inside & wanted.domain
        hit = _first(wrong[None, :], inputs)
        if hit is not None:
            raise AssertionError(
                f"a defect of revsynth: {self._understanding.spec.source} written in gates and evaluated "
                f"differ at {describe(self._understanding.spec.inputs, number(hit.variables))}"
            )


def _first(rows: Words, starts: Words) -> Hit | None:
    """The first row that is 1 somewhere, at its first place."""
    some = np.flatnonzero(rows.any(axis=1))
    if not len(some):
        return None
    row = rows[some[0]]
    word = int(np.flatnonzero(row)[0])
    bit = (int(row[word]) & -int(row[word])).bit_length() - 1
    return Hit(int(some[0]), tuple(int(start[word]) >> bit & 1 for start in starts))
