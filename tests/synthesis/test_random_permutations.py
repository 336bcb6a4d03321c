"""Random and regular permutations against figures: mean gates and T, 4 T an AND (erasure by measurement).

The figures of transformation-based synthesis are those of Miller, Maslov, Dueck, DAC 2003, with both
directions, as sample means computed by this program's own `rows`: 20.9, 54.7, 137, 328 and 768 gates.
"""

from __future__ import annotations

import numpy as np
import pytest

from revsynth.cascade.price import cascade_t
from revsynth.cascade.simulate import permutation
from revsynth.options import Aim
from revsynth.synthesis.decompose import DECOMPOSE
from revsynth.synthesis.interface import Task
from tests.synthesis.checks import from_table

FIGURES = {4: (11, 29), 5: (27, 128), 6: (59, 484), 7: (122, 1338), 8: (260, 3700)}
"""By lines: mean gates, or mean T, that are to be reached."""

RECORDED = [
    (4, 6, 10.34, 27.4),
    (5, 3, 23.0, 121.4),
    (6, 2, 53.5, 424),
    (7, 1, 111, 1180),
    (8, 1, 244, 3256),
]
"""Lines, permutations, mean gates and mean T as this program gave them at normal effort."""

RECORDED_LONG = [
    (4, 20, 10.5, 29.0),
    (5, 8, 22.7, 118),
    (6, 4, 53, 420),
    (7, 4, 116, 1200),
    (8, 3, 247, 3260),
]


def cost(table: np.ndarray, aim: Aim) -> int:
    """Gates or T of what the method gives, checked to be the permutation."""
    lines = len(table).bit_length() - 1
    block = DECOMPOSE.synthesise(
        Task(from_table(lines, lines, table), "inplace", aim=aim, uncompute="measured")
    )[0]
    assert np.array_equal(permutation(block.cascade), table)
    return len(block.cascade) if aim == "gates" else cascade_t(block.cascade, "measured")


def means(lines: int, count: int) -> tuple[float, float]:
    tables = [np.random.default_rng(1000 * lines + seed).permutation(1 << lines) for seed in range(count)]
    gates, t = (float(np.mean([cost(table, aim) for table in tables])) for aim in ("gates", "t"))
    return gates, t


@pytest.mark.quality
@pytest.mark.parametrize(("lines", "count", "gates", "t"), RECORDED)
def test_random_permutations(lines: int, count: int, gates: float, t: float) -> None:
    found = means(lines, count)
    assert found[0] <= gates, f"{found[0]} gates, recorded {gates}"
    assert found[1] <= t, f"{found[1]} T, recorded {t}"
    assert found[0] <= FIGURES[lines][0]
    assert found[1] <= FIGURES[lines][1]


@pytest.mark.slow
@pytest.mark.quality
@pytest.mark.parametrize(("lines", "count", "gates", "t"), RECORDED_LONG)
def test_many_random_permutations(lines: int, count: int, gates: float, t: float) -> None:
    test_random_permutations(lines, count, gates, t)


def rotated_by_weight(x: int) -> int:
    """Hidden weighted bit: the byte rotated left by its own weight (common practice)."""
    turn = x.bit_count() % 8
    return (x << turn | x >> (8 - turn)) & 255


@pytest.mark.quality
@pytest.mark.parametrize(
    ("name", "rule", "figure", "recorded"),
    [
        ("hidden weighted bit", rotated_by_weight, 266, 148),
        ("x (x + 1) / 2", lambda x: x * (x + 1) // 2 % 256, 47, 47),
        ("3 x", lambda x: 3 * x % 256, 22, 22),
        ("x + 1", lambda x: (x + 1) % 256, 8, 8),
        ("Gray code", lambda x: x ^ x >> 1, 7, 7),
    ],
)
def test_regular_permutations_of_eight_lines(name: str, rule: object, figure: int, recorded: int) -> None:
    """x + 1 takes a gate a line, a Gray code a CNOT for each line but one: common practice."""
    found = cost(np.array([rule(x) for x in range(256)]), "gates")  # type: ignore[operator]
    assert found <= figure
    assert found <= recorded, f"{name}: {found} gates, recorded {recorded}"
