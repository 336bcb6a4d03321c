"""Speed of writing and reading OpenQASM; measured, not asserted."""

from __future__ import annotations

import random
from typing import Any

import pytest

from revsynth.circuit.model import Circuit, CircuitBuilder, Guard, Kind
from revsynth.qasm import prepare, read, write

pytestmark = pytest.mark.bench


def circuit(gates: int, qubits: int, measured: bool = False) -> Circuit:
    rng = random.Random(5)
    builder = CircuitBuilder()
    builder.add_register("a", qubits)
    builder.add_bits("seen", max(gates // 20, 1))
    bit = 0
    for index in range(gates):
        a, b = rng.sample(range(qubits), 2)
        if measured and index % 20 == 18 and bit < builder.bits:
            builder.measure(a, bit)
        elif measured and index % 20 == 19 and bit < builder.bits:
            builder.z(a, (2 * b,), condition=(Guard((2 * bit,)),))
            bit += 1
        elif rng.random() < 0.4:
            builder.cx(a, b)
        else:
            builder.add(rng.choice((Kind.H, Kind.T, Kind.TDG, Kind.S)), (a,))
    return builder.build()


@pytest.mark.parametrize("format", ["openqasm3", "openqasm2", "plain"])
def test_write_a_million_gates(benchmark: Any, format: str) -> None:
    prepared = prepare(circuit(1_000_000, 24), format)
    benchmark.pedantic(write, args=(prepared,), kwargs={"format": format}, rounds=1)


@pytest.mark.parametrize("format", ["openqasm3", "plain"])
def test_read_a_million_gates(benchmark: Any, format: str) -> None:
    text = write(prepare(circuit(1_000_000, 24), format), format=format)
    benchmark.pedantic(read, args=(text,), rounds=1)


def test_read_100_000_measured_gates(benchmark: Any) -> None:
    text = write(circuit(100_000, 40, measured=True))
    benchmark.pedantic(read, args=(text,), rounds=3)


def test_read_100_000_gates_that_hardly_repeat(benchmark: Any) -> None:
    text = write(circuit(100_000, 5_000))
    benchmark.pedantic(read, args=(text,), rounds=3)


def test_read_100_000_gates_without_the_fast_path(benchmark: Any) -> None:
    text = write(circuit(100_000, 24)).replace("\n", " ")
    benchmark.pedantic(read, args=(text,), rounds=1)
