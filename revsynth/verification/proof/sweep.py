"""Sweeping: nodes that seem equal are proved equal from the inputs on, and become one node.

What remains to be proved at the outputs is then small, or nothing. Sources: Kuehlmann, Krohm, "Equivalence
checking using cuts and heaps", DAC 1997; Zhu, Kitchen, Kuehlmann, Sangiovanni-Vincentelli, "SAT sweeping with
local observability don't-cares", DAC 2006. XORs need no solver here: equal sums of atoms are one node of
`Parities` from the start.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass

import numpy as np

from revsynth.verification.lifting.parities import AND, FALSE, TRUE, Literal, Parities
from revsynth.verification.proof.cone import Cone, Words
from revsynth.verification.proof.encoding import Encoding

WORDS = 16
"""Random words at the start; each counterexample adds one more."""
MOST_WORDS = 256
STEP_CONFLICTS = 400
"""Conflicts that a question about two nodes may take."""
LAST_CONFLICTS = 2_000_000
"""Conflicts that a question about an output may take."""


@dataclass(frozen=True)
class Answer:
    """holds: True proved, False refuted by `inputs` (a bit for each variable), None undecided.

    method: what settled it: `structure`, `sweeping`, `solver`, or `simulation` where a test input refuted it.
    """

    holds: bool | None
    inputs: tuple[int, ...] = ()
    method: str = "structure"


class Sweep:
    """Proves literals of a `Parities` to be 0 for all values of its free variables."""

    def __init__(
        self,
        parities: Parities,
        variables: Sequence[Literal],
        literals: Sequence[Literal],
        tests: Words | None = None,
        progress: Callable[[str], None] = lambda _: None,
    ) -> None:
        """tests: inputs worth a try, uint64 (variables, words), such as satisfying ones."""
        self._old = parities
        self._variables = list(variables)
        self._literals = [literal for literal in literals if literal > TRUE]
        self._progress = progress
        self._cone = Cone(parities, variables, self._literals)
        draw = np.random.default_rng(0)
        random = draw.integers(0, 1 << 64, (len(self._variables), WORDS), dtype=np.uint64)
        self._tests = random if tests is None else np.concatenate([random, tests], axis=1)
        self._new: Parities | None = None
        self._encoding: Encoding | None = None
        self._image: dict[int, Literal] = {0: FALSE}
        self.merged = 0
        self.undecided = 0

    def close(self) -> None:
        """Free the solver's memory."""
        if self._encoding is not None:
            self._encoding.close()

    def zero(self, literal: Literal) -> Answer:
        """Whether a literal (one of those given) is 0 for every input."""
        if literal == FALSE:
            return Answer(True)
        if literal == TRUE:
            return Answer(False, (0,) * len(self._variables), "structure")
        seen = self._seen(literal)
        if seen is not None:
            return Answer(False, seen, "simulation")
        self._sweep()
        assert self._encoding is not None
        image = self._image[literal >> 1] ^ (literal & 1)
        if image == FALSE:
            return Answer(True, method="sweeping")
        self._progress("proving: asking the solver about an output")
        answer = self._encoding.ever([image], LAST_CONFLICTS)
        if answer:
            free = [self._image[variable >> 1] for variable in self._variables]
            return Answer(False, tuple(self._encoding.model(free)), "solver")
        return Answer(None if answer is None else True, method="solver")

    def _seen(self, literal: Literal) -> tuple[int, ...] | None:
        """A test input at which the literal is 1."""
        values = self._cone.values([literal], self._tests)[0]
        hit = np.flatnonzero(values)
        if not len(hit):
            return None
        word = int(hit[0])
        bit = (int(values[word]) & -int(values[word])).bit_length() - 1
        return tuple(int(row[word]) >> bit & 1 for row in self._tests)

    def _sweep(self) -> None:
        """Build all nodes anew, in order, those that are proved equal as one."""
        if self._new is not None:
            return
        old, new = self._old, Parities(1)
        self._new = new
        encoding = self._encoding = Encoding(new)
        image = self._image
        for variable in self._variables:
            image[variable >> 1] = new.free()
        keys = _Keys(self._cone, self._tests)
        keys.enter(0, FALSE)
        for variable in self._variables:
            keys.enter(variable >> 1, image[variable >> 1])
        for place, node in enumerate(self._cone.gates):
            if place % 1024 == 0:
                self._progress(f"proving: {place} of {len(self._cone)} nodes, {self.merged} merged")
            a, b = image[old.left[node]], image[old.right[node]]
            before = len(new)
            made = new.and_(a, b) if old.kind[node] == AND else new.xor(a, b)
            if made >> 1 >= before:
                made = self._merged(node, made, keys, encoding)
            image[node] = made
        new.proofs.finish()

    def _merged(self, node: int, made: Literal, keys: _Keys, encoding: Encoding) -> Literal:
        """An earlier literal that is proved equal to the new one, else the new one."""
        while True:
            candidate = keys.candidate(node)
            if candidate is None:
                keys.enter(node, made)
                return made
            if candidate == made:
                return made
            answer = encoding.same(candidate, made, STEP_CONFLICTS)
            if answer:
                self.merged += 1
                return candidate
            if answer is None or keys.words >= MOST_WORDS:
                self.undecided += 1
                return made
            free = [self._image[variable >> 1] for variable in self._variables]
            keys.refine(encoding.model(free))


class _Keys:
    """Nodes by their values at all test inputs, a node and its complement alike."""

    def __init__(self, cone: Cone, tests: Words) -> None:
        self._cone = cone
        self._rows = cone.rows(tests)
        self._entered: list[tuple[int, Literal]] = []
        self._found: dict[bytes, tuple[Literal, int]] = {}
        self._draw = np.random.default_rng(1)

    @property
    def words(self) -> int:
        """Test words so far."""
        return int(self._rows.shape[1])

    def _key(self, node: int) -> tuple[bytes, int]:
        """The values, complemented where the first one is 1, and whether they were."""
        row = self._rows[self._cone.row(node)]
        flip = int(row[0]) & 1
        return (~row if flip else row).tobytes(), flip

    def candidate(self, node: int) -> Literal | None:
        """The literal entered first with the same values as the node, complemented to match."""
        key, flip = self._key(node)
        found = self._found.get(key)
        return None if found is None else found[0] ^ found[1] ^ flip

    def enter(self, node: int, literal: Literal) -> None:
        """The node is now the literal `literal`; the first of equal ones counts."""
        self._entered.append((node, literal))
        key, flip = self._key(node)
        self._found.setdefault(key, (literal, flip))

    def refine(self, inputs: Sequence[int]) -> None:
        """Add a word of tests: one that tells two nodes apart, and inputs near it."""
        bits = np.array(inputs, dtype=np.uint64)
        word = np.uint64(0) - bits
        noise = self._draw.integers(0, 1 << 64, (3, len(bits)), dtype=np.uint64)
        near = noise[0] & noise[1] & noise[2] & ~np.uint64(1)
        rows = self._cone.rows((word ^ near)[:, None])
        self._rows = np.concatenate([self._rows, rows], axis=1)
        self._found = {}
        for node, literal in self._entered:
            key, flip = self._key(node)
            self._found.setdefault(key, (literal, flip))
