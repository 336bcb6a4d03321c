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

from revsynth.verification.lifting.linear_proofs import GuessError
from revsynth.verification.lifting.parities import AND, FALSE, TRUE, Literal, Parities
from revsynth.verification.proof.cone import Cone, Words
from revsynth.verification.proof.encoding import Encoding
from revsynth.verification.proof.every_input import find_one
from revsynth.verification.proof.local_equality import LocalEquality

WORDS = 16
"""Random words at the start; every batch of counterexamples adds one more."""
MOST_WORDS = 512
BATCH = 32
"""Counterexamples that are gathered before all nodes are told apart by them."""
TRIES = 4
"""Earlier nodes with the same values that a node is compared with."""
STEP_CONFLICTS = 400
"""Conflicts that a question about two nodes may take."""
PATIENCE = 64
"""After so many questions without an answer, they may take FEW_CONFLICTS."""
FEW_CONFLICTS = 40
QUICK_CONFLICTS = 4_000
"""Conflicts of a question about an output before all its inputs are run instead, where they can be."""
ATTEMPTS = 3
"""Guesses from signatures that may be wrong."""


@dataclass(frozen=True)
class Answer:
    """holds: True proved, False refuted by `inputs` (a bit for each variable), None undecided.

    method: what settled it: `structure`, `sweeping`, `solver`, `all inputs` where every value of the
    variables it rests on was run, or `simulation` where a test input refuted it.
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

    def zero(self, literal: Literal, conflicts: int) -> Answer:
        """Whether one of the literals given is 0 for every input; `conflicts` limit the last question."""
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
        free = [self._image[variable >> 1] for variable in self._variables]
        answer = self._encoding.ever([image], min(conflicts, QUICK_CONFLICTS))
        if answer is None:
            run = find_one(self._encoding.parities, free, image, self._progress)
            if run is not None:
                return Answer(True, method="all inputs") if run is False else Answer(False, run, "all inputs")
            answer = self._encoding.ever([image], conflicts)
        if answer:
            return Answer(False, tuple(self._encoding.model(free)), "solver")
        if answer is None:
            return Answer(None, method="solver")
        self._encoding.never(image)
        return Answer(True, method="solver")

    @property
    def conflicts(self) -> int:
        """Conflicts that the solver has met so far."""
        return 0 if self._encoding is None else self._encoding.solver.conflicts

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
        for attempt in range(ATTEMPTS):
            if self._new is not None:
                return
            try:
                self._sweep_once(attempt + 1)
            except GuessError:
                self.close()
                self._new = None
                if attempt + 1 == ATTEMPTS:
                    raise

    def _sweep_once(self, seed: int) -> None:
        old, new = self._old, Parities(seed)
        self._new = new
        encoding = self._encoding = Encoding(new)
        self._image = image = {0: FALSE}
        self.merged = self.undecided = 0
        for variable in self._variables:
            image[variable >> 1] = new.free()
        keys = _Keys(self._cone, self._tests)
        local = LocalEquality(new)
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
                made = self._merged(node, made, keys, encoding, local)
            image[node] = made
        new.proofs.finish()

    def _merged(
        self, node: int, made: Literal, keys: _Keys, encoding: Encoding, local: LocalEquality
    ) -> Literal:
        """An earlier literal that is proved equal to the new one, else the new one."""
        tried: set[Literal] = set()
        while len(tried) < TRIES:
            candidate = next((one for one in keys.candidates(node) if one not in tried), None)
            if candidate is None or candidate == made:
                break
            tried.add(candidate)
            if local.proves(candidate, made):
                self.merged += 1
                return candidate
            limit = STEP_CONFLICTS if self.undecided < PATIENCE else FEW_CONFLICTS
            answer = encoding.same(candidate, made, limit)
            if answer:
                self.merged += 1
                return candidate
            if answer is None:
                self.undecided += 1
            else:
                keys.learn(encoding.model([self._image[variable >> 1] for variable in self._variables]))
        keys.enter(node, made)
        return made


class _Keys:
    """Nodes by their values at all test inputs, a node and its complement alike."""

    def __init__(self, cone: Cone, tests: Words) -> None:
        self._cone = cone
        rows = cone.rows(tests).astype("<u8")
        self._values = [int.from_bytes(row.tobytes(), "little") for row in rows]
        self._words = tests.shape[1]
        self._every = (1 << 64 * self._words) - 1
        self._entered: list[tuple[int, Literal]] = []
        self._found: dict[int, list[Literal]] = {}
        self._waiting: list[list[int]] = []
        self._draw = np.random.default_rng(1)

    def _key(self, node: int) -> tuple[int, int]:
        """The values, complemented where the first one is 1, and whether they were."""
        values = self._values[self._cone.row(node)]
        flip = values & 1
        return values ^ self._every if flip else values, flip

    def candidates(self, node: int) -> list[Literal]:
        """The literals entered with the same values as the node, complemented to match."""
        key, flip = self._key(node)
        return [literal ^ flip for literal in self._found.get(key, ())]

    def enter(self, node: int, literal: Literal) -> None:
        """The node is now the literal `literal`."""
        self._entered.append((node, literal))
        key, flip = self._key(node)
        some = self._found.setdefault(key, [])
        if literal ^ flip not in some:
            some.append(literal ^ flip)

    def learn(self, inputs: list[int]) -> None:
        """An input that tells two nodes apart; a batch of them, and inputs near them, become tests."""
        self._waiting.append(inputs)
        if len(self._waiting) < BATCH or self._words >= MOST_WORDS:
            return
        lanes = np.array(self._waiting, dtype=np.uint8).T
        near = lanes ^ (self._draw.integers(0, 8, lanes.shape) == 0)
        octets = np.packbits(np.concatenate([lanes, near], axis=1), axis=1, bitorder="little")
        word = np.ascontiguousarray(octets).view("<u8").astype(np.uint64)
        self._waiting = []
        new = self._cone.rows(word)[:, 0].tolist()
        shift = 64 * self._words
        self._values = [old | more << shift for old, more in zip(self._values, new, strict=True)]
        self._words += 1
        self._every = (1 << 64 * self._words) - 1
        self._found = {}
        entered, self._entered = self._entered, []
        for node, literal in entered:
            self.enter(node, literal)
