"""Networks: the builder's rules keep the function, and all ways of running one agree."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from revsynth.logic import network_kernels, network_simulation
from revsynth.logic.network import FALSE, TRUE, Network, evaluate
from revsynth.logic.network_builder import NetworkBuilder
from revsynth.logic.network_simulation import input_columns, simulate, simulate_nodes, tabulate
from revsynth.logic.truth_table import unpack


@st.composite
def programs(draw: st.DrawFn) -> tuple[int, list[tuple[str, int, int, int]]]:
    """Inputs, and operations on earlier literals by number."""
    inputs = draw(st.integers(1, 6))
    count = draw(st.integers(0, 30))
    operation = st.tuples(
        st.sampled_from(["and", "or", "xor", "mux", "majority", "not"]),
        *(st.integers(0, 100) for _ in range(3)),
    )
    return inputs, draw(st.lists(operation, min_size=count, max_size=count))


def run(inputs: int, operations: list[tuple[str, int, int, int]]) -> tuple[Network, list[int]]:
    """The network of all results, and their truth tables as integers by direct evaluation."""
    builder = NetworkBuilder(inputs)
    every = (1 << (1 << inputs)) - 1
    literals, tables = [FALSE, TRUE], [0, every]
    for i in range(inputs):
        literals.append(builder.input(i))
        tables.append(sum(1 << x for x in range(1 << inputs) if x >> i & 1))
    for name, *places in operations:
        (a, b, c), (p, q, r) = ([row[k % len(row)] for k in places] for row in (literals, tables))
        if name == "and":
            found = builder.and_(a, b), p & q
        elif name == "or":
            found = builder.or_(a, b), p | q
        elif name == "xor":
            found = builder.xor(a, b), p ^ q
        elif name == "mux":
            found = builder.mux(a, b, c), p & q | ~p & every & r
        elif name == "majority":
            found = builder.majority(a, b, c), p & q | p & r | q & r
        else:
            found = a ^ 1, p ^ every
        literals.append(found[0])
        tables.append(found[1])
    return builder.build(literals), tables


@given(programs())
def test_the_builder_keeps_every_function(program: tuple[int, list[tuple[str, int, int, int]]]) -> None:
    network, tables = run(*program)
    inputs = program[0]
    rows = tabulate(network)
    assert [sum(int(bit) << x for x, bit in enumerate(unpack(row, inputs))) for row in rows] == tables
    for x in range(0, 1 << inputs, 5):
        bits = [x >> i & 1 for i in range(inputs)]
        assert evaluate(network, bits) == [table >> x & 1 for table in tables]


@given(programs())
def test_normal_form(program: tuple[int, list[tuple[str, int, int, int]]]) -> None:
    network, _ = run(*program)
    assert np.all(network.left < network.right)
    assert not np.any((network.left | network.right)[network.is_xor] & 1)
    own = 1 + network.inputs + np.arange(network.gates)
    assert np.all(network.right >> 1 < own)
    assert (
        len({(x, a, b) for x, a, b in zip(network.is_xor, network.left, network.right, strict=True)})
        == network.gates
    )
    assert network.used()[1 + network.inputs :].all()


@given(programs(), st.integers(0, 2**32 - 1))
def test_the_compiled_loops_agree(program: tuple[int, list[tuple[str, int, int, int]]], seed: int) -> None:
    network, _ = run(*program)
    draw = np.random.default_rng(seed)
    inputs = draw.integers(0, 1 << 64, (network.inputs, 3), dtype=np.uint64)
    expected = simulate(network, inputs)
    nodes = simulate_nodes(network, inputs)
    literals = [x.astype(np.uint32) for x in (network.left, network.right, network.outputs)]
    for loop in (network_kernels.run_nodes, network_kernels.run_nodes.py_func):
        values = np.zeros((network.nodes, 3), dtype=np.uint64)
        values[1 : 1 + network.inputs] = inputs
        with np.errstate(over="ignore"):
            loop(network.is_xor, literals[0], literals[1], values)
        assert np.array_equal(values, nodes)
    for loop in (network_kernels.run_blocks, network_kernels.run_blocks.py_func):
        result = np.empty((len(network.outputs), 3), dtype=np.uint64)
        with np.errstate(over="ignore"):
            loop(network.is_xor, *literals, inputs, np.zeros((network.nodes, 2), dtype=np.uint64), result)
        assert np.array_equal(result, expected)


def test_large_runs_take_the_compiled_loop(monkeypatch: pytest.MonkeyPatch) -> None:
    network, tables = run(6, [("majority", 3, 4, 5), ("xor", 7, 8, 0), ("mux", 2, 8, 9)])
    monkeypatch.setattr(network_simulation, "COMPILED", 1)
    words = tabulate(network)
    assert [int(row[0]) for row in words] == tables


@pytest.mark.parametrize("inputs", [1, 5, 6, 8])
def test_columns_count_up(inputs: int) -> None:
    words = max(1, (1 << inputs) // 64)
    columns = input_columns(inputs, 0, words)
    for x in range(1 << inputs):
        assert sum((int(columns[i, x >> 6]) >> (x & 63) & 1) << i for i in range(inputs)) == x


def test_gates_that_nothing_needs_go() -> None:
    builder = NetworkBuilder(3)
    a, b, c = (builder.input(i) for i in range(3))
    builder.and_(a, c)
    kept = builder.and_(a, b)
    network = builder.build([kept ^ 1])
    assert (network.ands, network.gates, network.inputs) == (1, 1, 3)
    assert evaluate(network, [1, 1, 0]) == [0]


def test_depth_counts_ands() -> None:
    builder = NetworkBuilder(3)
    a, b, c = (builder.input(i) for i in range(3))
    top = builder.and_(builder.xor(builder.and_(a, b), c), a)
    assert builder.build([top]).and_depth().tolist()[-1] == 2


def test_wrong_shapes_are_refused() -> None:
    builder = NetworkBuilder(2)
    network = builder.build([builder.input(1)])
    with pytest.raises(ValueError, match=r"uint64 of shape \(2, words\) wanted"):
        simulate(network, np.zeros((3, 1), dtype=np.uint64))
    with pytest.raises(ValueError, match="2 input bits wanted, not 1"):
        evaluate(network, [1])
    with pytest.raises(ValueError, match="input 2 of 2"):
        builder.input(2)
    with pytest.raises(ValueError, match="2 inputs wanted, not 1"):
        builder.copy(network, [FALSE])
