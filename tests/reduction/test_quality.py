"""Recorded averages of reduction: they may fall, never rise. The floors are optima from published tables."""

from __future__ import annotations

import itertools

import numpy as np
import pytest

from revsynth.cascade.model import Cascade
from revsynth.cascade.price import cascade_t
from revsynth.reduction import reduce
from revsynth.synthesis.rows import transform_many

pytestmark = pytest.mark.quality

ALL = np.array(list(itertools.permutations(range(8))), dtype=np.uint8)


def images(cascades: list[Cascade]) -> np.ndarray:
    """The image of each of the 8 states under each cascade, gate by gate over the whole batch."""
    longest = max(len(cascade) for cascade in cascades)
    target = np.zeros((len(cascades), longest), dtype=np.uint8)
    care = np.full((len(cascades), longest), 8, dtype=np.uint8)
    value = np.zeros((len(cascades), longest), dtype=np.uint8)
    for row, cascade in enumerate(cascades):
        for column, gate in enumerate(cascade):
            assert gate.target >= 0
            target[row, column] = 1 << gate.target
            care[row, column] = sum(1 << (c >> 1) for c in gate.controls)
            value[row, column] = sum(1 << (c >> 1) for c in gate.controls if not c & 1)
    padding = np.arange(longest) >= np.array([len(cascade) for cascade in cascades])[:, None]
    value[padding] = 8  # no state has bit 3: these columns never fire
    state = np.tile(np.arange(8, dtype=np.uint8), (len(cascades), 1))
    for column in range(longest):
        fires = (state & care[:, column, None]) == value[:, column, None]
        state ^= np.where(fires, target[:, column, None], np.uint8(0))
    return state


def test_all_functions_of_three_lines() -> None:
    """Every one of the 40,320, from both-directional synthesis with the published controls (7.36 gates).

    Average optimum with negative controls 4.5755 gates, fewest Toffolis 1.9667 (so 13.77 T): by exhaustive
    search, see Shende, Prasad, Markov, Hayes, IEEE TCAD 22(6), 2003 for the table with positive controls.
    """
    lists = transform_many(ALL, directions="both", controls="published")
    reduced = [reduce(lists.cascade(index)) for index in range(len(lists))]
    assert np.array_equal(images(reduced), ALL)
    gates = float(np.mean([len(cascade) for cascade in reduced]))
    t = float(np.mean([cascade_t(cascade, "unitary") for cascade in reduced]))
    assert 4.5755 <= gates <= 6.5
    assert t >= 13.76
    assert round(gates, 4) <= 4.5765, f"recorded 4.5765 gates, now {gates:.4f}"
    assert round(t, 4) <= 13.9333, f"recorded 13.9333 T, now {t:.4f}"


def test_positive_controls_on_every_35th_function_of_three_lines() -> None:
    """Optimum with positive controls 5.8655: Shende, Prasad, Markov, Hayes, IEEE TCAD 22(6), 2003."""
    some = ALL[::35]
    lists = transform_many(some, directions="both", controls="published")
    reduced = [reduce(lists.cascade(index), controls="positive") for index in range(len(lists))]
    assert np.array_equal(images(reduced), some)
    assert not any(np.any(cascade.control & 1) for cascade in reduced)
    gates = float(np.mean([len(cascade) for cascade in reduced]))
    assert gates >= 5.8
    assert round(gates, 4) <= 5.8707, f"recorded 5.8707 gates, now {gates:.4f}"


@pytest.mark.parametrize(
    ("lines", "count", "recorded"),
    [(4, 50, (13.04, 36.32)), (5, 20, (41.75, 159.0)), (6, 8, (119.13, 554.0))],
)
def test_random_permutations(lines: int, count: int, recorded: tuple[float, float]) -> None:
    """Seeds 0, 1, ... of numpy's default generator; both directions, minimal controls; T measured."""
    tables = np.array([np.random.default_rng(seed).permutation(1 << lines) for seed in range(count)])
    lists = transform_many(tables)
    reduced = [reduce(lists.cascade(index), uncompute="measured") for index in range(count)]
    gates = float(np.mean([len(cascade) for cascade in reduced]))
    t = float(np.mean([cascade_t(cascade, "measured") for cascade in reduced]))
    assert round(gates, 2) <= recorded[0], f"recorded {recorded}, now {gates:.2f} gates, {t:.2f} T"
    assert round(t, 2) <= recorded[1], f"recorded {recorded}, now {gates:.2f} gates, {t:.2f} T"
