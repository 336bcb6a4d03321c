"""Running a circuit itself at chosen inputs, through the engines that follow all inputs of narrow specs.

The last resort where a circuit cannot be lifted, and the second opinion on every counterexample.
"""

from __future__ import annotations

import random
from collections.abc import Callable, Sequence

from revsynth.circuit.model import Circuit
from revsynth.spec.understand import Understanding
from revsynth.verification.counterexample import Teller
from revsynth.verification.decide import Found
from revsynth.verification.engines import Engines, Part
from revsynth.verification.evidence import Counterexample
from revsynth.verification.judge import Judge
from revsynth.verification.matching import Roles
from revsynth.verification.proof.chosen_demand import ChosenDemand

MOST_LANES = 1 << 14
MOST_STEPS = 1 << 26
"""Steps times inputs."""
LANES_AT_A_TIME = 1 << 10
FIRST_LANES = 8
"""Inputs that are run first, to see which engine can follow."""
SPARSE_LANES = 64
"""Inputs in all where superpositions have to be followed state by state."""
SPARSE_ROWS = 1 << 13
"""Basis states that these may hold at one time."""


class Runner:
    """Runs one circuit. Raises TooLargeError where an engine gives up."""

    def __init__(self, understanding: Understanding, circuit: Circuit, roles: Roles, reference: int) -> None:
        self._understanding = understanding
        self._circuit = circuit
        self._demand = ChosenDemand(roles, understanding, circuit.qubits, reference)
        self._engines = Engines(circuit, most_rows=SPARSE_ROWS)

    def fault(self, numbers: Sequence[int]) -> Counterexample | None:
        """What is wrong at the first of these run numbers at which something is."""
        chunk = self._demand.chosen(numbers)
        part = self._engines.run_chosen(chunk)
        found = self._found(part)
        if found is not None and part.brief:
            found = self._found(self._engines.told(chunk))
        if found is None:
            return None
        return Teller(self._understanding, self._circuit, self._demand).tell(found)

    def _found(self, part: Part) -> Found | None:
        if part.finals is None:
            return Found(part.chunk, reveals=part.reveals)
        fault = Judge(self._demand.inputs, remember=False).first_fault(part.finals, part.chunk)
        return None if fault is None else Found(part.chunk, fault)

    def sample(
        self, chosen: Sequence[int], progress: Callable[[str], None]
    ) -> tuple[int, Counterexample | None]:
        """Inputs run, those given first, then random ones; and what is wrong at one of them."""
        most = min(MOST_LANES, max(MOST_STEPS // max(len(self._engines.steps), 1), 16))
        draw = random.Random(0)
        numbers = list(chosen[: most // 2])
        numbers += [draw.getrandbits(self._demand.bits) for _ in range(most - len(numbers))]
        begin, size = 0, FIRST_LANES
        while begin < most:
            progress(f"verifying: {begin} of {most} inputs run one by one")
            found = self.fault(numbers[begin : begin + size])
            if found is not None:
                return begin, found
            begin += size
            if self._engines.is_sparse:
                most = min(most, SPARSE_LANES)
            else:
                size = LANES_AT_A_TIME
        return min(begin, most), None
