"""Every pass keeps the function; what the proofs are there for."""

from __future__ import annotations

import subprocess
import sys
from random import Random

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from revsynth.logic.and_reduction import resubstitution
from revsynth.logic.and_reduction.common_operands import merge_common_operands
from revsynth.logic.and_reduction.form_builder import FormBuilder
from revsynth.logic.and_reduction.loop import fewest_ands
from revsynth.logic.and_reduction.resubstitution import Work, resubstitute
from revsynth.logic.and_reduction.xor_sharing import share_xors
from revsynth.logic.equivalence import prove_equal
from revsynth.logic.network import Network, evaluate
from revsynth.logic.network_builder import NetworkBuilder
from revsynth.logic.network_simulation import tabulate
from tests import naive_networks
from tests.logic.random_networks import networks, random_network


def copied(network: Network) -> Network:
    builder = FormBuilder(network.inputs)
    return builder.build(builder.copy(network, [2 * i for i in range(1, network.inputs + 1)]))


@given(networks)
def test_passes_keep_the_function(network: Network) -> None:
    table = tabulate(network)
    for step in (copied, resubstitute, merge_common_operands, share_xors):
        after = step(network)
        assert np.array_equal(tabulate(after), table)
        assert after.ands <= network.ands


@given(networks, st.integers(0, 1 << 30), st.booleans())
def test_with_care_the_outputs_are_the_same_where_it_is_1(network: Network, seed: int, whole: bool) -> None:
    care = random_network(seed, network.inputs, 12, 1)
    mask = tabulate(care)
    if whole:
        after = fewest_ands(network, effort="low", care=care)
    else:
        after = resubstitute(network, care=care)
    assert not ((tabulate(after) ^ tabulate(network)) & mask).any()
    assert after.ands <= network.ands


def test_one_and_serves_a_whole_plane_of_products() -> None:
    b = FormBuilder(2)
    x, y = b.input(0), b.input(1)
    both = b.xor(x, y)
    for c in (0, 1):
        for d in (0, 1):
            b.and_(x ^ c, y ^ d)
            b.and_(x ^ c, both ^ d)
            b.and_(both ^ c, y ^ d)
    assert b.and_gates == 1


def test_products_of_a_product_and_its_operands_are_free() -> None:
    b = FormBuilder(2)
    x, y = b.input(0), b.input(1)
    product = b.and_(x, y)
    count = b.gates
    assert b.and_(x, product) == product
    assert b.and_(x, b.xor(product, y)) == b.known(0)
    assert b.and_(b.xor(x, y), product) == b.known(0)
    assert b.and_gates == 1
    assert b.gates <= count + 2


def test_majority_from_three_products_and_a_sum_of_all_pairs() -> None:
    b = NetworkBuilder(6)
    v = [b.input(i) for i in range(6)]
    pairs = b.build([b.parity([b.and_(v[i], v[j]) for i in range(6) for j in range(i)])])
    assert merge_common_operands(pairs).ands == 3
    b = NetworkBuilder(3)
    x, y, z = (b.input(i) for i in range(3))
    three = b.build([b.parity([b.and_(x, y), b.and_(x, z), b.and_(y, z)])])
    assert merge_common_operands(merge_common_operands(three)).ands == 1


def test_only_sums_that_are_read_count_among_products_with_a_common_operand() -> None:
    # c (x0 + x1), c (x1 + x2), c (x2 + x0): the third is the sum of the others.
    b = NetworkBuilder(4)
    x, c = [b.input(i) for i in range(3)], b.input(3)
    network = b.build([b.and_(c, b.xor(x[i], x[(i + 1) % 3])) for i in range(3)])
    assert network.ands == 3
    assert merge_common_operands(network).ands == 2
    # Of c x0, c x1, c x2 only the sum is read.
    network = b.build([b.parity([b.and_(c, b.xor(v, x[0])) for v in x[1:]])])
    assert merge_common_operands(network).ands == 1


def rare_condition(bits: int) -> Network:
    """a < b or a == b: at random inputs the equality is never seen."""
    b = NetworkBuilder(2 * bits)
    one, other = [b.input(i) for i in range(bits)], [b.input(bits + i) for i in range(bits)]
    less = 0
    same = 1
    for x, y in zip(one, other, strict=True):
        less = b.mux(b.xor(x, y), y, less)
        same = b.and_(same, b.xor(x, y) ^ 1)
    return b.build([b.or_(less, same), same])


def test_a_rare_condition_survives() -> None:
    network = rare_condition(24)
    for after in (resubstitute(network), fewest_ands(network, effort="low")):
        assert prove_equal(after, network).equal
        for value in (0, 1, 0xABCDEF, 0xFFFFFF):
            word = [value >> i & 1 for i in range(24)]
            assert evaluate(after, word + word) == [1, 1]


def test_random_samples_alone_would_have_accepted_the_wrong_rewrite() -> None:
    # What the proofs protect from: the sampled values propose sums that do not hold.
    network = copied(rare_condition(24))
    random = Random(0)
    values = resubstitution.node_rows(network, [random.getrandbits(1024) for _ in range(48)], 1024)
    proposed = resubstitution._dependent(network, values, (1 << 1024) - 1)
    assert proposed
    wrong = resubstitution._without(network, proposed)
    assert prove_equal(wrong, network).equal is False


def test_what_the_solver_cannot_decide_stays() -> None:
    network = rare_condition(24)
    after = resubstitute(network, work=Work(conflicts=1, proofs=3))
    assert prove_equal(after, network).equal


@pytest.mark.parametrize("outputs", [[0], [1], [2], [3], [0, 1, 2]])
def test_constant_and_plain_outputs(outputs: list[int]) -> None:
    network = NetworkBuilder(1).build(outputs)
    assert np.array_equal(tabulate(fewest_ands(network)), tabulate(network))


def test_the_same_every_time() -> None:
    network = naive_networks.product(6)
    assert fewest_ands(network) == fewest_ands(network)


def test_wrong_arguments_are_named() -> None:
    network = naive_networks.adder(2)
    with pytest.raises(ValueError, match="effort 'most': one of low, normal, high"):
        fewest_ands(network, effort="most")
    with pytest.raises(ValueError, match="care must have the inputs of the network and one output"):
        fewest_ands(network, care=network)


def test_small_networks_wait_for_neither_compiler_nor_solver() -> None:
    script = (
        "import sys; from revsynth.logic.and_reduction import fewest_ands; "
        "from revsynth.logic.network_builder import NetworkBuilder; b = NetworkBuilder(8); "
        "x = [b.input(i) for i in range(8)]; row = [i * i % 7 & 1 for i in range(256)]\n"
        "for bit in x: row = [b.mux(bit, row[i + 1], row[i]) for i in range(0, len(row), 2)]\n"
        "after = fewest_ands(b.build(row)); sys.exit(len({'numba', 'pysat', 'pyeda'} & set(sys.modules)))"
    )
    assert subprocess.run([sys.executable, "-c", script], check=False).returncode == 0


def test_an_and_is_not_saved_for_thousands_of_xors() -> None:
    network = naive_networks.product(10)
    after = fewest_ands(network)
    assert after.ands <= 190
    assert after.xors <= 2 * after.ands
