"""Speed of the logic room: transforms, exclusive sums, analysis; asserted is only that results are there."""

from __future__ import annotations

import numpy as np
import pytest
from pytest_benchmark.fixture import BenchmarkFixture

from revsynth.logic.analysis import analyse
from revsynth.logic.exclusive_sum import cube_prices, minimise
from revsynth.logic.normal_form import algebraic_normal_form, best_polarity
from revsynth.spec.toml_reader import parse_toml
from revsynth.spec.understand import understand
from revsynth.synthesis.interface import Task
from revsynth.synthesis.products import PRODUCTS
from tests.logic.tables import from_rule, random_column, random_function

pytestmark = pytest.mark.bench


@pytest.mark.parametrize("inputs", [12, 16, 20, 24])
def test_normal_form(benchmark: BenchmarkFixture, inputs: int) -> None:
    column = random_column(inputs, seed=1)[None]
    assert benchmark(algebraic_normal_form, column, inputs).shape == column.shape


@pytest.mark.parametrize("inputs", [8, 10, 12, 16])
def test_best_polarity(benchmark: BenchmarkFixture, inputs: int) -> None:
    column = random_column(inputs, seed=1)[None]
    assert benchmark(best_polarity, column, inputs, cube_prices(inputs))[1].shape == column.shape


@pytest.mark.parametrize("inputs", [4, 6, 8, 10, 12, 16])
def test_minimise_a_random_predicate(benchmark: BenchmarkFixture, inputs: int) -> None:
    function = random_function(inputs, seed=1)
    assert len(benchmark.pedantic(minimise, (function, cube_prices(inputs)), rounds=2, warmup_rounds=1))


def test_products_of_a_structured_predicate_of_16_inputs(benchmark: BenchmarkFixture) -> None:
    function = from_rule(16, lambda x: (x & 255) + (x >> 8) == 300)
    assert benchmark.pedantic(PRODUCTS.synthesise, (Task(function, "phase"),), rounds=2, warmup_rounds=1)


@pytest.mark.parametrize("inputs", [8, 16, 20])
def test_analysis(benchmark: BenchmarkFixture, inputs: int) -> None:
    spec = parse_toml(f'inputs = {{ v = {inputs} }}\n[predicate]\nwhere = "popcount(v) % 3 == 1"\n')
    understanding = understand(spec)
    assert benchmark.pedantic(analyse, (understanding,), rounds=2).marked


def test_analysis_of_a_random_permutation_of_16_bits(benchmark: BenchmarkFixture) -> None:
    values = np.random.Generator(np.random.PCG64(1)).permutation(1 << 16).tolist()
    understanding = understand(parse_toml(f"inputs = {{ v = 16 }}\n[permutation]\nvalues = {values}\n"))
    assert benchmark.pedantic(analyse, (understanding,), rounds=2).bijective
