"""Proofs of equality: both ways, and what must not pass."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from revsynth.logic import equivalence
from revsynth.logic.and_reduction.cut_mapping import map_cuts
from revsynth.logic.equivalence import Proof, prove_equal
from revsynth.logic.network import Network, evaluate
from revsynth.logic.network_builder import NetworkBuilder
from revsynth.logic.network_simulation import tabulate
from tests import naive_networks as naive
from tests.logic.random_networks import networks, random_network


@given(networks, st.integers(0, 1 << 30), st.booleans(), st.booleans())
def test_both_ways_agree_with_the_tables(network: Network, seed: int, same: bool, with_care: bool) -> None:
    other = map_cuts(network) if same else random_network(seed, network.inputs, 20, len(network.outputs))
    care = random_network(seed + 1, network.inputs, 9, 1) if with_care else None
    differs = tabulate(network) ^ tabulate(other)
    if care is not None:
        differs &= tabulate(care)
    proofs = [prove_equal(network, other, care), equivalence._by_solver(network, other, care, 10_000)]
    for proof in proofs:
        assert proof.equal is not bool(differs.any())
        check_counterexample(proof, network, other, care)


def check_counterexample(proof: Proof, one: Network, other: Network, care: Network | None) -> None:
    assert (proof.counterexample is not None) == (proof.equal is False)
    if proof.counterexample is not None:
        assert evaluate(one, proof.counterexample) != evaluate(other, proof.counterexample)
        assert care is None or evaluate(care, proof.counterexample) == [1]


@pytest.mark.parametrize(
    "network",
    [naive.adder(64), naive.comparison(64), naive.weight(31), naive.majority(63), naive.product(11)],
)
def test_wide_networks_are_proved_and_faults_found(network: Network) -> None:
    mapped = map_cuts(network)
    assert prove_equal(network, mapped).equal
    for gate in (0, mapped.gates // 2, mapped.gates - 1):
        is_xor = mapped.is_xor.copy()
        is_xor[gate] ^= True
        left, right = mapped.left & -2, mapped.right & -2
        wrong = Network(
            mapped.inputs,
            is_xor,
            np.where(is_xor, left, mapped.left),
            np.where(is_xor, right, mapped.right),
            mapped.outputs,
        )
        proof = prove_equal(network, wrong)
        assert proof.equal is False
        check_counterexample(proof, network, wrong, None)


def test_one_input_of_2_to_the_40_is_found() -> None:
    b = NetworkBuilder(40)
    word = [b.input(i) for i in range(40)]
    rare = b.all_of(x ^ (0x5A5A5A5A5A >> i & 1) for i, x in enumerate(word))
    one, other = b.build([rare]), b.build([0])
    proof = prove_equal(one, other)
    assert proof.equal is False
    check_counterexample(proof, one, other, None)


def test_undecided_is_not_equal() -> None:
    # a * b against b * a: far beyond a handful of conflicts.
    b = NetworkBuilder(24)
    naive_builder = naive.NaiveBuilder(24)
    x, y = naive_builder.word(0, 12), naive_builder.word(12, 12)
    one = naive_builder.build(naive_builder.product(x, y)[12:13])
    other = b.build(b.copy(one, [2 * (1 + (i + 12) % 24) for i in range(24)]))
    assert prove_equal(one, other, conflicts=50).equal is None


def test_networks_of_different_shape_are_refused() -> None:
    with pytest.raises(ValueError, match="only the same numbers can be compared"):
        prove_equal(naive.adder(2), naive.adder(3))
    with pytest.raises(ValueError, match="care must have the same inputs and one output"):
        prove_equal(naive.adder(2), naive.adder(2), naive.adder(2))
