"""Compares final states with what is demanded, lane by lane, and finds the first lane that fails."""

from __future__ import annotations

import math
from dataclasses import dataclass, field

from revsynth.circuit.model import Qubit
from revsynth.verification.classical import Column
from revsynth.verification.evidence import FaultKind
from revsynth.verification.forms import Chunk
from revsynth.verification.outcome import Final, Finals
from revsynth.verification.phases import at_lane, turned


@dataclass(frozen=True)
class Fault:
    """The first lane at which the circuit fails.

    phase_off: the lane is right, but its phase does not go with that of the reference. depends: what
    is free there depends on something else than the input, in words.
    """

    lane: int
    kind: FaultKind
    final: Final
    qubits: tuple[Qubit, ...] = ()
    depends: str = ""


@dataclass
class Judge:
    """Judges chunk after chunk; remembers free values so that they are seen to depend on the input alone.

    inputs: the n input bits; run numbers above them hold enumerated starting values.
    """

    inputs: int
    remember: bool
    _free_values: dict[tuple[int, int, int], Column] = field(default_factory=dict)

    def first_fault(self, found: Finals, chunk: Chunk) -> Fault | None:
        """The fault in the lowest lane; kinds in the order undefined, output, input, scratch, phase."""
        faults: list[Fault] = []
        for final in found.finals:
            fault = self._fault_of(final, found.finals[0], chunk)
            if fault is not None:
                faults.append(fault)
        if not faults:
            blocks = isinstance(chunk.numbers, range)
            return self._other_dependence(found.finals[0], chunk) if self.remember and blocks else None
        return min(faults, key=lambda fault: fault.lane)

    def _fault_of(self, final: Final, first: Final, chunk: Chunk) -> Fault | None:
        inside = (1 << chunk.lanes) - 1
        wrong: list[tuple[FaultKind, Column, Qubit, str]] = [
            ("undefined", final.superposed & chunk.active, -1, "")
        ]
        for want in chunk.wanted:
            lanes = (final.columns[want.qubit] ^ want.value) & want.care
            if lanes:
                wrong.append((want.kind, lanes, want.qubit, ""))
        wrong.append(("phase", self._wrong_phases(final, chunk), -1, ""))
        if final is not first:
            wrong.extend(_differences(final, first, chunk))
        every = 0
        for _, lanes, _, _ in wrong:
            every |= lanes
        every &= inside
        if not every:
            return None
        lane = (every & -every).bit_length() - 1
        here = [(kind, qubit, text) for kind, lanes, qubit, text in wrong if lanes >> lane & 1]
        kind, _, depends = here[0]
        qubits = tuple(qubit for other, qubit, _ in here if other == kind and qubit >= 0)
        if kind == "undefined" and not depends:
            qubits = tuple(final.mixed_qubits(lane))
        return Fault(lane, kind, final, qubits, depends)

    def _wrong_phases(self, final: Final, chunk: Chunk) -> Column:
        """Lanes whose phase, relative to the reference, is not the sign demanded (or no sign)."""
        relative, sign = relative_phases(final, chunk)
        wrong = relative[0] | relative[1] | ((relative[2] ^ sign) & chunk.sign_care)
        return (wrong | final.strange) & chunk.active

    def _other_dependence(self, final: Final, chunk: Chunk) -> Fault | None:
        """Free values that differ between two starting values of an output or lent qubit."""
        for number, (column, lanes, qubit) in enumerate(_observed(final, chunk)):
            base = int(chunk.numbers[0]) & ((1 << self.inputs) - 1)
            small = min(1 << self.inputs, chunk.lanes)
            seen = column & lanes & ((1 << small) - 1)
            expected = self._recalled(number, base, small, seen)
            copies = ((1 << chunk.lanes) - 1) // ((1 << small) - 1)
            wrong = (column & lanes & ((1 << chunk.lanes) - 1)) ^ (expected * copies)
            if wrong:
                lane = (wrong & -wrong).bit_length() - 1
                return Fault(lane, "undefined", final, (qubit,) if qubit >= 0 else (), "start")
        return None

    def _recalled(self, number: int, base: int, size: int, seen: Column) -> Column:
        """What was seen first at the inputs base ... base + size - 1, and that is `seen` the first time.

        It may have been a larger block that had these inputs in it: blocks get smaller where memory runs
        short, never larger. Sizes are powers of two.
        """
        width = size
        while width <= 1 << self.inputs:
            start = base & -width
            known = self._free_values.get((number, width, start))
            if known is not None:
                return known >> (base - start) & ((1 << size) - 1)
            width *= 2
        self._free_values[number, size, base] = seen
        return seen


def relative_phases(final: Final, chunk: Chunk) -> tuple[tuple[Column, Column, Column], Column]:
    """Phases less that of the reference lane, and the signs demanded relative to the reference's."""
    reference = at_lane(final.phases, chunk.lanes)
    relative = turned(final.phases, chunk.ones, -reference % 8)
    sign = chunk.sign ^ chunk.ones if chunk.sign >> chunk.lanes & 1 else chunk.sign
    return relative, sign


def _observed(final: Final, chunk: Chunk) -> list[tuple[Column, Column, Qubit]]:
    """(value, lanes where it is free, qubit), the sign last with qubit -1."""
    found = [(final.columns[f.qubit] ^ f.base, f.lanes, f.qubit) for f in chunk.free]
    if chunk.sign_care != chunk.active:
        relative, _ = relative_phases(final, chunk)
        found.append((relative[2], chunk.active & ~chunk.sign_care, -1))
    return found


def _differences(final: Final, first: Final, chunk: Chunk) -> list[tuple[FaultKind, Column, Qubit, str]]:
    """Where free values differ between two records of outcomes."""
    pairs = zip(_observed(final, chunk), _observed(first, chunk), strict=True)
    return [
        ("undefined", (here ^ there) & lanes, qubit, "outcome")
        for (here, lanes, qubit), (there, _, _) in pairs
    ]


def phase_at(final: Final, chunk: Chunk, lane: int) -> float:
    """The phase of a lane relative to the reference lane, in radians between -pi and pi."""
    if final.strange >> lane & 1:
        radians = final.phase_of(lane)
    else:
        radians = (at_lane(final.phases, lane) - at_lane(final.phases, chunk.lanes)) * math.pi / 4
    return math.remainder(radians, 2 * math.pi)


def misfit(final: Final, chunk: Chunk, lane: int) -> float:
    """How far the phase of a lane is from the sign demanded there (either, where it is free), in radians."""
    wanted = math.pi * (chunk.sign >> lane & 1)
    reference = at_lane(final.phases, chunk.lanes) * math.pi / 4
    radians = math.remainder(final.angle + reference + phase_at(final, chunk, lane) - wanted, 2 * math.pi)
    if not chunk.sign_care >> lane & 1:
        radians = math.remainder(radians, math.pi)
    if abs(radians) < 1e-12:
        return 0.0
    return math.pi if radians < 1e-12 - math.pi else radians
