"""Chooses how a circuit is simulated by what it is made of, and runs it on sets of inputs.

Classical circuits go through `classical`, Clifford+T through `bitsliced`, everything else, and what
`bitsliced` cannot follow, through `sparse`. Where there is enough work to pay for it, `compiled` stands in
for the first two; what it finds wrong they run again and explain.
"""

from __future__ import annotations

import sys
from collections.abc import Iterator
from concurrent.futures import Executor, Future
from dataclasses import dataclass
from functools import cached_property
from typing import TYPE_CHECKING

from revsynth.circuit.model import Circuit
from revsynth.verification.bitsliced import CrowdedError, run_bitsliced
from revsynth.verification.branches import NotUniformError
from revsynth.verification.classical import Gate, compile_gates, run_classical
from revsynth.verification.elementary import elementary, has_angles, is_classical
from revsynth.verification.forms import Chunk, Demand
from revsynth.verification.order import early_order
from revsynth.verification.outcome import Final, Finals, OutgrownError, RevealsError, TooLargeError
from revsynth.verification.plan import Plan, plan
from revsynth.verification.steps import Steps

if TYPE_CHECKING:
    from revsynth.verification.compiled import Compiled

BLOCK_BITS = 16
"""Inputs a block, as a power of two: a column takes 8 kB, so a state of some dozens stays in the cache."""
COMPILED_FROM = 200_000
"""Steps times blocks of inputs from which the compiled engine pays for its half second of loading."""
COMPILED_LOADED = 20_000
"""The same where its library is loaded anyway."""
FEW = 8
"""Branches or runs up to which the circuit's own order of steps is good enough."""
MANY = 128
"""Branches or runs up to which the bit-sliced engine is used at all."""
SPARSE_BITS = 11
"""The sparse engine starts with blocks of 2**SPARSE_BITS inputs; where memory is short they get smaller."""


@dataclass(frozen=True)
class Part:
    """One set of lanes and their final states, or the measurement that gives an input away.

    brief: without records of outcomes; `Engines.told` has them.
    """

    chunk: Chunk
    finals: Finals | None = None
    reveals: RevealsError | None = None
    brief: bool = False


class Engines:
    """The engines for one circuit. `name` says which one the last part went through."""

    def __init__(self, circuit: Circuit, *, most_rows: int | None = None) -> None:
        """most_rows: a lower limit to the basis states of sparse simulation, where time matters."""
        self.most_rows = most_rows
        self.steps: Steps = elementary(circuit)
        self.measurements = self.steps.measurements
        self._circuit = circuit
        self._exact = not has_angles(self.steps)
        self._classical = is_classical(self.steps)
        self._limit = FEW
        self._use_sparse = not self._exact
        self._sparse_bits = SPARSE_BITS
        self._ordered = False
        self._compiled: Compiled | None = None
        self._ahead: list[tuple[Chunk, Future[Finals]]] = []
        self.name = ""

    def block_bits(self, bits: int) -> int:
        """How many of 2**bits lanes to take at a time, as a power of two; decides whether to compile."""
        blocks = 1 << max(0, bits - BLOCK_BITS)
        least = COMPILED_LOADED if "numba" in sys.modules else COMPILED_FROM
        if self._use_sparse or len(self.steps) * blocks < least:
            return min(bits, BLOCK_BITS)
        from revsynth.verification.compiled import block_bits

        self._compile()
        return min(bits, block_bits(self._circuit.qubits))

    def _compile(self) -> None:
        from revsynth.verification.compiled import Compiled

        circuit = self._circuit
        self._compiled = Compiled(self.steps, circuit.qubits, circuit.bits, circuit.conditions)

    @cached_property
    def _gates(self) -> list[Gate]:
        return compile_gates(self.steps)

    @cached_property
    def _plan(self) -> Plan:
        return plan(self.steps, self._circuit.conditions)

    @property
    def is_sparse(self) -> bool:
        """Whether the circuit is found to need sparse simulation."""
        return self._use_sparse

    def fast(self, chunk: Chunk) -> Part | None:
        """The final states through a fast engine; None, and never again, where none can follow."""
        if self._use_sparse:
            return None
        if self._compiled is None:
            return self._fast(chunk)
        return self._through_compiled(chunk)

    def begin(self, chunk: Chunk, helper: Executor) -> None:
        """Have lanes run in another thread, where they are for the kernel; `fast` is to ask in this order."""
        if self._compiled is not None and not self._use_sparse:
            future = helper.submit(self._run_compiled, self._compiled, chunk, self._limit)
            self._ahead.append((chunk, future))

    def told(self, chunk: Chunk) -> Part:
        """The final states with records of outcomes, for lanes that the compiled engine has run."""
        return (None if self._use_sparse else self._fast(chunk)) or self._sparse(chunk)

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

    def _through_compiled(self, chunk: Chunk) -> Part | None:
        from revsynth.verification.compiled import RevealsSomewhereError

        self._name_fast()
        while True:
            assert self._compiled is not None
            try:
                if self._ahead and self._ahead[0][0] is chunk:
                    finals = self._ahead.pop(0)[1].result()
                else:
                    finals = self._run_compiled(self._compiled, chunk, self._limit)
                return Part(chunk, finals, brief=True)
            except RevealsSomewhereError:
                return self.told(chunk)
            except NotUniformError:
                break
            except CrowdedError:
                if self._ordered:
                    break
                self._reorder()
        self._use_sparse = True
        return None

    @staticmethod
    def _run_compiled(compiled: Compiled, chunk: Chunk, limit: int) -> Finals:
        return compiled.run(chunk.start, chunk.lanes + 1, most_branches=limit, most_runs=limit)

    def _name_fast(self) -> None:
        self.name = (
            "bit-parallel simulation of the gates"
            if self._classical
            else "bit-parallel simulation of branches, phases exact in eighths of a turn"
        )

    def _fast(self, chunk: Chunk) -> Part | None:
        self._name_fast()
        if self._classical:
            columns, sign = run_classical(self._gates, chunk.start, chunk.ones)
            return Part(chunk, Finals([Final(columns, (0, 0, sign))]))
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
        order = early_order(self.steps, circuit.qubits, circuit.conditions)
        self.steps = self.steps.take(order)
        self.__dict__.pop("_plan", None)
        self._limit = MANY
        self._ordered = True
        self._ahead = []
        if self._compiled is not None:
            self._compile()

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
        accuracy = "in exact integers" if self._exact else "to 1e-9"
        self.name = f"sparse simulation of basis states, amplitudes {accuracy}"
        try:
            return Part(chunk, self._run_sparse(chunk))
        except RevealsError as reveals:
            return Part(chunk, reveals=reveals)

    def _run_sparse(self, chunk: Chunk) -> Finals:
        from revsynth.verification.sparse import run_sparse

        lanes = chunk.lanes + 1
        if self.most_rows is None:
            return run_sparse(self._plan, chunk.start, lanes, exact=self._exact)
        runs = max(self.most_rows >> 7, 1)
        return run_sparse(
            self._plan, chunk.start, lanes, exact=self._exact, most_rows=self.most_rows, most_runs=runs
        )
