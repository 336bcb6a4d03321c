"""Networks of netlists against the netlists' own tables and reference evaluation."""

from __future__ import annotations

from random import Random

import pytest
from hypothesis import given
from hypothesis import strategies as st

from revsynth.elaborate.netlists import netlist_network
from revsynth.logic.network import evaluate
from revsynth.logic.network_simulation import tabulate
from revsynth.spec.blif import parse_blif
from revsynth.spec.model import Permutation
from revsynth.spec.netlist import Netlist, NetlistGate
from revsynth.spec.netlist_columns import netlist_columns
from revsynth.spec.netlist_reference import netlist_values


def random_netlist(rng: Random, inputs: int, size: int) -> Netlist:
    """Gates of all kinds, covers of up to nine operands, repeated and complemented operands, constants."""
    gates: list[NetlistGate] = []
    for place in range(size):
        most = 2 * (inputs + place) + 1
        kind = rng.choice(("and", "or", "xor", "cover"))
        operands = tuple(rng.randint(0, most) for _ in range(rng.randint(0, 9 if kind == "cover" else 4)))
        rows = ["".join(rng.choice("01--") for _ in operands) for _ in range(rng.randint(0, 5))]
        gates.append(NetlistGate(kind, operands, tuple(rows) if kind == "cover" else ()))
    outputs = tuple(rng.randint(0, 2 * (inputs + size) + 1) for _ in range(rng.randint(1, 4)))
    return Netlist(inputs, tuple(gates), outputs)


@given(st.integers(1, 7), st.integers(0, 10), st.integers(0, 2**32))
def test_a_network_is_its_netlist(inputs: int, size: int, seed: int) -> None:
    netlist = random_netlist(Random(seed), inputs, size)
    network = netlist_network(netlist)
    assert network.inputs == inputs
    assert tabulate(network).tolist() == netlist_columns(netlist).tolist()
    for x in (0, (1 << inputs) - 1, seed % (1 << inputs)):
        bits = [x >> place & 1 for place in range(inputs)]
        assert tuple(evaluate(network, bits)) == netlist_values(netlist, [x])[0]


@pytest.mark.parametrize(
    ("rows", "ands"), [("10 1\n01 1", 0), ("11 1", 1), ("00 0", 1), ("11 0\n00 0", 0), ("1- 1", 0)]
)
def test_covers_cost_what_their_function_costs(rows: str, ands: int) -> None:
    spec = parse_blif(f".inputs a b\n.outputs f\n.names a b f\n{rows}\n.end\n")
    assert not isinstance(spec.body, Permutation)
    assert spec.body.netlist is not None
    assert netlist_network(spec.body.netlist).ands == ands


def test_a_carry_is_one_and_and_a_wide_sum_none() -> None:
    rows = "\n".join(f"{x:05b} 1" for x in range(32) if x.bit_count() % 2)
    text = (
        f".inputs a b c d e\n.outputs s m\n.names a b c d e s\n{rows}\n.names a b c m\n11- 1\n1-1 1\n-11 1\n"
    )
    spec = parse_blif(text)
    assert not isinstance(spec.body, Permutation)
    assert spec.body.netlist is not None
    assert netlist_network(spec.body.netlist).ands == 1
