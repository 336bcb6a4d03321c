"""Speed of transformation-based synthesis: the figures to reach are in the docstrings, none is asserted.

Run with `pytest -m bench tests/bench/test_transform_bench.py`.
"""

from __future__ import annotations

import itertools
from collections.abc import Callable
from typing import Any

import numpy as np
import pytest

from revsynth.synthesis.interface import Task
from revsynth.synthesis.kernels import transform_one
from revsynth.synthesis.rows import transform_many
from revsynth.synthesis.transform import TRANSFORM
from tests.synthesis.checks import from_table

pytestmark = pytest.mark.bench

Benchmark = Any


@pytest.fixture(autouse=True)
def compiled() -> None:
    """Compile, or load from the cache, before anything is measured."""
    transform_one(np.array([1, 0]), directions="both")


@pytest.mark.parametrize(
    ("lines", "directions"), [(8, "both"), (12, "one"), (12, "both"), (14, "both"), (16, "one"), (16, "both")]
)
def test_one_large_permutation(benchmark: Benchmark, lines: int, directions: str) -> None:
    """After compilation: 12 lines one way 0.1 s, 16 lines one way 1 s, 16 lines both ways 4 s."""
    table = np.random.default_rng(lines).permutation(1 << lines)
    run: Callable[[], object] = lambda: transform_one(table, directions=directions)  # noqa: E731
    benchmark.pedantic(run, rounds=2, iterations=1)


def test_all_functions_of_three_lines(benchmark: Benchmark) -> None:
    """All 40,320, both ways: seconds."""
    tables = np.array(list(itertools.permutations(range(8))))
    benchmark(transform_many, tables)


@pytest.mark.parametrize("oracle", ["embedded", "phase"])
def test_a_predicate_of_eight_inputs(benchmark: Benchmark, oracle: str) -> None:
    """A small part of the second that a whole 8-input build may take."""
    function = from_table(8, 1, np.random.default_rng(8).integers(0, 2, 256))
    benchmark(TRANSFORM.synthesise, Task(function, oracle))
