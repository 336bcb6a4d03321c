"""Turns a fault into words: the input, what was expected, what came, and why it is wrong."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any

from revsynth.circuit.model import Circuit, Kind, Qubit
from revsynth.one_line import one_line
from revsynth.spec.layout import bit_names, decode, describe
from revsynth.spec.model import Predicate, Word
from revsynth.spec.understand import Understanding
from revsynth.verification.decide import Found
from revsynth.verification.evidence import Counterexample, FaultKind
from revsynth.verification.forms import Chunk, Demand
from revsynth.verification.judge import Fault, misfit, phase_at
from revsynth.verification.outcome import Record, RevealsError

SHOWN = 4
"""So many qubits or outcomes are named in a sentence."""


@dataclass(frozen=True)
class Teller:
    """Tells faults of one circuit in the words of one spec."""

    understanding: Understanding
    circuit: Circuit
    demand: Demand

    def tell(self, found: Found) -> Counterexample:
        """The counterexample for what `decide` found."""
        if found.reveals is not None:
            return self._revealed(found.reveals, found.chunk)
        assert found.fault is not None
        return self._faulty(found.fault, found.chunk)

    def constant_phase(self, radians: float, marked: bool) -> Counterexample:
        """For `exact_phase`: the whole block is off by one constant phase."""
        wanted = -1 if marked else 1
        got = _phase(radians + (math.pi if marked else 0.0))
        reference = self.demand.reference or 0
        why = f"every phase is off by the constant {_phase(radians)}, and the phase is to be exact"
        return self._counterexample(reference, "phase", {"phase": wanted}, {"phase": got}, why)

    def _counterexample(
        self, number: int, kind: FaultKind, expected: dict[str, Any], got: dict[str, Any], why: str
    ) -> Counterexample:
        labels = self.understanding.spec.labels
        names = bit_names(self.understanding.spec.inputs)
        bits = {labels[name]: number >> bit & 1 for bit, name in enumerate(names) if name in labels}
        return Counterexample(self._inputs(number), kind, expected, got, why, bits)

    def _faulty(self, fault: Fault, chunk: Chunk) -> Counterexample:
        number = self._number(chunk, fault.lane)
        ends = {"undefined": self._undefined, "phase": self._wrong_phase}.get(fault.kind, self._wrong_qubits)
        expected, got, why = ends(fault, chunk)
        why += self._start_in_words(number) + self._record_in_words(fault.final.record)
        return self._counterexample(number, fault.kind, expected, got, why)

    def _number(self, chunk: Chunk, lane: int) -> int:
        return (self.demand.reference or 0) if lane == chunk.lanes else int(chunk.numbers[lane])

    def _inputs(self, number: int) -> Any:
        """The input in words; starting values of outputs and lent qubits where they are not 0."""
        index = number & ((1 << self.demand.inputs) - 1)
        body = self.understanding.spec.body
        if isinstance(body, Predicate) and body.clauses is not None:
            return [v + 1 if index >> v & 1 else -v - 1 for v in range(self.demand.inputs)]
        values: dict[str, Any] = dict(decode(self.understanding.spec.inputs, index))
        return values | self._start(number)

    def _start(self, number: int) -> dict[str, Any]:
        ones = {
            qubit
            for bit, qubit in enumerate(self.demand.enumerated)
            if number >> (self.demand.inputs + bit) & 1
        }
        roles = self.demand.roles
        start: dict[str, Any] = {}
        if roles.oracle == "bit" and ones & set(roles.outputs):
            start |= _words(self._output_words(), [int(qubit in ones) for qubit in roles.outputs])
        if ones & set(roles.lent):
            start["lent"] = sum(1 << i for i, qubit in enumerate(roles.lent) if qubit in ones)
        return start

    def _output_words(self) -> Sequence[Word]:
        return self.understanding.outputs or (Word("mark", 1),)

    def _wrong_qubits(self, fault: Fault, chunk: Chunk) -> tuple[dict[str, Any], dict[str, Any], str]:
        lane, final = fault.lane, fault.final
        if fault.kind == "scratch":
            want = {w.qubit: w.value >> lane & 1 for w in chunk.wanted if w.qubit in fault.qubits}
            expected = {self._name(qubit): value for qubit, value in want.items()}
            got = {self._name(qubit): value ^ 1 for qubit, value in want.items()}
        else:
            outputs = fault.kind == "output"
            qubits = self.demand.roles.outputs if outputs else self.demand.roles.inputs
            words = self._output_words() if outputs else self.understanding.spec.inputs
            bits = [final.columns[qubit] >> lane & 1 for qubit in qubits]
            right = [bit ^ (qubit in fault.qubits) for bit, qubit in zip(bits, qubits, strict=True)]
            came, meant = _words(words, bits), _words(words, right)
            expected = {name: value for name, value in meant.items() if value != came[name]}
            got = {name: came[name] for name in expected}
        ends = self._list([f"{self._name(q)} ends in {final.columns[q] >> lane & 1}" for q in fault.qubits])
        reason = {
            "output": "which is not the value of the spec",
            "input": "but inputs are to stay as they are",
            "scratch": "but it is to end as it began: scratch starts and ends in 0",
        }[fault.kind]
        if fault.kind == "scratch" and set(fault.qubits) <= set(self.demand.roles.lent):
            reason = "but lent qubits are to be given back as they were"
        return expected, got, f"{ends}, {reason}"

    def _wrong_phase(self, fault: Fault, chunk: Chunk) -> tuple[dict[str, Any], dict[str, Any], str]:
        lane = fault.lane
        reference = self.demand.reference or 0
        wanted: Any = -1 if chunk.sign >> lane & 1 else 1
        if lane == chunk.lanes:
            radians = misfit(fault.final, chunk, lane) + (math.pi if wanted == -1 else 0.0)
            against = "the phases of other inputs"
        else:
            radians = phase_at(fault.final, chunk, lane) + math.pi * (chunk.sign >> chunk.lanes & 1)
            against = f"that of {describe(self.understanding.spec.inputs, reference)}"
        if not chunk.sign_care >> lane & 1:
            wanted = "1 or -1"
        got = _phase(radians)
        why = f"the phase is {got} where it must be {wanted}, compared with {against}"
        return {"phase": wanted}, {"phase": got}, why

    def _undefined(self, fault: Fault, chunk: Chunk) -> tuple[dict[str, Any], dict[str, Any], str]:
        names = self._list([self._name(qubit) for qubit in fault.qubits])
        if not fault.depends:
            end = "ends" if len(fault.qubits) == 1 else "end"
            return {}, {}, f"{names} {end} in a superposition of basis states instead of a value"
        what = f"{names or 'the sign'}, free here,"
        on = {
            "outcome": "the outcomes of measurements",
            "start": "the starting value of the outputs or lent qubits",
        }[fault.depends]
        return {}, {}, f"{what} depends on {on} and not on the input alone"

    def _revealed(self, reveals: RevealsError, chunk: Chunk) -> Counterexample:
        lane = (reveals.lanes & -reveals.lanes).bit_length() - 1
        number = self._number(chunk, lane)
        op = self._operation(reveals.source)
        other = describe(self.understanding.spec.inputs, self.demand.reference or 0)
        differs = "comes out differently" if reveals.certain else "comes out with different chances"
        why = f"{op} {differs} here than for {other}: inputs in superposition would collapse"
        why += self._start_in_words(number) + self._record_in_words(reveals.record)
        return self._counterexample(number, "undefined", {}, {}, why)

    def _operation(self, source: int) -> str:
        """A measurement or reset in words."""
        circuit = self.circuit
        qubit = self._name(int(circuit.operand[circuit.offset[source + 1] - 1]))
        if circuit.kind[source] == Kind.RESET:
            return f"the reset of {qubit}"
        bit = int(circuit.bit[source])
        register = next(r for r in circuit.bit_registers if bit in r.members)
        return f"the measurement of {qubit} into {register.name}[{bit - register.start}]"

    def _record_in_words(self, record: Record) -> str:
        if not record:
            return ""
        shown = [f"{self._operation(outcome.source)} gives {outcome.value}" for outcome in record]
        return f", where {self._list(shown)}"

    def _start_in_words(self, number: int) -> str:
        start = self._start(number)
        if not start:
            return ""
        return ", with " + ", ".join(f"{name} starting in {value}" for name, value in start.items())

    def _name(self, qubit: Qubit) -> str:
        register = next(r for r in self.circuit.registers if qubit in r.members)
        name = f"{register.name}[{qubit - register.start}]"
        label = self.understanding.spec.labels.get(name)
        return name if label is None else f"{name} ({one_line(label)})"

    @staticmethod
    def _list(names: Sequence[str]) -> str:
        if len(names) > SHOWN:
            return ", ".join(names[:SHOWN]) + f" and {len(names) - SHOWN} more"
        return " and ".join(filter(None, [", ".join(names[:-1]), *names[-1:]]))


def _words(words: Sequence[Word], bits: Sequence[int]) -> dict[str, Any]:
    return dict(decode(words, sum(bit << place for place, bit in enumerate(bits))))


def _phase(radians: float) -> int | float:
    """1, -1, or radians between -pi and pi."""
    radians = math.remainder(radians, 2 * math.pi)
    if abs(radians) < 1e-9:
        return 1
    return -1 if abs(abs(radians) - math.pi) < 1e-9 else radians
