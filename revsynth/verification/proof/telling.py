"""A broken obligation in words: the input, what was expected, what came, and why it is wrong.

The circuit is run at that input through the engines for narrow specs, which confirm it and tell it in their
words. Where they cannot follow, or the fault lies between two starts, it is told from the lifting.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from typing import Any

import numpy as np

from revsynth.circuit.model import Circuit
from revsynth.one_line import one_line
from revsynth.spec.expectation import Expectation
from revsynth.spec.layout import bit_names, decode, describe
from revsynth.spec.model import Predicate, Word
from revsynth.spec.understand import Understanding
from revsynth.verification.counterexample import Teller
from revsynth.verification.evidence import Counterexample
from revsynth.verification.lifting.model import Lifted
from revsynth.verification.lifting.parities import Literal
from revsynth.verification.matching import Roles
from revsynth.verification.outcome import TooLargeError
from revsynth.verification.proof.choice import number
from revsynth.verification.proof.chosen_demand import ChosenDemand
from revsynth.verification.proof.cone import Cone
from revsynth.verification.proof.running import Runner
from revsynth.verification.proof.wide import Failure
from revsynth.verification.translation import Translation


class WideTeller:
    """Tells what a proof found, in the words of the spec."""

    def __init__(
        self,
        understanding: Understanding,
        circuit: Circuit,
        roles: Roles,
        lifted: Lifted,
        translation: Translation,
    ) -> None:
        self.understanding = understanding
        self.circuit = circuit
        self.roles = roles
        self.lifted = lifted
        self.translation = translation

    def tell(self, failure: Failure) -> Counterexample:
        """The counterexample of a failure.

        Raises ExpressionError where the spec is undefined there; AssertionError where running the circuit
        does not show the fault.
        """
        run = number(failure.variables[: self.lifted.start_variables])
        runner = Runner(self.understanding, self.circuit, self.roles, number(failure.reference))
        try:
            told = runner.fault([run])
        except TooLargeError:
            return self._from_lifting(failure)
        if told is None and failure.obligation.kind == "undefined":
            return self._from_lifting(failure)
        if told is None:
            at = describe(self.understanding.spec.inputs, self._index(failure.variables))
            raise AssertionError(f"a defect of revsynth: a proof and the run at {at} disagree")
        return told

    def constant_phase(self, radians: float, reference: Sequence[int]) -> Counterexample:
        """For `exact_phase`: the whole block is off by one constant phase."""
        index = number(reference)
        demand = ChosenDemand(self.roles, self.understanding, self.circuit.qubits, index)
        marked = self.roles.oracle == "phase" and Expectation(self.understanding)(index) == (1,)
        return Teller(self.understanding, self.circuit, demand).constant_phase(
            math.remainder(radians, 2 * math.pi), marked
        )

    def _index(self, start: Sequence[int]) -> int:
        return number(start[: self.understanding.input_bits])

    def _from_lifting(self, failure: Failure) -> Counterexample:
        obligation, start = failure.obligation, failure.variables
        index = self._index(start)
        expected: dict[str, Any] = {}
        got: dict[str, Any] = {}
        name = self._name(obligation.qubit) if obligation.qubit >= 0 else ""
        why = f"{name}: {obligation.why}" if name else obligation.why
        if obligation.kind == "output" and obligation.bit >= 0:
            expected, got, why = self._outputs(start)
        elif obligation.kind == "phase" and obligation.bit >= 0:
            wanted = self._value(start, self.translation.bits[0])
            expected, got = {"phase": -1 if wanted else 1}, {"phase": 1 if wanted else -1}
        elif obligation.kind in ("input", "scratch") and obligation.literal > 1:
            begun = self._value(start, self.lifted.start[obligation.qubit])
            expected, got = {name: begun}, {name: begun ^ 1}
        if obligation.relative:
            why += f", compared with {describe(self.understanding.spec.inputs, number(failure.reference))}"
        labels = self.understanding.spec.labels
        names = bit_names(self.understanding.spec.inputs)
        bits = {labels[name]: index >> bit & 1 for bit, name in enumerate(names) if name in labels}
        return Counterexample(self._input_words(index, start), obligation.kind, expected, got, why, bits)

    def _input_words(self, index: int, start: Sequence[int]) -> Any:
        body = self.understanding.spec.body
        size = self.understanding.input_bits
        if isinstance(body, Predicate) and body.clauses is not None:
            return [v + 1 if index >> v & 1 else -v - 1 for v in range(size)]
        words: dict[str, Any] = dict(decode(self.understanding.spec.inputs, index))
        loose = [*(self.roles.outputs if self.roles.oracle == "bit" else ()), *self.roles.lent]
        begun = dict(zip(loose, start[size:], strict=False))
        if self.roles.oracle == "bit" and any(begun[qubit] for qubit in self.roles.outputs):
            words |= _words(self._output_words(), [begun[qubit] for qubit in self.roles.outputs])
        if any(begun[qubit] for qubit in self.roles.lent):
            words["lent"] = sum(begun[qubit] << i for i, qubit in enumerate(self.roles.lent))
        return words

    def _output_words(self) -> Sequence[Word]:
        return self.understanding.outputs or (Word("mark", 1),)

    def _outputs(self, start: Sequence[int]) -> tuple[dict[str, Any], dict[str, Any], str]:
        """What the outputs end in, and what they should."""
        came = [self._value(start, self.lifted.values[q].literal) for q in self.roles.outputs]
        begun = [self._value(start, self.lifted.start[q]) for q in self.roles.outputs]
        based = self.roles.oracle == "bit"
        meant = [
            end if self._value(start, free) else self._value(start, bit) ^ (first if based else 0)
            for end, first, bit, free in zip(
                came, begun, self.translation.bits, self.translation.free, strict=True
            )
        ]
        ends, wanted = _words(self._output_words(), came), _words(self._output_words(), meant)
        expected = {name: value for name, value in wanted.items() if value != ends[name]}
        return expected, {name: ends[name] for name in expected}, "it is not the value of the spec"

    def _value(self, start: Sequence[int], literal: Literal) -> int:
        if literal < 2:
            return literal
        cone = Cone(self.lifted.parities, self.lifted.variables, [literal])
        words = np.array(start, dtype=np.uint64)[:, None]
        return int(cone.values([literal], words)[0, 0]) & 1

    def _name(self, qubit: int) -> str:
        register = next(r for r in self.circuit.registers if qubit in r.members)
        name = f"{register.name}[{qubit - register.start}]"
        label = self.understanding.spec.labels.get(name)
        return name if label is None else f"{name} ({one_line(label)})"


def _words(words: Sequence[Word], bits: Sequence[int]) -> dict[str, Any]:
    return dict(decode(words, number(bits)))
