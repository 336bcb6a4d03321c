"""Published numbers of ANDs that specs must come down to, as the built circuit says."""

from __future__ import annotations

from itertools import combinations

import pytest
from hypothesis import given
from hypothesis import strategies as st

import revsynth
from revsynth.elaborate import elaborate
from revsynth.logic.affine_classes import and_count
from revsynth.logic.and_reduction import fewest_ands
from revsynth.spec.model import Spec

pytestmark = pytest.mark.quality


def ands(spec: Spec) -> int:
    """Of the spec's network, after reduction."""
    return fewest_ands(elaborate(spec).function.values).ands


def ands_built(spec: Spec) -> int:
    """Of the plan behind a verified file, onto outputs: in a phase oracle CZs are at no cost, and many."""
    built = revsynth.build(spec, oracle="bit", uncompute="measured", method="network")
    assert built.evidence.level in ("proved", "exhaustive")
    assert built.cost["ands"] is not None
    return built.cost["ands"]


def outputs(value: str, bits: int, **inputs: int) -> Spec:
    return revsynth.outputs({"f": {"value": value, "bits": bits}}, inputs=inputs)


@pytest.mark.parametrize("bits", [2, 3, 4, 5])
def test_a_decoder_shares_its_products(bits: int) -> None:
    """2^n - n - 1 products for 2^n minterms (counted by hand: one for every set of two inputs or more)."""
    assert ands_built(outputs("1 << a", 1 << bits, a=bits)) == 2**bits - bits - 1


@pytest.mark.parametrize("bits", [2, 5, 9, 24, 40])
def test_a_conjunction_takes_one_and_less_than_its_inputs(bits: int) -> None:
    """k - 1; never fewer, as its degree is k (Schnorr 1988)."""
    assert ands_built(revsynth.predicate(f"a == {2**bits - 1}", inputs={"a": bits})) == bits - 1


def test_a_full_adder_takes_one() -> None:
    """Common practice."""
    assert ands_built(outputs("a + b + c", 2, a=1, b=1, c=1)) == 1


@pytest.mark.parametrize(("bits", "most"), [(7, 4), (15, 11)])
def test_the_weight_of_a_word(bits: int, most: int) -> None:
    """Boyar, Peralta, Tight bounds for the multiplicative complexity, TCS 396, 2008."""
    assert ands_built(outputs("popcount(a)", bits.bit_length(), a=bits)) == most


@pytest.mark.parametrize("bits", [2, 3, 4, 6, 8])
def test_schoolbook_products(bits: int) -> None:
    """At most 2 n^2 - n (counted by hand)."""
    assert ands(outputs("a * b", 2 * bits, a=bits, b=bits)) <= 2 * bits * bits - bits


FOUR_BITS = {
    "a in [2, 3, 5, 7, 11, 13]": 2,
    "a in [0, 1, 4, 9]": 2,
    "a % 3 == 0": 2,
    "a % 5 == 0": 1,
    "popcount(a) >= 3": 3,
    "a[0] == a[3] and a[1] == a[2]": 1,
    "popcount(a) == 2": 2,
}


@pytest.mark.parametrize("where", FOUR_BITS)
def test_predicates_on_four_bits(where: str) -> None:
    """Recomputed by trying all affine images of the eight classes (Turan, Peralta, LightSec 2014)."""
    assert ands_built(revsynth.predicate(where, inputs={"a": 4})) == FOUR_BITS[where]


@given(st.integers(0, 2**32 - 1))
def test_at_least_the_degree_less_one(table: int) -> None:
    """C. P. Schnorr, The multiplicative complexity of Boolean functions, AAECC-6, 1988."""
    degree = 0
    for size in range(1, 6):
        for chosen in combinations(range(5), size):
            within = [x for x in range(32) if all(i in chosen for i in range(5) if x >> i & 1)]
            if sum(table >> x & 1 for x in within) % 2:
                degree = size
    assert max(degree - 1, 0) <= and_count(5, table) <= 4
