"""How fast cascades are lowered and circuits counted; run with `pytest -m bench`."""

from __future__ import annotations

import numpy as np
import pytest

from revsynth.cascade import Cascade
from revsynth.circuit.cost import measure
from revsynth.circuit.model import Circuit
from revsynth.lowering import lower
from revsynth.synthesis.interface import Block

pytestmark = pytest.mark.bench


def random_cascade(lines: int, gates: int) -> Cascade:
    """Half the lines of a gate are controls, of both polarities; a fixed seed."""
    rng = np.random.default_rng(0)
    target = rng.integers(0, lines, gates)
    care = rng.integers(0, 1 << lines, gates).astype(np.uint64) & ~(np.uint64(1) << target.astype(np.uint64))
    value = rng.integers(0, 1 << lines, gates).astype(np.uint64) & care
    return Cascade.from_masks(lines, target, care, value)


def lowered(cascade: Cascade, gate_set: str, uncompute: str) -> Circuit:
    """All lines inputs."""
    block = Block(cascade, "bench", cascade.lines)
    registers = [("a", cascade.lines)]
    return lower(block, registers, oracle="inplace", gates=gate_set, uncompute=uncompute)


@pytest.mark.parametrize(("gate_set", "uncompute"), [("toffoli", "unitary"), ("clifford+t", "measured")])
@pytest.mark.parametrize(("lines", "gates"), [(8, 60), (12, 1_000), (16, 50_000)])
def test_lowering(benchmark, lines, gates, gate_set, uncompute):
    cascade = random_cascade(lines, gates)
    lowered(cascade, gate_set, uncompute)
    circuit = benchmark.pedantic(lowered, args=(cascade, gate_set, uncompute), rounds=1)
    assert len(circuit) > gates


@pytest.mark.parametrize("gates", [800, 40_000])
def test_measuring(benchmark, gates):
    circuit = lowered(random_cascade(16, gates), "clifford+t", "unitary")
    measure(circuit)
    assert benchmark(measure, circuit).gates == len(circuit)
