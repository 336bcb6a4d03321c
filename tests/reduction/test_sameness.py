"""The checker that the tests of reduction lean on: it must see every broken gate, and nothing else."""

from __future__ import annotations

import pytest
from hypothesis import assume, given
from hypothesis import strategies as st

from revsynth.cascade import PHASE, Cascade, Gate
from tests.reduction.sameness import broken, difference, not_worse
from tests.strategies import cascades


@given(cascades(max_lines=5, max_gates=12, phase=True), st.data())
def test_every_broken_gate_is_seen(cascade: Cascade, data: st.DataObject) -> None:
    """No single change of these kinds leaves the function as it is: gates are invertible, none is idle."""
    assume(len(cascade))
    index = data.draw(st.integers(0, len(cascade) - 1))
    ways = ["left out", "doubled"]
    if list(cascade)[index].controls:
        ways += ["turned", "dropped"]
    way = data.draw(st.sampled_from(ways))
    assert difference(cascade, cascade) is None
    assert difference(cascade, broken(cascade, index, way)) is not None


def test_a_lost_sign_is_seen() -> None:
    signed = Cascade.from_gates(1, [Gate(PHASE, ())])
    assert difference(signed, Cascade.from_gates(1, [])) == "state 0 goes to (0, 1), not to (0, -1)"


@pytest.mark.parametrize(
    ("after", "kept"),
    [
        ([Gate(2, (0, 2))], True),
        ([Gate(2, (0,)), Gate(1, ()), Gate(0, ())], False),
        ([Gate(3, (0, 2, 4))], False),
    ],
)
def test_more_gates_or_more_t_is_worse(after: list[Gate], kept: bool) -> None:
    before = Cascade.from_gates(4, [Gate(2, (0, 2)), Gate(1, (0,))])
    assert not_worse(before, Cascade.from_gates(4, after), "unitary") is kept
