"""Public netlists and CNFs (see tests/public_data.py), read, compiled, and held against what is known."""

from __future__ import annotations

from collections.abc import Callable
from random import Random

import numpy as np
import pytest

from revsynth.elaborate.clauses import clause_networks, free_inputs
from revsynth.elaborate.netlists import netlist_network
from revsynth.logic.network import Network, evaluate
from revsynth.logic.network_simulation import simulate, tabulate
from revsynth.logic.truth_table import count_ones
from revsynth.spec.aiger import parse_aiger
from revsynth.spec.bench import parse_bench
from revsynth.spec.blif import parse_blif
from revsynth.spec.bristol import parse_bristol
from revsynth.spec.dimacs import parse_dimacs
from revsynth.spec.model import Clauses, Permutation, Predicate, Spec
from revsynth.spec.netlist import Netlist
from revsynth.spec.netlist_reference import netlist_values
from tests.public_data import ISCAS, cnf_instances, iscas_netlists
from tests.spec import public_netlists
from tests.spec.public_netlists import Gates, read_verilog

pytestmark = [pytest.mark.slow, pytest.mark.public]

WRITERS: dict[str, tuple[Callable[[Gates], str | bytes], Callable[..., Spec]]] = {
    "bench": (public_netlists.bench, parse_bench),
    "blif": (public_netlists.blif, parse_blif),
    "aag": (public_netlists.aag, parse_aiger),
    "aig": (public_netlists.aig, parse_aiger),
    "bristol": (public_netlists.bristol, parse_bristol),
}
# inputs and outputs: Brglez, Fujiwara, ISCAS 1985, table 1 (from memory)
PORTS = {
    "c17": (5, 2), "c432": (36, 7), "c499": (41, 32), "c880": (60, 26), "c1355": (41, 32), "c1908": (33, 25),
    "c3540": (50, 22), "c5315": (178, 123), "c6288": (32, 32),
}  # fmt: skip
LANES = 256


def netlist_of(spec: Spec) -> Netlist:
    assert not isinstance(spec.body, Permutation)
    assert spec.body.netlist is not None
    return spec.body.netlist


