"""Runs a circuit on all inputs and decides whether it does what its form demands."""

from __future__ import annotations

import random
from collections import deque
from collections.abc import Callable, Iterator
from concurrent.futures import ThreadPoolExecutor
from dataclasses import dataclass

from revsynth.circuit.model import Circuit, Qubit
from revsynth.logic.function import Function
from revsynth.logic.truth_table import first_inputs
from revsynth.verification.commuting import commuting
from revsynth.verification.engines import Engines, Part
from revsynth.verification.evidence import Level
from revsynth.verification.forms import Chunk, Demand
from revsynth.verification.judge import Fault, Judge, misfit
from revsynth.verification.matching import Roles
from revsynth.verification.outcome import RevealsError, TooLargeError

ENUMERATED_BITS = 12
"""Up to so many bits in all, every starting value of outputs and lent qubits is run as a matter of course."""
MOST_BITS = 24
"""Up to so many bits in all they are run where nothing else can be shown."""
LOOK_BITS = 11
"""Above so many bits, a first look at a few inputs comes before all of them, so that faults show early."""
FIRST_LOOK = 16
MOST_STEPS = 1 << 33
"""Inputs times steps up to which the sparse engine runs all inputs: some ten minutes."""
THREADS = 2
THREADS_FROM = 4
"""Blocks from which threads share them; each thread holds the state of one block."""
SAMPLE_BITS = 12
SAMPLE_BLOCKS = 16
"""A sample has so many blocks of 2**SAMPLE_BITS inputs."""

Progress = Callable[[str], None]


@dataclass(frozen=True)
class Found:
    """What was found where: a fault in a chunk, or a measurement that gives the input away."""

    chunk: Chunk
    fault: Fault | None = None
    reveals: RevealsError | None = None


@dataclass(frozen=True)
class Decision:
    """holds: None where undecided; level and inputs as in Evidence.

    random: some outcome was uncertain, so constant phases of single outcomes cannot be observed.
    proven: outputs and lent qubits that need not be run in both values; demand.enumerated are run so.
    """

    holds: bool | None
    level: Level
    inputs: int
    demand: Demand
    engine: str
    measurements: int
    random: bool
    proven: tuple[Qubit, ...]
    global_phase: float = 0.0
    found: Found | None = None
    detail: str = ""


def decide(circuit: Circuit, roles: Roles, function: Function, progress: Progress) -> Decision:
    """Decide by simulation of all inputs; by a sample, and so undecided, where that is out of reach."""
    return _Decider(circuit, roles, function, progress).decide()


