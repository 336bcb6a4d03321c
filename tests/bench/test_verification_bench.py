"""Speed of verification; figures to reach: 2**20 inputs of 1,000 gates in 1 s, 12 inputs of 500 T in 5 s."""

from __future__ import annotations

import random

import numpy as np
import pytest
from pytest_benchmark.fixture import BenchmarkFixture

import revsynth
from revsynth.circuit.model import Circuit, CircuitBuilder
from revsynth.logic.function import Function
from revsynth.logic.truth_table import Columns, ones, variable
from revsynth.qasm import Program
from revsynth.verification import verify_program
from revsynth.verification.decide import Decision, decide
from revsynth.verification.matching import Roles
from tests.verification.textbook import and_on_zero, erase_and, register_circuit, toffoli

pytestmark = pytest.mark.bench


def random_cascade(lines: int, gates: int) -> tuple[Circuit, Columns]:
    """Up to five controls a gate, of both polarities; the circuit and the columns it leads to."""
    draw = random.Random(1)
    builder = CircuitBuilder()
    builder.add_register("q", lines)
    columns = [variable(lines, line) for line in range(lines)]
    for _ in range(gates):
        target, *controls = draw.sample(range(lines), draw.choice((2, 3, 3, 4, 5, 6)))
        literals = [2 * control + draw.randint(0, 1) for control in controls]
        builder.x(target, literals)
        product = ones(lines)
        for literal in literals:
            product = product & (~columns[literal >> 1] if literal & 1 else columns[literal >> 1])
        columns[target] = columns[target] ^ product
    return builder.build(), np.stack(columns)


@pytest.mark.parametrize(("lines", "gates"), [(12, 1_000), (20, 1_000), (24, 1_500)])
def test_a_cascade_in_place(benchmark: BenchmarkFixture, lines: int, gates: int) -> None:
    circuit, columns = random_cascade(lines, gates)
    every = np.tile(ones(lines), (lines, 1))
    function = Function(lines, lines, columns, every, every[0])
    roles = Roles("inplace", tuple(range(lines)), tuple(range(lines)))

    def run() -> Decision:
        return decide(circuit, roles, function, lambda _: None)

    assert benchmark.pedantic(run, rounds=2).holds


def products_oracle(terms: int, measured: bool) -> tuple[revsynth.Spec, Program]:
    """Signs of `terms` random products of three of twelve bits, each on one scratch qubit."""
    draw = random.Random(2)
    c = register_circuit(("v", 12), ("work", 1), bits=terms if measured else 0)
    parts = []
    for bit in range(terms):
        a, b, d = draw.sample(range(12), 3)
        parts.append(f"(v[{a}] & v[{b}] & v[{d}])")
        (and_on_zero if measured else toffoli)(c, a, b, 12)
        c.z(12, (2 * d,))
        if measured:
            erase_and(c, a, b, 12, bit)
        else:
            toffoli(c, a, b, 12)
    spec = revsynth.predicate(formula=" ^ ".join(parts), inputs={"v": 12})
    return spec, Program(c.build(), "3.0", ())


@pytest.mark.parametrize(("terms", "measured"), [(36, False), (125, True)], ids=["unitary", "measured"])
def test_twelve_inputs_and_500_t(benchmark: BenchmarkFixture, terms: int, measured: bool) -> None:
    spec, program = products_oracle(terms, measured)
    assert benchmark(verify_program, spec, program, exact_phase=True).holds


@pytest.mark.parametrize("bits", [4, 8, 16])
def test_a_built_predicate(benchmark: BenchmarkFixture, bits: int) -> None:
    spec = revsynth.predicate("a + b == 5", inputs={"a": bits // 2, "b": bits // 2})
    text = revsynth.build(spec, uncompute="measured").text()
    assert benchmark(revsynth.verify, spec, text=text).holds


@pytest.mark.parametrize("bits", [8, 12])
def test_the_general_engine(benchmark: BenchmarkFixture, bits: int) -> None:
    """A controlled H before and after sends every input through sparse rows."""
    spec = revsynth.predicate("v == 5", inputs={"v": bits})
    c = register_circuit(("v", bits), ("work", 1))
    literals = [2 * bit + 1 - (5 >> bit & 1) for bit in range(bits)]
    for _ in range(25):
        c.add(3, (bits,), (0,))  # type: ignore[arg-type]
        c.t(bits)
        c.t(bits, inverse=True)
        c.add(3, (bits,), (0,))  # type: ignore[arg-type]
    c.z(0, literals[1:])
    verdict = benchmark(verify_program, spec, Program(c.build(), "3.0", ()))
    assert verdict.holds
