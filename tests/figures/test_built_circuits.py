"""The figures for whole circuits, from the spec to the verified file; they may fall, never rise.

All with scratch erased by measurement, 4 T an AND (Meuli, Soeken, Campbell, Roetteler, De Micheli, The role
of multiplicative complexity in compiling low T-count oracle circuits, ICCAD 2019).
"""

from __future__ import annotations

from typing import Any

import pytest

import revsynth
from revsynth.api import Build
from revsynth.spec.bristol import parse_bristol
from revsynth.spec.dimacs import parse_dimacs
from revsynth.spec.model import Spec
from tests.bristol_text import bristol_text
from tests.naive_networks import aes_sbox, sorting_network
from tests.planted import dimacs, planted

pytestmark = pytest.mark.quality


def built(spec: Spec, **options: Any) -> Build:
    """A verified build of networks with measured erasure."""
    found = revsynth.build(spec, uncompute="measured", method="network", **options)
    assert found.evidence.level in ("proved", "exhaustive")
    return found


def counts(found: Build) -> dict[str, int]:
    return {name: value for name, value in found.cost.items() if value is not None}


def sum_equals() -> Spec:
    return revsynth.predicate("(a + b) % 2**32 == 2863311530", inputs={"a": 32, "b": 32})


def product_equals() -> Spec:
    return revsynth.predicate("a * b == 58483", inputs={"a": 8, "b": 8})


def clauses(seed: int) -> Spec:
    return parse_dimacs(dimacs(20, planted(20, 91, seed)[0]), "planted.cnf")


def test_a_sum_of_32_bits_compared_with_a_constant() -> None:
    """62 ANDs, 244 T, 125 qubits and 126 CNOTs were to be reached; the first carry is free, so 61."""
    found = counts(built(sum_equals(), qubits=125))
    assert found["qubits"] <= 124
    assert found["ands"] <= 61
    assert found["t"] <= 240


def test_the_same_sum_at_toffoli_level() -> None:
    found = counts(built(sum_equals(), qubits=125, gates="toffoli"))
    assert found["qubits"] <= 124
    assert found["toffoli"] <= 60
    assert found["cx"] <= 126
    assert found["t"] == 0


def test_the_same_sum_on_86_qubits() -> None:
    found = counts(built(sum_equals(), qubits=86))
    assert found["qubits"] <= 86
    assert found["t"] <= 392


@pytest.mark.parametrize(("qubits", "t"), [(150, 280), (117, 280), (84, 288)])
def test_a_product_of_bytes_compared_with_a_constant(qubits: int, t: int) -> None:
    """536, 672 and 804 T were to be reached."""
    found = built(product_equals(), qubits=qubits)
    assert found.counts["marked"] == 2  # 58483 = 233 * 251, both prime
    assert counts(found)["qubits"] <= qubits
    assert counts(found)["t"] <= t
    assert counts(found)["ands"] <= (t + 4) // 4


@pytest.mark.parametrize(("seed", "qubits", "t"), [(1, 152, 416), (1, 53, 700), (2, 152, 396), (2, 53, 660)])
def test_planted_clauses(seed: int, qubits: int, t: int) -> None:
    """528 T on 152 qubits and 932 T on 53 were to be reached."""
    found = built(clauses(seed), qubits=qubits)
    assert counts(found)["qubits"] <= qubits
    assert counts(found)["t"] <= t


@pytest.mark.parametrize("spec", [product_equals(), clauses(1)], ids=["product", "clauses"])
def test_the_best_of_all_methods_is_no_worse_than_networks(spec: Spec) -> None:
    """These two mark so few inputs that exclusive sums win."""
    best = revsynth.build(spec, uncompute="measured", qubits=150)
    assert best.cost["t"] is not None
    assert best.cost["t"] <= 132


@pytest.mark.parametrize(("bits", "qubits"), [(64, 193), (128, 385)])
def test_sums_with_carry_onto_fresh_outputs(bits: int, qubits: int) -> None:
    """One AND a bit, none erased, no scratch."""
    spec = revsynth.outputs({"total": {"value": "a + b", "bits": bits + 1}}, inputs={"a": bits, "b": bits})
    found = counts(built(spec, oracle="fresh"))
    assert (found["ands"], found["t"], found["qubits"]) == (bits, 4 * bits, qubits)
    assert found["measured"] == 0


def test_less_than_on_64_bits() -> None:
    found = counts(built(revsynth.predicate("a < b", inputs={"a": 64, "b": 64})))
    assert (found["ands"], found["t"]) == (64, 4 * 63)


def test_the_aes_substitution_from_its_bare_table() -> None:
    """32 ANDs (FIPS 197; the best known count), as if its structure had been given."""
    spec = revsynth.outputs({"y": {"table": aes_sbox(), "bits": 8}}, inputs={"x": 8})
    found = counts(built(spec, oracle="fresh"))
    assert found["ands"] <= 32
    assert found["t"] <= 128
    assert found["qubits"] <= 31


def test_the_majority_of_63() -> None:
    """57 ANDs (Boyar, Peralta, TCS 396, 2008), the last a CZ."""
    found = counts(built(revsynth.predicate("popcount(x) >= 32", inputs={"x": 63})))
    assert (found["ands"], found["t"]) == (57, 4 * 56)
    assert found["qubits"] <= 119


@pytest.mark.parametrize(
    ("value", "bits", "inputs", "ands", "qubits"),
    [
        ("popcount(x)", 5, {"x": 31}, 26, 58),
        ("a * b", 32, {"a": 16, "b": 16}, 496, 528),
        ("((x << r) | (x >> (16 - r))) & 65535", 16, {"x": 16, "r": 4}, 49, 74),
    ],
    ids=["weight of 31", "16 x 16 product", "16-bit rotator"],
)
def test_words_onto_fresh_outputs(
    value: str, bits: int, inputs: dict[str, int], ands: int, qubits: int
) -> None:
    spec = revsynth.outputs({"f": {"value": value, "bits": bits}}, inputs=inputs)
    found = counts(built(spec, oracle="fresh"))
    assert found["ands"] <= ands
    assert found["t"] <= 4 * ands
    assert found["qubits"] <= qubits


def test_a_sorting_network_from_a_netlist() -> None:
    """16 wires, odd-even (K. Batcher, 1968), every comparator written with two ANDs: 126, half of them go."""
    spec = parse_bristol(bristol_text(sorting_network(16), [16]), "sorter.bristol")
    found = counts(built(spec, oracle="bit"))
    assert found["ands"] <= 63
    assert found["t"] <= 4 * 63
