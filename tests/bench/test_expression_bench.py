"""Speed of expressions: parsing and evaluating for every input."""

from __future__ import annotations

import pytest
from pytest_benchmark.fixture import BenchmarkFixture

from revsynth.spec.expression import Scope, parse
from revsynth.spec.model import Word
from revsynth.spec.vector import evaluate_with_warnings

pytestmark = pytest.mark.bench

TEN_OPERATORS = "(a * 3 + b) % 17 == 4 and (a ^ b) & 7 < (b >> 2) or a - b > 10"


@pytest.mark.parametrize(
    ("bits", "text"),
    [
        (4, TEN_OPERATORS),
        (8, TEN_OPERATORS),
        (10, TEN_OPERATORS),
        (8, "(a * b) << 70 >> 70"),
        (8, "pow(a, b, 251)"),
        (8, "sum(a[i] * b[j] for i in range(8) for j in range(8)) > 20"),
    ],
)
def test_two_words(benchmark: BenchmarkFixture, bits: int, text: str) -> None:
    scope = Scope({"a": Word("a", bits), "b": Word("b", bits)})
    benchmark(lambda: evaluate_with_warnings(parse(text, scope)))


def test_trial_division(benchmark: BenchmarkFixture) -> None:
    scope = Scope({"a": Word("a", 16)})
    text = "a > 1 and all(a % d for d in range(2, 256) if d * d <= a)"
    benchmark(lambda: evaluate_with_warnings(parse(text, scope)))
