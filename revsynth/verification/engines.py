"""Chooses how a circuit is simulated by what it is made of, and runs it on sets of inputs.

Classical circuits go through `classical`, Clifford+T through `bitsliced`, everything else, and what
`bitsliced` cannot follow, through `sparse`.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass

from revsynth.circuit.model import Circuit
from revsynth.verification.bitsliced import CrowdedError, run_bitsliced
from revsynth.verification.branches import NotUniformError
from revsynth.verification.classical import compile_gates, run_classical
from revsynth.verification.elementary import MEASURE, RESET, elementary, has_angles, is_classical
from revsynth.verification.forms import Chunk, Demand
from revsynth.verification.order import close_early
from revsynth.verification.outcome import Final, Finals, OutgrownError, RevealsError, TooLargeError
from revsynth.verification.plan import plan

FEW = 8
"""Branches or runs up to which the circuit's own order of steps is good enough."""
MANY = 128
"""Branches or runs up to which the bit-sliced engine is used at all."""
SPARSE_BITS = 11
"""The sparse engine starts with blocks of 2**SPARSE_BITS inputs; where memory is short they get smaller."""


@dataclass(frozen=True)
class Part:
    """One set of lanes and their final states, or the measurement that gives an input away."""

    chunk: Chunk
    finals: Finals | None = None
    reveals: RevealsError | None = None


class Engines:
    """The engines for one circuit. `name` says which one the last part went through."""

    def __init__(self, circuit: Circuit) -> None:
        self.steps = elementary(circuit)
        self.measurements = sum(step.act in (MEASURE, RESET) for step in self.steps)
        self._circuit = circuit
        self._exact = not has_angles(self.steps)
        self._gates = compile_gates(self.steps) if is_classical(self.steps) else None
        self._plan = plan(self.steps, circuit.conditions)
        self._limit = FEW
        self._use_sparse = not self._exact
        self._sparse_bits = SPARSE_BITS
        self._ordered = False
        self.name = ""

    def fast(self, chunk: Chunk) -> Part | None:
        """The final states through a fast engine; None, and never again, where neither can follow."""
        return None if self._use_sparse else self._fast(chunk)

    def run_chosen(self, chunk: Chunk) -> Part:
        """The final states through whichever engine fits; raises TooLargeError."""
        return self.fast(chunk) or self._sparse(chunk)

    def run_slow(self, demand: Demand, base: int, bits: int) -> Iterator[Part]:
        """The lanes base ... base + 2**bits - 1 in as many parts as memory asks for.

        Raises TooLargeError where even a single input is too much.
        """
        end = base + (1 << bits)
        while base < end:
            size = min(self._sparse_bits, bits)
            try:
                part = self._sparse(demand.block(base, size))
            except TooLargeError:
                if size == 0:
                    raise
                self._sparse_bits = max(0, size - 2)
                continue
            yield part
            base += 1 << size

    def _fast(self, chunk: Chunk) -> Part | None:
        if self._gates is not None:
            columns, sign = run_classical(self._gates, chunk.start, chunk.ones)
            self.name = "bit-parallel simulation of the gates"
            return Part(chunk, Finals([Final(columns, (0, 0, sign))]))
        self.name = "bit-parallel simulation of branches, phases exact in eighths of a turn"
        try:
            return Part(chunk, self._bitsliced(chunk))
        except RevealsError as reveals:
            return Part(chunk, reveals=reveals)
        except (NotUniformError, CrowdedError):
            self._use_sparse = True
            return None

    def _bitsliced(self, chunk: Chunk) -> Finals:
        while True:
            try:
                return run_bitsliced(
                    self._plan, chunk.start, chunk.ones, most_branches=self._limit, most_runs=self._limit
                )
            except CrowdedError:
                if self._ordered:
                    raise
                self._reorder()

    def _reorder(self) -> None:
        circuit = self._circuit
        steps = close_early(self.steps, circuit.qubits, circuit.conditions)
        self._plan = plan(steps, circuit.conditions)
        self._limit = MANY
        self._ordered = True

    def _sparse(self, chunk: Chunk) -> Part:
        """Exactly, or with complex numbers from where exact integers outgrow their words."""
        if not self._ordered:
            self._reorder()
        try:
            return self._simulated(chunk)
        except OutgrownError:
            self._exact = False
            return self._simulated(chunk)

    def _simulated(self, chunk: Chunk) -> Part:
        from revsynth.verification.sparse import run_sparse

        accuracy = "in exact integers" if self._exact else "to 1e-9"
        self.name = f"sparse simulation of basis states, amplitudes {accuracy}"
        try:
            return Part(chunk, run_sparse(self._plan, chunk.start, chunk.lanes + 1, exact=self._exact))
        except RevealsError as reveals:
            return Part(chunk, reveals=reveals)
