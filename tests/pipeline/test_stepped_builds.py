"""Blocks by steps through the whole pipeline: gate sets, ways to erase, budgets, and the Python API."""

from __future__ import annotations

from typing import Any

import pytest

import revsynth
from revsynth.errors import BudgetError, UsageError

INPUTS = {"x": 4, "y": 3}
STEPS = ["x += 3 * y + 1", "if y > 4: x ^= x >> 1", "x *= 5", "x = rotate(x, y)", "x[0:3], y = y, x[0:3]"]


@pytest.mark.parametrize("gates", ["clifford+t", "toffoli", "cascade"])
@pytest.mark.parametrize("uncompute", ["unitary", "measured"])
def test_every_gate_set_and_way_to_erase(gates: Any, uncompute: Any) -> None:
    spec = revsynth.permutation(steps=STEPS, inputs=INPUTS)
    build = revsynth.build(spec, gates=gates, uncompute=uncompute, method="network", effort="low")
    assert build.evidence.level == "exhaustive"
    assert build.method == "network"
    assert build.variant.startswith("in steps")
    assert revsynth.verify(spec, text=build.text()).holds


def test_measured_erasure_takes_four_t_an_and() -> None:
    build = revsynth.build(
        revsynth.permutation(steps=["x += y"], inputs={"x": 8, "y": 8}),
        uncompute="measured",
        method="network",
    )
    assert build.cost["t"] == 4 * 7
    assert build.cost["ands"] == 7


def test_a_budget_of_qubits_leads_to_the_carries_in_the_addend() -> None:
    spec = revsynth.permutation(steps=["x += y"], inputs={"x": 8, "y": 8})
    build = revsynth.build(spec, qubits=17, method="network")
    assert build.cost["qubits"] == 17
    assert build.variant == "in steps on few lines"
    assert revsynth.build(spec, aim="qubits", method="network").cost["qubits"] == 17
    with pytest.raises(BudgetError, match="the steps need 17 lines"):
        revsynth.build(spec, qubits=16, method="network")


def test_small_steps_may_be_built_from_their_table_too() -> None:
    spec = revsynth.permutation(steps=["x += 1"], inputs={"x": 3})
    for method in ("transform", "auto", "network"):
        assert revsynth.build(spec, method=method).evidence.level == "exhaustive"


def test_steps_take_a_domain_constants_and_signed_words() -> None:
    spec = revsynth.permutation(
        steps=["x += table[k]", "if x > limit: k ^= 1"],
        inputs={"x": {"bits": 4, "signed": True}, "k": 2},
        constants={"table": [1, -2, 3], "limit": 2},
        domain="k < 3",
    )
    build = revsynth.build(spec, method="network")
    assert build.evidence.level == "exhaustive"
    assert build.counts["domain"] == 48


def test_a_permutation_has_exactly_one_way_to_be_given() -> None:
    for words in ({}, {"steps": ["x += 1"], "map": {"x": "x"}}, {"values": [0, 1], "steps": ["x += 1"]}):
        with pytest.raises(UsageError, match="give exactly one of values, map= and steps="):
            revsynth.permutation(inputs={"x": 1}, **words)


@pytest.mark.slow
def test_a_product_modulo_a_prime_of_eleven_bits() -> None:
    spec = revsynth.permutation(map={"a": "(a * 1234 + 99) % 2039"}, inputs={"a": 11}, domain="a < 2039")
    build = revsynth.build(spec, method="network", uncompute="measured", effort="low")
    assert build.evidence.level == "exhaustive"
    # 11 additions modulo N there and back, each three sums of at most 12 bits, and one more at the end.
    ands = build.cost["ands"]
    assert ands is not None
    assert ands <= 3 * 12 * 23
