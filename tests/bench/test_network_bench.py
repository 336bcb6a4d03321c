"""How long large networks take: a table of 2**24 inputs, SHA-256 mapped, a hash predicate proved."""

from __future__ import annotations

from pathlib import Path

import pytest
from pytest_benchmark.fixture import BenchmarkFixture

import revsynth
from revsynth.logic.and_reduction.cut_mapping import map_cuts
from revsynth.logic.network_simulation import tabulate
from tests.pipeline.test_hash_predicate import hash_spec
from tests.sha256_network import build_naive
from tests.synthesis.wide_networks import product_equals


@pytest.mark.bench
def test_a_table_of_a_product_of_twelve_bits(benchmark: BenchmarkFixture) -> None:
    """To be a second."""
    network = product_equals(12, 3599 * 3001)
    table = benchmark.pedantic(tabulate, (network,), rounds=3, warmup_rounds=1)
    marked = [a for a in range(1 << 12) if a and 3599 * 3001 % a == 0 and 3599 * 3001 // a < 1 << 12]
    assert sum(int(word).bit_count() for word in table[0][table[0] != 0]) == len(marked)


@pytest.mark.bench
def test_a_block_of_sha256_mapped_from_the_naive_form(benchmark: BenchmarkFixture) -> None:
    """To be five seconds."""
    naive = build_naive()
    assert benchmark.pedantic(map_cuts, (naive,), rounds=2).reachable().ands < 30_000


@pytest.mark.bench
@pytest.mark.parametrize("budget", [None, 8_600])
def test_a_hash_predicate_from_file_to_proof(
    budget: int | None, benchmark: BenchmarkFixture, tmp_path: Path
) -> None:
    """To be half a minute."""
    path = hash_spec(tmp_path, 64)

    def run() -> int | None:
        spec = revsynth.read_spec(path)
        return revsynth.build(spec, method="network", uncompute="measured", qubits=budget).cost["t"]

    assert benchmark.pedantic(run, rounds=1)
