"""Wide cascades in stretches: borders must not show, whatever lies across them."""

from __future__ import annotations

from unittest.mock import patch

import pytest
from hypothesis import given
from hypothesis import strategies as st

from revsynth.cascade import PHASE, Cascade, Gate
from revsynth.reduction import fixed_point, reduce, stretches
from tests.reduction.sameness import difference, not_worse
from tests.strategies import cascades


@given(cascades(max_lines=6, max_gates=40, phase=True), st.sampled_from((2, 4, 8, 16)))
def test_short_stretches_keep_the_function_and_come_to_rest(cascade: Cascade, length: int) -> None:
    with patch.object(stretches, "STRETCH", length), patch.object(fixed_point, "WIDE", 1):
        shorter = reduce(cascade)
        assert reduce(shorter) is shorter
    assert difference(cascade, shorter) is None
    assert not_worse(cascade, shorter, "unitary")


@pytest.mark.parametrize("before", range(7))
def test_a_pair_across_a_border_is_found(before: int) -> None:
    """Stretches of eight gates: equal gates three apart meet wherever a border falls between them."""
    filler = [Gate(20 + i, (2 * (40 + i),)) for i in range(before)]
    between = [Gate(60, (130,)), Gate(70, (150,))]
    gates = [
        *filler,
        Gate(1, (0,)),
        *between,
        Gate(1, (0,)),
        *(Gate(80 + i, (2 * (90 + i),)) for i in range(6)),
    ]
    with patch.object(stretches, "STRETCH", 8), patch.object(fixed_point, "WIDE", 1):
        shorter = reduce(Cascade.from_gates(100, gates))
    assert len(shorter) == len(gates) - 2
    assert Gate(1, (0,)) not in list(shorter)


def test_far_lines_come_back_under_their_own_numbers() -> None:
    """Targets and controls far apart, a phase among them, polarities that no relabelling keeps."""
    gates = [Gate(9_000, (2, 9_001 * 2 + 1)), Gate(9_000, (2,)), Gate(PHASE, (5, 17_000)), Gate(PHASE, (5,))]
    shorter = reduce(Cascade.from_gates(9_100, gates))
    assert sorted(shorter) == [Gate(PHASE, (5, 17_001)), Gate(9_000, (2, 18_002))]
