"""How fast reduction is; nothing is asserted but that it did something."""

from __future__ import annotations

import numpy as np
import pytest
from pytest_benchmark.fixture import BenchmarkFixture

from revsynth.reduction import reduce
from revsynth.synthesis.kernels import transform_one
from revsynth.synthesis.rows import transform_many

pytestmark = pytest.mark.bench


def test_a_thousand_cascades_on_three_lines(benchmark: BenchmarkFixture) -> None:
    tables = np.array([np.random.default_rng(seed).permutation(8) for seed in range(1_000)])
    lists = transform_many(tables)
    cascades = [lists.cascade(index) for index in range(len(lists))]
    reduced = benchmark(lambda: [reduce(cascade) for cascade in cascades])
    assert sum(map(len, reduced)) < sum(map(len, cascades))


@pytest.mark.parametrize("lines", [8, 12, 16])
def test_one_random_permutation(benchmark: BenchmarkFixture, lines: int) -> None:
    cascade = transform_one(np.random.default_rng(0).permutation(1 << lines)).cascade(0)
    reduced = benchmark.pedantic(reduce, (cascade,), rounds=1)
    assert len(reduced) < len(cascade)