def outputs_of(network: Network, inputs: list[int]) -> list[int]:
    """The outputs of a network, each an integer of one bit a lane, from inputs of the same form."""
    words = np.array(
        [[value >> 64 * w & (1 << 64) - 1 for w in range(LANES // 64)] for value in inputs], np.uint64
    )
    return [sum(int(word) << 64 * w for w, word in enumerate(row)) for row in simulate(network, words)]


@pytest.mark.parametrize("name", ISCAS)
def test_iscas_netlists_in_every_format(name: str) -> None:
    gates = read_verilog(iscas_netlists()[name])
    assert (len(gates.inputs), len(gates.outputs)) == PORTS.get(name, (len(gates.inputs), len(gates.outputs)))
    rng = Random(name)
    inputs = [rng.getrandbits(LANES) for _ in gates.inputs]
    everywhere = (1 << LANES) - 1
    wanted = public_netlists.evaluate(gates, dict(zip(gates.inputs, inputs, strict=True)), everywhere)
    indices = [
        sum((value >> lane & 1) << place for place, value in enumerate(inputs)) for lane in range(LANES)
    ]
    for kind, (write, parse) in WRITERS.items():
        spec = parse(write(gates), name)
        assert spec.input_bits == len(gates.inputs)
        netlist = netlist_of(spec)
        values = netlist_values(netlist, indices)
        for place, value in enumerate(wanted):
            assert sum(bits[place] << lane for lane, bits in enumerate(values)) == value, (kind, place)
        assert outputs_of(netlist_network(netlist), inputs) == wanted, kind


def test_c6288_is_a_multiplier() -> None:
    # Hansen, Yalcin, Hayes, "Unveiling the ISCAS-85 benchmarks", IEEE Design & Test 16(3), 1999 (from memory)
    # a 16 x 16 multiplier. The first 16 inputs are one factor, the lowest bit first; of the outputs the last,
    # N6288, is bit 30 of the product, and the one before it, N6287, bit 31.
    gates = read_verilog(iscas_netlists()["c6288"])
    netlist = netlist_of(parse_bench(public_netlists.bench(gates), "c6288"))
    rng = Random(1)
    pairs = [(rng.getrandbits(16), rng.getrandbits(16)) for _ in range(500)]
    pairs += [(0, 0), (65535, 65535), (1, 65535), (32768, 32768)]
    for (a, b), bits in zip(pairs, netlist_values(netlist, [a | b << 16 for a, b in pairs]), strict=True):
        in_order = (*bits[:30], bits[31], bits[30])
        assert sum(bit << place for place, bit in enumerate(in_order)) == a * b


def clauses_of(name: str) -> tuple[Clauses, str]:
    text = cnf_instances()[name].decode()
    spec = parse_dimacs(text, name)
    assert isinstance(spec.body, Predicate)
    assert spec.body.clauses is not None
    return spec.body.clauses, text


def model_of(name: str, variables: int) -> list[int]:
    """The model of a solution file, bits by variable."""
    literals = [
        int(token)
        for line in cnf_instances()[name].decode().splitlines()
        if line[:1] == "v"
        for token in line[1:].split()
    ]
    true = set(literals)
    return [int(variable in true) for variable in range(1, variables + 1)]


# by name: how many free variables may stay (12 free of 329 was the figure to reach for prime121)
SATISFIABLE = {
    "prime9": 1, "prime25": 3, "prime49": 4, "prime121": 5, "prime169": 6, "prime289": 7,
    "prime361": 7, "prime529": 8, "prime841": 8, "prime961": 8, "prime1369": 9, "prime1681": 9,
    "prime1849": 9, "prime2209": 10, "sqrt2809": 8, "sqrt3481": 7, "sqrt4489": 13, "sqrt9409": 14,
    "sqrt10201": 10, "sqrt63001": 7, "sqrt1042441": 6,
}  # fmt: skip


@pytest.mark.parametrize("name", SATISFIABLE)
def test_factors_and_roots_have_the_model_that_is_published(name: str) -> None:
    clauses, text = clauses_of(f"{name}.cnf")
    networks = clause_networks(clauses, "low")
    found = free_inputs(clauses, "low")
    assert len(found.variables) <= SATISFIABLE[name]
    assert count_ones(tabulate(found.function.values)[0]) >= 1
    if f"{name}.sol" not in cnf_instances():
        return
    model = model_of(f"{name}.sol", clauses.variables)
    for kind, network in networks:
        assert evaluate(network, model) == [1], kind
    assert evaluate(found.function.values, [model[v - 1] for v in found.variables]) == [1]
    if name.startswith("prime"):
        bits = dict.fromkeys("xy", 0)
        for line in text.splitlines():
            if line.startswith("c ") and "@" in line:
                variable, _, bit = line[2:].split()
                bits[bit[0]] |= model[int(variable) - 1] << int(bit[2:])
        assert bits["x"] * bits["y"] == int(name[5:])


@pytest.mark.parametrize(("name", "bits"), [("add4", 4), ("add8", 8)])
def test_two_adders_never_differ(name: str, bits: int) -> None:
    clauses, _ = clauses_of(f"{name}.cnf")
    found = free_inputs(clauses, "low")
    assert len(found.variables) == 2 * bits
    assert count_ones(tabulate(found.function.values)[0]) == 0


@pytest.mark.parametrize(("name", "bits"), [("add16", 16), ("add32", 32), ("add64", 64)])
def test_wide_adders_keep_their_two_words(name: str, bits: int) -> None:
    clauses, _ = clauses_of(f"{name}.cnf")
    assert len(free_inputs(clauses, "low").variables) <= 2 * bits
