"""Speed of lifting: a wide adder, and rounds of additions in 190,000 gates."""

from __future__ import annotations

from typing import Any

import pytest

from revsynth.circuit.model import Circuit
from revsynth.verification.lifting import lift, start_of
from revsynth.verification.matching import Roles
from tests.verification.lifting_circuits import adder, rounds

CASES = {
    "adder of 48 bits": lambda: (adder(48, "clifford+t", "measured"), 96),
    "300 rounds on 8 words of 32 bits, measured": lambda: (rounds(8, 32, 300, "clifford+t", "measured"), 256),
    "300 rounds on 8 words of 32 bits, unitary": lambda: (rounds(8, 32, 300, "clifford+t", "unitary"), 256),
}


@pytest.mark.bench
@pytest.mark.parametrize("name", CASES)
def test_lifting(benchmark: Any, name: str) -> None:
    circuit, inputs = CASES[name]()
    benchmark.pedantic(lifted, args=(circuit, inputs), rounds=3)


def lifted(circuit: Circuit, inputs: int) -> int:
    qubits = tuple(range(inputs))
    return len(lift(circuit, *start_of(Roles("inplace", qubits, qubits), circuit.qubits)).values)
