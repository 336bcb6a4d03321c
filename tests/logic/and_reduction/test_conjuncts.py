"""Conjunct propagation: what terms learn from each other, and that the product stays the same."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from revsynth.logic.and_reduction import fewest_ands
from revsynth.logic.and_reduction.conjuncts import Equations, Gates, propagate_conjuncts
from revsynth.logic.and_reduction.form_builder import FormBuilder
from revsynth.logic.equivalence import prove_equal
from revsynth.logic.network import Network
from revsynth.logic.network_builder import NetworkBuilder
from revsynth.logic.network_simulation import tabulate
from tests import naive_networks as naive
from tests.logic.random_networks import networks, random_network


@given(networks, st.integers(2, 5), st.booleans())
def test_conjunctions_stay_the_same(network: Network, terms: int, complement: bool) -> None:
    builder = NetworkBuilder(network.inputs)
    values = builder.copy(network, [2 * i for i in range(1, network.inputs + 1)])
    root = builder.all_of([*values, *(2 * i for i in range(1, min(terms, network.inputs) + 1))])
    whole = builder.build([root ^ complement, *values])
    assert np.array_equal(tabulate(propagate_conjuncts(whole)), tabulate(whole))


@given(networks, st.integers(0, 1 << 30))
def test_a_care_network_is_assumed(network: Network, seed: int) -> None:
    care = random_network(seed, network.inputs, 10, 1)
    after = propagate_conjuncts(network, care)
    assert not ((tabulate(after) ^ tabulate(network)) & tabulate(care)).any()


def test_a_literal_becomes_a_constant_in_the_other_terms() -> None:
    b = NetworkBuilder(4)
    x, y, z, w = (b.input(i) for i in range(4))
    network = b.build([b.and_(x, b.xor(b.and_(b.xor(x, y), z), w))])
    assert propagate_conjuncts(network).ands == 2
    # Where x is 1, (x + y) z + w = (1 + y) z + w, and a mux on x is one of its branches.
    network = b.build([b.and_(x, b.mux(x, y, b.and_(z, w)))])
    assert propagate_conjuncts(network).ands == 1


def test_an_xor_ties_two_variables() -> None:
    b = NetworkBuilder(3)
    x, y, z = (b.input(i) for i in range(3))
    # x == y and x y + z: two ANDs, not three.
    network = b.build([b.and_(b.xor(x, y) ^ 1, b.xor(b.and_(x, y), z))])
    assert propagate_conjuncts(network).ands == 1


def test_a_term_that_follows_from_the_others_goes_and_a_contradiction_is_0() -> None:
    b = NetworkBuilder(3)
    x, y, z = (b.input(i) for i in range(3))
    three = [b.xor(x, y), b.xor(y, z), b.xor(x, z) ^ 1]
    assert propagate_conjuncts(b.build([b.all_of(three)])).ands == 1
    three[2] ^= 1
    nothing = propagate_conjuncts(b.build([b.all_of(three)]))
    assert nothing.outputs.tolist() == [0]


def test_care_that_is_never_met_leaves_nothing_to_do() -> None:
    b = NetworkBuilder(2)
    x, y = b.input(0), b.input(1)
    network = b.build([b.and_(x, y)])
    assert propagate_conjuncts(network, b.build([0])).ands == 0
    assert propagate_conjuncts(network, b.build([1])).ands == 1
    assert propagate_conjuncts(network, b.build([b.xor(x, y)])).ands == 0
    assert propagate_conjuncts(network, b.build([x])).ands == 0


def test_terms_of_a_tree_read_elsewhere_stay_whole() -> None:
    b = NetworkBuilder(4)
    v = [b.input(i) for i in range(4)]
    shared = b.and_(v[0], v[1])
    root = b.and_(b.and_(v[2], v[3]), shared)
    network = b.build([root, shared])
    literal = int(network.outputs[0])
    assert Gates(network).conjunction(literal) == [v[2], v[3], int(network.outputs[1])]


def test_equations_reduce_to_one_form() -> None:
    builder = FormBuilder(4)
    equations = Equations(builder)
    x0, x1, x2, x3 = (builder.input(i) for i in range(4))
    assert equations.assume(builder.xor(x0, x1)) is None
    assert equations.assume(builder.parity([x1, x2, x3])) is None
    assert equations.assume(builder.parity([x0, x2, x3]) ^ 1) is True
    assert equations.assume(builder.parity([x0, x2, x3])) is False
    assert equations.reduced(x1) == equations.reduced(x0) ^ 1


@pytest.mark.quality
@pytest.mark.parametrize("value", [2863311530, 0, 12345, 2**32 - 1])
def test_sum_equals_constant(value: int) -> None:
    # 2 n - 2 from the plain ripple form; assuming that the terms below hold saves one more and all depth.
    network = naive.sum_equals(32, value)
    after = fewest_ands(network)
    assert after.ands <= 61
    assert after.and_depth().max() <= 10
    assert after.xors <= 66
    assert prove_equal(after, network).equal


@pytest.mark.quality
def test_product_equals_constant() -> None:
    network = naive.product_equals(8, 58483)
    structural = fewest_ands(network, by_values=False)
    assert structural.ands <= 103
    assert prove_equal(structural, network).equal
    assert fewest_ands(network).ands <= 103


@pytest.mark.quality
def test_an_odd_product_has_odd_factors() -> None:
    network = naive.product_equals(6, 35 * 37)
    after = propagate_conjuncts(fewest_ands(network, effort="low", by_values=False))
    literal = int(after.outputs[0])
    lowest = {2 * 1, 2 * 7}
    assert lowest <= set(Gates(after).conjunction(literal))
    others = [term for term in Gates(after).conjunction(literal) if term not in lowest]
    builder = NetworkBuilder(after.inputs)
    here, _ = builder.copy_nodes(after, [2 * i for i in range(1, after.inputs + 1)])
    rest = builder.build([here[term >> 1] ^ (term & 1) for term in others])
    assert not rest.used()[[1, 7]].any()
