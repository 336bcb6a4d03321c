"""Proofs that two networks compute the same: exhaustively where that is possible, otherwise by a solver.

Beyond `EXHAUSTIVE` inputs both networks are copied into one, gate by gate, and each new node that behaves
like an earlier one on all samples is proved equal to it and merged before its readers are copied
(sweeping: A. Kuehlmann, "Dynamic transition relation simplification for bounded property checking", ICCAD
2004). A counterexample joins the samples. Every question has a conflict limit: undecided is never taken for
proved.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from revsynth.logic.and_reduction.form_builder import FormBuilder, fits
from revsynth.logic.and_reduction.samples import Samples
from revsynth.logic.network import Literal, Network
from revsynth.logic.network_builder import NetworkBuilder
from revsynth.logic.network_simulation import input_columns, simulate
from revsynth.logic.truth_table import first_inputs, last_word_mask, words_for
from revsynth.solver import Solver

EXHAUSTIVE = 20
"""Up to so many inputs all of them are tried."""
CHUNK = 1 << 12
"""Words a node tried at once."""
SAMPLES = 1024
"""Inputs that nodes are compared on before a solver is asked."""
MERGE_CONFLICTS = 400
"""Conflicts that the proof of one merge may take."""


@dataclass(frozen=True)
class Proof:
    """equal: None where undecided; counterexample: the bits of an input at which the networks differ, and
    which counts; method: how the answer was found.
    """

    equal: bool | None
    counterexample: tuple[int, ...] | None
    method: str


def prove_equal(one: Network, other: Network, care: Network | None = None, conflicts: int = 100_000) -> Proof:
    """Whether all outputs agree at every input where `care` (one output; None: everywhere) is 1.

    conflicts: the most that the solver may spend altogether beyond `EXHAUSTIVE` inputs. Raises ValueError for
    networks of different shape.
    """
    if (one.inputs, len(one.outputs)) != (other.inputs, len(other.outputs)):
        raise ValueError(
            f"networks of {one.inputs} inputs and {len(one.outputs)} outputs, {other.inputs} and "
            f"{len(other.outputs)}: only the same numbers can be compared"
        )
    if care is not None and (care.inputs, len(care.outputs)) != (one.inputs, 1):
        raise ValueError("care must have the same inputs and one output")
    if one.inputs <= EXHAUSTIVE:
        return _exhaustive(one, other, care)
    return _by_solver(one, other, care, conflicts)


def _exhaustive(one: Network, other: Network, care: Network | None) -> Proof:
    words = words_for(one.inputs)
    for begin in range(0, words, CHUNK):
        columns = input_columns(one.inputs, begin, min(CHUNK, words - begin))
        differs = simulate(one, columns) ^ simulate(other, columns)
        differs &= last_word_mask(one.inputs)
        if care is not None:
            differs &= simulate(care, columns)
        if differs.any():
            column = np.bitwise_or.reduce(differs, axis=0)
            x = 64 * begin + first_inputs(column, 1)[0]
            return Proof(False, tuple(x >> i & 1 for i in range(one.inputs)), "exhaustive")
    return Proof(True, None, "exhaustive")


def _by_solver(one: Network, other: Network, care: Network | None, conflicts: int) -> Proof:
    with Sweeper(one.inputs, conflicts, compact=fits(one) and fits(other)) as sweeper:
        if care is not None:
            sweeper.assume(sweeper.copy(care)[0])
        mine, theirs = sweeper.copy(one), sweeper.copy(other)
        pairs = sorted(set(zip(mine, theirs, strict=True)))
        undecided = False
        for a, b in pairs:
            answer = sweeper.equal(a, b, sweeper.conflicts_left)
            if answer is False:
                return Proof(False, sweeper.counterexample, "solver")
            undecided = undecided or answer is None
        return Proof(None if undecided else True, None, "solver")


class Sweeper:
    """One network that others are copied into, equal nodes merged; each merge is proved."""

    def __init__(self, inputs: int, conflicts: int, *, compact: bool = True, seed: int = 0) -> None:
        self.builder = FormBuilder(inputs) if compact else NetworkBuilder(inputs)
        self.counterexample: tuple[int, ...] | None = None
        self._inputs = inputs
        self._conflicts = conflicts
        self._samples = Samples(inputs, SAMPLES, seed)
        self._mask = (1 << SAMPLES) - 1
        self._care: Literal | None = None
        self._rows = [0, *self._samples.columns]
        self._alike: dict[int, Literal] = {}
        self._merged: dict[int, Literal] = {}
        self._solver = Solver()
        for _ in range(1 + inputs):
            self._solver.variable()
        self._solver.add([-1])
        for node in range(1 + inputs):
            self._register(node)

    def __enter__(self) -> Sweeper:
        return self

    def __exit__(self, *_: object) -> None:
        self._solver.close()

    @property
    def conflicts_left(self) -> int:
        """What the solver may still spend."""
        return max(self._conflicts - self._solver.conflicts, 0)

    def assume(self, literal: Literal) -> None:
        """From now on only inputs at which this literal is 1 count."""
        self._solver.add([self._variable(literal)])
        self._care = literal
        self._renew()

    def copy(self, network: Network) -> list[Literal]:
        """The literals of a network's outputs, its nodes merged with what is here already."""
        here = [0, *(2 * (i + 1) for i in range(self._inputs))]
        rows = zip(network.is_xor.tolist(), network.left.tolist(), network.right.tolist(), strict=True)
        for is_xor, left, right in rows:
            a, b = here[left >> 1] ^ (left & 1), here[right >> 1] ^ (right & 1)
            here.append(self._settled(self.builder.xor(a, b) if is_xor else self.builder.and_(a, b)))
        return [here[literal >> 1] ^ (literal & 1) for literal in network.outputs.tolist()]

    def equal(self, a: Literal, b: Literal, conflicts: int) -> bool | None:
        """Whether two literals agree at every input that counts; False leaves a counterexample."""
        if a == b:
            return True
        if conflicts < 1:
            return None
        x, y = self._variable(a), self._variable(b)
        undecided = False
        for question in ([x, -y], [-x, y]):
            answer = self._solver.solve(question, conflicts)
            if answer:
                bits = [self._solver.value(2 + i) for i in range(self._inputs)]
                self.counterexample = tuple(int(bit) for bit in bits)
                return False
            if answer is None:
                undecided = True
                break
        if undecided:
            return None
        self._solver.add([-x, y])
        self._solver.add([x, -y])
        return True

    def _settled(self, literal: Literal) -> Literal:
        """The literal itself, or the earlier one that it is proved equal to."""
        self._encode_new()
        node, flip = literal >> 1, literal & 1
        while True:
            if node in self._merged:
                return self._merged[node] ^ flip
            row = self._rows[node] & self._mask
            key = min(row, row ^ self._mask)
            found = self._alike.get(key)
            if found is None:
                self._register(node)
                return literal
            other = found ^ (row != key)
            if other >> 1 == node:
                return literal
            limit = min(MERGE_CONFLICTS, self.conflicts_left)
            answer = self.equal(2 * node, other, limit)
            if answer is None:
                return literal
            if answer:
                self._merged[node] = other
                return other ^ flip
            assert self.counterexample is not None
            self._samples.add_with_neighbours(sum(bit << i for i, bit in enumerate(self.counterexample)))
            self._renew()

    def _variable(self, literal: Literal) -> int:
        variable = (literal >> 1) + 1
        return -variable if literal & 1 else variable

    def _encode_new(self) -> None:
        """Clauses and values of gates that the builder has made since."""
        for node in range(len(self._rows), 1 + self._inputs + self.builder.gates):
            out = self._solver.variable()
            gate = self.builder.gate_of(2 * node)
            assert gate is not None
            is_xor, left, right = gate
            add = self._solver.add_xor if is_xor else self._solver.add_and
            add(out, self._variable(left), self._variable(right))
            self._rows.append(self._value(gate))

    def _value(self, gate: tuple[bool, Literal, Literal]) -> int:
        is_xor, left, right = gate
        everything = (1 << self._samples.width) - 1
        a = self._rows[left >> 1] ^ (everything if left & 1 else 0)
        b = self._rows[right >> 1] ^ (everything if right & 1 else 0)
        return a ^ b if is_xor else a & b

    def _register(self, node: int) -> None:
        row = self._rows[node] & self._mask
        key = min(row, row ^ self._mask)
        self._alike.setdefault(key, 2 * node ^ (row != key))

    def _renew(self) -> None:
        """Values and classes once the samples or what counts have changed."""
        count = len(self._rows)
        self._rows = [0, *self._samples.columns]
        for node in range(1 + self._inputs, count):
            gate = self.builder.gate_of(2 * node)
            assert gate is not None
            self._rows.append(self._value(gate))
        self._mask = (1 << self._samples.width) - 1
        if self._care is not None:
            flip = self._mask if self._care & 1 else 0
            self._mask = self._rows[self._care >> 1] ^ flip
        self._alike = {}
        for node in range(count):
            if node not in self._merged:
                self._register(node)


def encode(solver: Solver, network: Network, inputs: Sequence[int]) -> list[int]:
    """Clauses for a network; returns the solver's variable of every node, given those of the inputs."""
    constant = solver.variable()
    solver.add([-constant])
    variables = [constant, *inputs]
    rows = zip(network.is_xor.tolist(), network.left.tolist(), network.right.tolist(), strict=True)
    for is_xor, left, right in rows:
        out = solver.variable()
        a = -variables[left >> 1] if left & 1 else variables[left >> 1]
        b = -variables[right >> 1] if right & 1 else variables[right >> 1]
        (solver.add_xor if is_xor else solver.add_and)(out, a, b)
        variables.append(out)
    return variables
