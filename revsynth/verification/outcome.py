"""What an engine hands to the judge: the final state of all lanes for each record of measurement outcomes."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass, field
from typing import NamedTuple, TypeAlias

from revsynth.circuit.model import Condition
from revsynth.verification.classical import Column
from revsynth.verification.phases import NO_PHASE, Phases


class Outcome(NamedTuple):
    """What one measurement (or reset) gave; `source` is the operation in the circuit."""

    source: int
    value: int


Record = tuple[Outcome, ...]
"""Outcomes in order, without those that made no difference to the state."""


@dataclass(frozen=True)
class Final:
    """The final state of every lane for one record.

    columns: a column a qubit; phases: multiples of pi/4 a lane, `angle` radians more in every lane.
    superposed: lanes that end in several basis states; strange: lanes whose phase is no multiple of pi/4
    (relative to the reference lane), which `phase_of` gives in radians.
    """

    columns: list[Column]
    phases: Phases = NO_PHASE
    angle: float = 0.0
    record: Record = ()
    superposed: Column = 0
    strange: Column = 0
    phase_of: Callable[[int], float] = field(default=lambda lane: 0.0)
    mixed_qubits: Callable[[int], Sequence[int]] = field(default=lambda lane: ())


@dataclass(frozen=True)
class Finals:
    """All records of one set of lanes. `random`: some outcome was not certain, so phases of single records
    cannot be observed."""

    finals: list[Final]
    random: bool = False


class RevealsError(Exception):
    """A measurement or reset whose outcome depends on the input: inputs in superposition would collapse.

    lanes: where the chance of the outcome 1 differs from that in the reference lane; `certain` where the
    outcome itself is certain in every lane.
    """

    def __init__(self, source: int, lanes: Column, record: Record, certain: bool) -> None:
        super().__init__(source)
        self.source = source
        self.lanes = lanes
        self.record = record
        self.certain = certain


class TooLargeError(Exception):
    """An engine would need more than its limits allow; the text says what."""


class OutgrownError(TooLargeError):
    """Exact amplitudes outgrow 64-bit integers; complex numbers may still do."""


Bits: TypeAlias = int
"""The classical bits: bit b of the integer is classical bit b, so that copies are cheap."""


def with_bit(bits: Bits, bit: int, value: int) -> Bits:
    """The bits after one is written."""
    return bits | (1 << bit) if value else bits & ~(1 << bit)


def same_bits(some: Bits, others: Bits, which: Sequence[int]) -> bool:
    """Whether two runs agree in the given bits."""
    different = some ^ others
    return not different or not any(different >> bit & 1 for bit in which)


def holds(condition: Condition, bits: Bits) -> bool:
    """Whether all guards of a condition hold for the classical bits."""
    for literals, expected in condition:
        met = True
        for literal in literals:
            if bits >> (literal >> 1) & 1 == literal & 1:
                met = False
                break
        if met != expected:
            return False
    return True
