"""Which qubits may start in 1 as well as in 0 and change nothing else: shown without running inputs.

A block that maps |x>|y> to |x>|y XOR f(x)> commutes with X on every qubit of y, and a block that does so
and is right for y = 0 is right for every y. So X on each such qubit is carried through the circuit as a Pauli
operator (conjugation rules: Aaronson, Gottesman, Phys. Rev. A 70, 2004); where it passes every step and
comes out as the same X with sign +, the qubit need not be enumerated. A step beyond the Clifford group must
commute with the operator as it is, and so must measurements and everything under a condition; then nothing is
claimed for that qubit.
"""

from __future__ import annotations

from collections.abc import Sequence

from revsynth.verification.steps import FLIP, HADAMARD, MEASURE, RESET, TURN, Step, Steps


def commuting(steps: Sequence[Step], qubits: int, wanted: Sequence[int]) -> list[int]:
    """Those of the qubits `wanted` whose X the circuit provably commutes with, sign included."""
    paulis = _Paulis(qubits, wanted)
    flat = Steps.of(steps)
    x, z = paulis.x, paulis.z
    literal, offset = flat.literal.tolist(), flat.offset.tolist()
    for index, (target, begin, end) in enumerate(
        zip(flat.target.tolist(), offset[:-1], offset[1:], strict=True)
    ):
        touched = x[target] | z[target] if target >= 0 else 0
        for one in literal[begin:end]:
            touched |= x[one >> 1] | z[one >> 1]
        if touched:
            paulis.pass_through(steps[index])
    return paulis.unchanged(wanted)


class _Paulis:
    """Bit j of x[q], z[q] and sign: operator j has an X, a Z on qubit q (Y: both), and the sign -1."""

    def __init__(self, qubits: int, wanted: Sequence[int]) -> None:
        self.x = [0] * qubits
        self.z = [0] * qubits
        self.sign = 0
        self.failed = 0
        for number, qubit in enumerate(wanted):
            self.x[qubit] = 1 << number

    def pass_through(self, step: Step) -> None:
        """Carry all operators through one step; a step on qubits where they do nothing changes nothing."""
        if step.condition >= 0:
            self.demand_commuting(step)
        elif step.act == FLIP:
            self.flip(step)
        elif step.act == HADAMARD:
            self.hadamard(step.target)
        elif step.act == MEASURE:
            self.failed |= self.x[step.target]
        elif step.act == RESET:
            self.failed |= self.x[step.target] | self.z[step.target]
        else:
            self.turn(step)

    def demand_commuting(self, step: Step) -> None:
        """Give up operators that a step could change."""
        for literal in step.literals:
            self.failed |= self.x[literal >> 1]
        if step.act == FLIP:
            self.failed |= self.z[step.target]
        elif step.act != TURN and step.target >= 0:
            self.failed |= self.x[step.target] | self.z[step.target]

    def flip(self, step: Step) -> None:
        target = step.target
        if not step.literals:
            self.sign ^= self.z[target]
        elif len(step.literals) == 1:
            control, negative = step.literals[0] >> 1, step.literals[0] & 1
            if negative:
                self.sign ^= self.z[control]
            self._cnot(control, target)
            if negative:
                self.sign ^= self.z[control]
        else:
            self.demand_commuting(step)

    def _cnot(self, control: int, target: int) -> None:
        x, z = self.x, self.z
        self.sign ^= x[control] & z[target] & ~(x[target] ^ z[control])
        x[target] ^= x[control]
        z[control] ^= z[target]

    def hadamard(self, qubit: int) -> None:
        self.sign ^= self.x[qubit] & self.z[qubit]
        self.x[qubit], self.z[qubit] = self.z[qubit], self.x[qubit]

    def turn(self, step: Step) -> None:
        """S is X to Y to -X; a phase on 0 is its inverse on 1, up to a constant."""
        literals, amount = step.literals, step.amount
        if step.act == TURN and len(literals) == 1 and amount % 2 == 0:
            qubit = literals[0] >> 1
            if literals[0] & 1:
                amount = -amount % 8
            for _ in range(amount // 2):
                self.sign ^= self.x[qubit] & self.z[qubit]
                self.z[qubit] ^= self.x[qubit]
        elif step.act == TURN and len(literals) == 2 and amount == 4:
            for literal in literals:
                if literal & 1:
                    self.sign ^= self.z[literal >> 1]
            one, other = (literal >> 1 for literal in literals)
            self.hadamard(other)
            self._cnot(one, other)
            self.hadamard(other)
            for literal in literals:
                if literal & 1:
                    self.sign ^= self.z[literal >> 1]
        else:
            self.demand_commuting(step)

    def unchanged(self, wanted: Sequence[int]) -> list[int]:
        """The qubits whose operator is what it was."""
        wrong = self.failed | self.sign
        own = {qubit: 1 << number for number, qubit in enumerate(wanted)}
        for qubit, x in enumerate(self.x):
            wrong |= (x ^ own.get(qubit, 0)) | self.z[qubit]
        return [qubit for number, qubit in enumerate(wanted) if not (wrong >> number) & 1]
