"""What a lifted circuit must be shown to do in its oracle form, split into claims for a prover."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Literal as Choice

from revsynth.circuit.model import Qubit
from revsynth.verification.lifting.model import Lifted
from revsynth.verification.lifting.parities import FALSE, TRUE, Literal
from revsynth.verification.matching import Roles

FaultKind = Choice["output", "input", "scratch", "phase"]


def start_of(roles: Roles, qubits: int) -> tuple[list[Literal], int]:
    """The start of every qubit and the number of start variables, for `lift`.

    Variables are the inputs by combined index, then, in a `bit` block, the starts of the outputs, then the
    lent qubits.
    """
    start = [FALSE] * qubits
    for qubit, value in roles.preset:
        start[qubit] = value
    loose = [*roles.inputs, *(roles.outputs if roles.oracle == "bit" else ()), *roles.lent]
    for number, qubit in enumerate(loose, 1):
        start[qubit] = 2 * number
    return start, len(loose)


@dataclass(frozen=True)
class Claim:
    """The literal must be 0 (`constant`: the same) for every start and outcome; structure does not show it.

    kind: what is wrong where it is 1; qubit: -1 for a phase; operation: the measurement or reset that would
    depend on the start, else -1. literal: TRUE where it is wrong for certain.
    """

    kind: FaultKind
    literal: Literal
    qubit: Qubit = -1
    operation: int = -1
    constant: bool = False
    why: str = ""


@dataclass(frozen=True)
class Account:
    """The function lifted and what is left to prove.

    outputs: for every output bit the literal that must be the spec's value (the start of a `bit` block's
    output XORed away). sign: the literal that must be the spec's predicate up to a constant complement, in a
    phase oracle; in all others it must be constant. kept: what free qubits end in, which must depend on the
    inputs alone. claims: all else, empty where structure alone shows it.
    """

    outputs: tuple[Literal, ...]
    sign: Literal
    kept: tuple[tuple[Qubit, Literal], ...]
    claims: tuple[Claim, ...]


def account(lifted: Lifted, roles: Roles) -> Account:
    """Go through the roles of all qubits."""
    accountant = _Accountant(lifted, roles)
    outputs = accountant.outputs()
    accountant.unchanged()
    kept = accountant.kept()
    accountant.phases()
    return Account(tuple(outputs), lifted.sign, tuple(kept), tuple(accountant.claims))


class _Accountant:
    def __init__(self, lifted: Lifted, roles: Roles) -> None:
        self.lifted = lifted
        self.roles = roles
        self.claims: list[Claim] = []

    def _end(self, qubit: Qubit, kind: FaultKind) -> Literal:
        """The end of a qubit; one that is a random outcome is wrong for certain."""
        value = self.lifted.values[qubit]
        if value.paths:
            self.claims.append(Claim(kind, TRUE, qubit, why="it ends in a random outcome of a measurement"))
        return value.literal

    def outputs(self) -> list[Literal]:
        """The output bits as functions of the start."""
        xor = self.lifted.parities.xor
        based = self.roles.oracle == "bit"
        return [
            xor(self._end(qubit, "output"), self.lifted.start[qubit] if based else FALSE)
            for qubit in self.roles.outputs
        ]

    def unchanged(self) -> None:
        """Inputs, lent qubits and scratch end as they started."""
        roles = self.roles
        loose = {*roles.outputs, *roles.kept, *roles.leftover}
        inputs = () if roles.oracle in ("inplace", "embedded") else roles.inputs
        self._compare(inputs, "input", "it does not end as it started")
        loose.update(roles.inputs)
        rest = [qubit for qubit in range(len(self.lifted.values)) if qubit not in loose]
        self._compare(rest, "scratch", "it does not end as it started")

    def _compare(self, qubits: Sequence[Qubit], kind: FaultKind, why: str) -> None:
        for qubit in qubits:
            changed = self.lifted.parities.xor(self._end(qubit, kind), self.lifted.start[qubit])
            if changed != FALSE:
                self.claims.append(Claim(kind, changed, qubit, why=why))

    def kept(self) -> list[tuple[Qubit, Literal]]:
        """Free ends."""
        return [(qubit, self._end(qubit, "output")) for qubit in (*self.roles.kept, *self.roles.leftover)]

    def phases(self) -> None:
        """Signs that may not depend on the start, and outcomes that may not."""
        lifted = self.lifted
        if self.roles.oracle != "phase" and lifted.sign > TRUE:
            self.claims.append(
                Claim("phase", lifted.sign, constant=True, why="the sign depends on the start")
            )
        for _, literal in lifted.outcome_signs:
            why = "the sign depends on the start and on outcomes"
            self.claims.append(Claim("phase", literal, constant=True, why=why))
        for literal in lifted.steady:
            why = "the phase depends on the start and is no sign"
            self.claims.append(Claim("phase", literal, constant=True, why=why))
        for operation, literal in lifted.revealed:
            why = "the outcome of a measurement depends on the start"
            self.claims.append(Claim("phase", literal, operation=operation, constant=True, why=why))
