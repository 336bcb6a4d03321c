"""How long elaboration takes: small predicates, wide arithmetic, and a block of SHA-256."""

from __future__ import annotations

import pytest
from pytest_benchmark.fixture import BenchmarkFixture

from revsynth.elaborate import elaborate
from revsynth.spec.model import Output, Outputs, Predicate, Spec, Word
from tests.sha256_network import build

pytestmark = pytest.mark.bench


@pytest.mark.parametrize("where", ["a * b == 12", "a % 3 == b % 5", "popcount(a ^ b) == 2 and a < b"])
def test_predicate_of_8_bits(benchmark: BenchmarkFixture, where: str) -> None:
    spec = Spec((Word("a", 4), Word("b", 4)), Predicate(where=where))
    assert benchmark(elaborate, spec).function.values.ands <= 30


@pytest.mark.parametrize("value", ["a * b", "a // b", "pow(a, 65537, 2**31 - 1)"])
def test_words_of_64_bits(benchmark: BenchmarkFixture, value: str) -> None:
    spec = Spec((Word("a", 64), Word("b", 64)), Outputs((Output("f", value, bits=128),)))
    assert benchmark(elaborate, spec).function.values.ands


def test_a_block_of_sha256(benchmark: BenchmarkFixture) -> None:
    assert benchmark.pedantic(build, rounds=3).ands == 21_890
