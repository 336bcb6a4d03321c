"""The demands of an oracle form at chosen inputs of a spec too wide for a table."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from revsynth.spec.sampled import SampledSpec
from revsynth.spec.understand import Understanding
from revsynth.verification.classical import Column
from revsynth.verification.forms import Chunk, Demand
from revsynth.verification.matching import Roles
from revsynth.verification.proof.choice import packed
from revsynth.verification.proof.cone import Words


class ChosenDemand(Demand):
    """As `Demand`, with every output of a `bit` block and every lent qubit enumerated, and no blocks.

    A run number is the combined index in the low bits, then the starting values of outputs and lent qubits.
    """

    def __init__(self, roles: Roles, understanding: Understanding, qubits: int, reference: int) -> None:
        """reference: the combined index of an input at which everything is demanded."""
        self.roles = roles
        self.qubits = qubits
        self.enumerated = (*(roles.outputs if roles.oracle == "bit" else ()), *roles.lent)
        self.inputs = understanding.input_bits
        self.bits = self.inputs + len(self.enumerated)
        self.everywhere = roles.oracle not in ("inplace", "embedded")
        self.reference = reference
        self._spec = SampledSpec(understanding)

    def chosen(self, numbers: Sequence[int]) -> Chunk:
        """These run numbers as lanes; those at which nothing is demanded are left out.

        Raises ExpressionError where the spec is undefined at one inside the domain.
        """
        mask = (1 << self.inputs) - 1
        wanted = self._spec.wanted(packed([number & mask for number in numbers], self.inputs))
        if not self.everywhere:
            demanded = _column(~np.bitwise_and.reduce(wanted.free, axis=0))
            numbers = [number for lane, number in enumerate(numbers) if demanded >> lane & 1]
        reference = self.reference or 0
        lanes = [*numbers, reference]
        wanted = self._spec.wanted(packed([number & mask for number in lanes], self.inputs))
        ones = (1 << len(lanes)) - 1
        start = [0] * self.qubits
        for qubit, value in self.roles.preset:
            start[qubit] = ones * value
        for place, qubit in enumerate((*self.roles.inputs, *self.enumerated)):
            start[qubit] = sum((number >> place & 1) << lane for lane, number in enumerate(lanes))
        values = [_column(row) & ones for row in wanted.bits]
        cares = [~_column(row) & ones for row in wanted.free]
        ends, free = self._ends(start, values, cares, ones, ones)
        phase = self.roles.oracle == "phase"
        return Chunk(
            start,
            ends,
            free,
            sign=values[0] if phase else 0,
            sign_care=cares[0] if phase else ones,
            ones=ones,
            active=ones,
            numbers=np.array(numbers, dtype=object),
        )


def _column(row: Words) -> Column:
    return int.from_bytes(row.astype("<u8").tobytes(), "little")
