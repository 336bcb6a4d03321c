"""Speed of AND minimisation, asserting none."""

from __future__ import annotations

from typing import Any

import pytest

from revsynth.logic.and_reduction import fewest_ands
from revsynth.logic.and_reduction.cut_mapping import map_cuts
from revsynth.logic.equivalence import prove_equal
from tests import naive_networks as naive
from tests import sha256_network

pytestmark = pytest.mark.bench


def test_map_sha256(benchmark: Any) -> None:
    network = sha256_network.build_naive()
    benchmark.pedantic(map_cuts, (network,), {"keep": 10}, rounds=1, warmup_rounds=1)


@pytest.mark.parametrize("effort", ["low", "normal"])
def test_small_predicate(benchmark: Any, effort: str) -> None:
    network = naive.table(8, [[int(x * x % 11 < 4) for x in range(256)]])
    benchmark(fewest_ands, network, effort=effort)


def test_prove_a_mapped_adder(benchmark: Any) -> None:
    network = naive.adder(128)
    benchmark(prove_equal, network, map_cuts(network))
