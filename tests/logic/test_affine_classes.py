"""Affine classes of functions of at most five inputs: counts against the published ones, circuits run."""

from __future__ import annotations

from collections import Counter
from collections.abc import Callable

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from revsynth.logic.affine_classes import and_count, and_counts, chain_of, circuit, class_keys, classes
from revsynth.logic.network import Network, evaluate
from revsynth.logic.normal_form import algebraic_normal_form

# Turan, Peralta, LightSec 2014 (recomputed by the slow test below): functions by fewest ANDs.
FOUR_INPUTS = {0: 32, 1: 1120, 2: 31616, 3: 32768}
FIVE_INPUTS = {0: 64, 1: 9920, 2: 1801472, 3: 777759744, 4: 3515396096}


def table_of(network: Network, inputs: int) -> int:
    return sum(evaluate(network, [x >> i & 1 for i in range(inputs)])[0] << x for x in range(1 << inputs))


def test_all_functions_of_four_inputs() -> None:
    counts = Counter(and_counts(4, np.arange(1 << 16, dtype=np.uint32)).tolist())
    assert counts == FOUR_INPUTS


def test_the_classes_add_up_to_all_functions_of_five_inputs() -> None:
    by_count: Counter[int] = Counter()
    functions: Counter[int] = Counter()
    for found in classes().values():
        ands = len(found.chain.products)
        by_count[ands] += 1
        functions[ands] += 64 * found.orbit
    assert by_count == {0: 1, 1: 1, 2: 3, 3: 17, 4: 26}  # Turan, Peralta, LightSec 2014
    assert functions == FIVE_INPUTS


def test_each_class_key_is_the_key_of_its_circuit() -> None:
    tables = np.array([c.chain.tables()[0] for c in classes().values()], dtype=np.uint32)
    assert class_keys(tables).tolist() == list(classes())
    assert len(classes()) == 48


@given(st.integers(0, 5).flatmap(lambda n: st.tuples(st.just(n), st.integers(0, (1 << (1 << n)) - 1))))
def test_a_circuit_computes_its_function_with_the_fewest_ands(case: tuple[int, int]) -> None:
    inputs, table = case
    network = circuit(inputs, table)
    assert network.inputs == inputs
    assert table_of(network, inputs) == table
    assert network.ands == and_count(inputs, table)


@pytest.mark.parametrize("key", sorted(classes()))
def test_members_of_every_class_get_circuits(key: int) -> None:
    standard = classes()[key].chain.tables()[0]
    images = [3, 0, 4, 1, 2]
    moved = 0
    for x in range(32):
        y = sum((x >> images[i] & 1) << i for i in range(5)) ^ (x >> 1 & 8) ^ 5
        moved |= ((standard >> y ^ x >> 2 ^ 1) & 1) << x
    network = circuit(5, moved)
    assert table_of(network, 5) == moved
    assert network.ands == len(classes()[key].chain.products)


def test_predicates_on_four_bits() -> None:
    """Fewest ANDs, recomputed by exhaustive search over all chains of products."""

    def table(holds: Callable[[int], bool]) -> int:
        return sum(int(holds(x)) << x for x in range(16))

    assert and_count(4, table(lambda x: x in (2, 3, 5, 7, 11, 13))) == 2
    assert and_count(4, table(lambda x: x in (0, 1, 4, 9))) == 2
    assert and_count(4, table(lambda x: x % 3 == 0)) == 2
    assert and_count(4, table(lambda x: x % 5 == 0)) == 1
    assert and_count(4, table(lambda x: x.bit_count() >= 3)) == 3
    assert and_count(4, table(lambda x: x.bit_count() == 2)) == 2


def test_small_functions_keep_their_plain_circuit() -> None:
    assert chain_of(2, 0b1000).products == ((2, 4),)
    assert chain_of(3, 0b11101000).weight <= 7  # majority: (a + b)(a + c) + a


def test_variants_are_circuits_too() -> None:
    for variant in range(4):
        chain = chain_of(5, 0x1357F02C, variant)
        assert chain.tables() == [0x1357F02C]
        assert len(chain.products) == and_count(5, 0x1357F02C)


@pytest.mark.parametrize(
    ("inputs", "table", "message"),
    [(6, 0, "up to 5 inputs, not 6"), (2, 16, "a table of 2 inputs has 4 bits"), (3, -1, "does not fit")],
)
def test_bad_arguments(inputs: int, table: int, message: str) -> None:
    for function in (and_count, chain_of, circuit):
        with pytest.raises(ValueError, match=message):
            function(inputs, table)


def test_bad_arrays() -> None:
    with pytest.raises(ValueError, match="uint32"):
        and_counts(4, np.zeros(3, dtype=np.int64))
    with pytest.raises(ValueError, match="at most 5 inputs"):
        and_counts(6, np.zeros(3, dtype=np.uint32))


@pytest.mark.slow
def test_the_search_finds_the_same_classes_and_no_shorter_circuits() -> None:
    """All 2^26 normal forms: the key separates the classes, and every chain of three products is tried."""
    from revsynth.logic import affine_class_search as search
    from revsynth.logic.affine_class_kernels import unpacked

    found = search.find_classes()
    assert len(found.sizes) == 48
    known = {key: (c.orbit, len(c.chain.products)) for key, c in classes().items()}
    chains = search.find_chains(found)
    keys = class_keys(np.array([chain.tables()[0] for chain in chains], dtype=np.uint32)).tolist()
    sizes = found.sizes.tolist()
    assert {k: (s, len(c.products)) for k, s, c in zip(keys, sizes, chains, strict=True)} == known
    rng = np.random.default_rng(1)
    states = rng.integers(0, 1 << 26, size=1 << 20)
    forms = np.array([unpacked(int(s)) for s in states], dtype=np.uint32)
    tables = algebraic_normal_form(forms.astype(np.uint64)[:, None], 5)[:, 0].astype(np.uint32)
    assert np.array_equal(class_keys(tables), np.array(keys)[found.labels[states].astype(np.int64) - 1])
