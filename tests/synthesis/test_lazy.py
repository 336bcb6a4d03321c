"""Synthesis of partly free targets, against the slow simulator."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from revsynth.embed.target import ReversibleTarget
from revsynth.synthesis.lazy import Variant, transform_lazily
from revsynth.synthesis.rows import transform_many
from tests.slow_simulator import run_cascade


@st.composite
def targets(draw: st.DrawFn, max_lines: int = 4) -> ReversibleTarget:
    """A target that a permutation meets, with any bits freed."""
    lines = draw(st.integers(1, max_lines))
    table = np.array(draw(st.permutations(range(1 << lines))))
    full = (1 << lines) - 1
    fixed = np.array(draw(st.lists(st.integers(0, full), min_size=full + 1, max_size=full + 1)))
    return ReversibleTarget(lines, fixed, table & fixed)


@given(targets(), st.booleans(), st.integers(0, 15), st.booleans())
def test_what_is_fixed_is_met(target: ReversibleTarget, both: bool, flip: int, positive: bool) -> None:
    variant = Variant(both, flip & ((1 << target.lines) - 1))
    cascade = transform_lazily(target, variant, positive=positive)
    if cascade is None:
        return
    images = np.array([run_cascade(cascade, x)[0] for x in range(1 << target.lines)])
    assert target.accepts(images)
    if positive:
        assert not np.any(cascade.control & 1)


@given(st.permutations(range(16)), st.booleans())
def test_a_complete_target_never_runs_into_a_dead_end(values: list[int], both: bool) -> None:
    full = np.full(16, 15, dtype=np.int64)
    target = ReversibleTarget(4, full, np.array(values))
    for positive in (True, False):
        cascade = transform_lazily(target, Variant(both), positive=positive)
        assert cascade is not None
        assert [run_cascade(cascade, x)[0] for x in range(16)] == values


@pytest.mark.quality
def test_on_complete_targets_it_needs_no_more_than_minimal_controls() -> None:
    """Products that avoid the finished rows: never more T than the highest ones of the value, on average."""
    tables = np.array([np.random.default_rng(seed).permutation(16) for seed in range(40)])
    plain = transform_many(tables, directions="one").prices("measured").mean()
    from revsynth.cascade.price import cascade_t

    full = np.full(16, 15, dtype=np.int64)
    lazy = []
    for table in tables:
        cascade = transform_lazily(ReversibleTarget(4, full, table), Variant(False), positive=True)
        assert cascade is not None
        lazy.append(cascade_t(cascade, "measured"))
    assert np.mean(lazy) <= plain


def test_nothing_fixed_needs_no_gates() -> None:
    free = np.zeros(8, dtype=np.int64)
    cascade = transform_lazily(ReversibleTarget(3, free, free), Variant(True), positive=False)
    assert cascade is not None
    assert len(cascade) == 0


def test_too_many_lines_are_refused() -> None:
    free = np.zeros(1 << 17, dtype=np.int64)
    with pytest.raises(ValueError, match="17 lines are too many here: at most 16"):
        transform_lazily(ReversibleTarget(17, free, free), Variant(True), positive=False)