class _Decider:
    def __init__(self, circuit: Circuit, roles: Roles, function: Function, progress: Progress) -> None:
        self.engines = Engines(circuit)
        self.progress = progress
        started = (*(roles.outputs if roles.oracle == "bit" else ()), *roles.lent)
        self.proven: tuple[Qubit, ...] = ()
        if started and function.inputs + len(started) > ENUMERATED_BITS:
            self.proven = tuple(commuting(self.engines.steps, circuit.qubits, started))
        enumerated = [qubit for qubit in started if qubit not in self.proven]
        self.demand = Demand(roles, function, circuit.qubits, enumerated)
        self.random = False
        self.global_phase = 0.0
        self.lanes = 0
        self.why_sampled = ""

    def decide(self) -> Decision:
        if self.demand.reference is None:
            return self._decision(True, "exhaustive", detail="the spec leaves every input free")
        judge = Judge(self.demand.inputs, remember=bool(self.demand.enumerated))
        try:
            for part in self._parts():
                found = self._look(part, judge)
                if found is not None:
                    complete = self.lanes + part.chunk.lanes >= 1 << self.demand.bits
                    self.lanes += part.chunk.lanes
                    return self._decision(False, "exhaustive" if complete else "sampled", found=found)
                self.lanes += part.chunk.lanes
        except TooLargeError as limit:
            level: Level = "sampled" if self.lanes else "none"
            return self._decision(None, level, detail=f"simulation stopped: {limit}")
        if self.why_sampled:
            return self._decision(None, "sampled", detail=self.why_sampled)
        return self._decision(True, "exhaustive")

    def _look(self, part: Part, judge: Judge) -> Found | None:
        if part.finals is None:
            return Found(part.chunk, reveals=part.reveals)
        self.random = self.random or part.finals.random
        fault = judge.first_fault(part.finals, part.chunk)
        if not self.random:
            self.global_phase = misfit(part.finals.finals[0], part.chunk, part.chunk.lanes)
        if fault is None:
            return None
        if part.brief:
            told = self._look(self.engines.told(part.chunk), judge)
            if told is None:
                raise AssertionError("a defect of revsynth: two engines of verification disagree")
            return told
        if fault.kind == "phase" and not self.random:
            absolute = misfit(fault.final, part.chunk, fault.lane)
            if abs(absolute) < 1e-9 and part.chunk.sign_care >> part.chunk.lanes & 1:
                fault = Fault(part.chunk.lanes, "phase", fault.final)
        return Found(part.chunk, fault)

    def _parts(self) -> Iterator[Part]:
        """All inputs, or some and a reason in `why_sampled`."""
        bits = self.demand.bits
        if bits > MOST_BITS:
            self.why_sampled = (
                f"{len(self.demand.enumerated)} outputs or lent qubits may start in any state, and what "
                f"that does to {1 << self.demand.inputs} inputs can only be sampled"
            )
            yield from self._sample()
            return
        size = self.engines.block_bits(bits)
        looked = bits <= LOOK_BITS
        for base, chunk in self._blocks(bits, size):
            if base:
                self.progress(f"verifying: {base} of {1 << bits} inputs")
            part = self.engines.fast(chunk)
            if part is not None:
                yield part
                continue
            if not looked:
                yield self.engines.run_chosen(self.demand.chosen(self._first_look()))
                self.lanes = base
                looked = True
            left = (1 << bits) - base
            if left * len(self.engines.steps) > MOST_STEPS:
                self.why_sampled = (
                    f"{left} inputs through {len(self.engines.steps)} steps are too many for exact "
                    "simulation of superpositions"
                )
                yield from self._sample()
                return
            yield from self.engines.run_slow(self.demand, base, size)

    def _blocks(self, bits: int, size: int) -> Iterator[tuple[int, Chunk]]:
        """All lanes in blocks; where there are many, two threads run the next ones meanwhile."""
        bases = range(0, 1 << bits, 1 << size)
        if len(bases) < THREADS_FROM:
            for base in bases:
                yield base, self.demand.block(base, size)
            return
        helper = ThreadPoolExecutor(THREADS)
        ahead: deque[tuple[int, Chunk]] = deque()
        try:
            for base in bases:
                chunk = self.demand.block(base, size)
                self.engines.begin(chunk, helper)
                ahead.append((base, chunk))
                if len(ahead) > THREADS:
                    yield ahead.popleft()
            yield from ahead
        finally:
            helper.shutdown(cancel_futures=True)

    def _first_look(self) -> list[int]:
        """Marked inputs and a spread of others."""
        assert self.demand.reference is not None
        size = 1 << self.demand.bits
        marked = [x for row in self.demand.function.values[:4] for x in first_inputs(row, 2)]
        spread = [(2 * i + 1) * size // (2 * FIRST_LOOK) for i in range(FIRST_LOOK)]
        return sorted({self.demand.reference, *marked, *spread})

    def _sample(self) -> Iterator[Part]:
        """Run numbers from a fixed seed, those with starting values 0 among them."""
        draw = random.Random(0)
        below = 1 << self.demand.inputs
        for block in range(SAMPLE_BLOCKS):
            limit = below if block == 0 else 1 << self.demand.bits
            numbers = sorted({draw.randrange(limit) for _ in range(1 << SAMPLE_BITS)})
            yield self.engines.run_chosen(self.demand.chosen(numbers))

    def _decision(
        self, holds: bool | None, level: Level, *, found: Found | None = None, detail: str = ""
    ) -> Decision:
        active = self.demand.active_count()
        complete = holds and level == "exhaustive"
        return Decision(
            holds=holds,
            level=level,
            inputs=active if complete else min(self.lanes, active),
            demand=self.demand,
            engine=self.engines.name,
            measurements=self.engines.measurements,
            random=self.random,
            proven=self.proven,
            global_phase=self.global_phase if holds and not self.random else 0.0,
            found=found,
            detail=detail,
        )
