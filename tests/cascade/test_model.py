"""Gates and cascades: what they hold, how they compose, and what they refuse."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from revsynth.cascade import PHASE, Cascade, Gate, is_negative, line_of, literal
from tests.slow_simulator import run_cascade
from tests.strategies import cascades


@given(st.integers(0, 1000), st.booleans())
def test_a_literal_is_a_line_and_a_polarity(line: int, negative: bool) -> None:
    control = literal(line, negative)
    assert (line_of(control), is_negative(control)) == (line, negative)


def test_a_gate_knows_the_lines_it_touches() -> None:
    assert Gate(1, (0, 5)).lines == (0, 2, 1)
    assert Gate(PHASE, (0, 5)).lines == (0, 2)
    assert Gate(PHASE).lines == ()


@given(cascades(phase=True))
def test_gates_come_back_as_they_went_in(cascade: Cascade) -> None:
    again = Cascade.from_gates(cascade.lines, list(cascade))
    assert again == cascade
    assert len(again) == len(list(cascade))
    assert (again.target.dtype, again.offset.dtype, again.control.dtype) == (np.int32, np.int64, np.int32)


@given(cascades(phase=True))
def test_masks_and_back(cascade: Cascade) -> None:
    target, care, value = cascade.masks()
    assert Cascade.from_masks(cascade.lines, target, care, value) == cascade
    for index, gate in enumerate(cascade):
        assert int(care[index]) == sum(1 << (c >> 1) for c in gate.controls)
        assert int(value[index]) == sum(1 << (c >> 1) for c in gate.controls if not c & 1)


def test_masks_reach_the_64th_line_and_no_further() -> None:
    cascade = Cascade.from_gates(64, [Gate(0, (127,)), Gate(63, (0,)), Gate(PHASE, (126,))])
    target, care, value = cascade.masks()
    assert care.tolist() == [1 << 63, 1, 1 << 63]
    assert value.tolist() == [0, 1, 1 << 63]
    assert Cascade.from_masks(64, target, care, value) == cascade
    with pytest.raises(ValueError, match="masks hold 64 lines, not 65"):
        Cascade.from_gates(65, []).masks()
    with pytest.raises(ValueError, match="masks hold 64 lines, not 65"):
        Cascade.from_masks(65, target, care, value)


@given(cascades(max_lines=4, max_gates=8, phase=True), st.data())
def test_one_after_the_other(first: Cascade, data: st.DataObject) -> None:
    gates = data.draw(st.lists(st.sampled_from(list(first) or [Gate(0)]), max_size=5))
    second = Cascade.from_gates(first.lines, gates)
    for state in range(1 << first.lines):
        middle, sign = run_cascade(first, state)
        after, other_sign = run_cascade(second, middle)
        assert run_cascade(first + second, state) == (after, sign * other_sign)


def test_other_widths_do_not_compose() -> None:
    with pytest.raises(ValueError, match="cascades on 2 and 3 lines do not compose"):
        Cascade.from_gates(2, []) + Cascade.from_gates(3, [])


@given(cascades(max_lines=5, phase=True))
def test_a_circuit_inverts_by_reversal(cascade: Cascade) -> None:
    """Common practice: every gate is its own inverse, so the reversed cascade undoes the cascade."""
    for state in range(1 << cascade.lines):
        assert run_cascade(cascade + cascade.inverse(), state) == (state, 1)
    assert cascade.inverse().inverse() == cascade


@given(cascades(max_lines=4, max_gates=8, phase=True), st.data())
def test_the_same_gates_on_other_lines(cascade: Cascade, data: st.DataObject) -> None:
    placement = data.draw(st.permutations(range(6)))[: cascade.lines]
    moved = cascade.on_lines(6, tuple(placement))

    def place(state: int) -> int:
        return sum(((state >> i) & 1) << line for i, line in enumerate(placement))

    for state in range(1 << cascade.lines):
        after, sign = run_cascade(cascade, state)
        assert run_cascade(moved, place(state)) == (place(after), sign)


def test_cascades_are_compared_by_what_they_hold() -> None:
    one = Cascade.from_gates(2, [Gate(0, (2,))])
    assert one == Cascade.from_gates(2, [Gate(0, (2,))])
    assert one != Cascade.from_gates(3, [Gate(0, (2,))])
    assert one != Cascade.from_gates(2, [Gate(0, (3,))])
    assert one != Cascade.from_gates(2, [Gate(1, (0,))])
    assert one != [Gate(0, (2,))]
    assert repr(one) == "<Cascade of 1 gates on 2 lines>"
    with pytest.raises(TypeError, match="unhashable"):
        hash(one)


CONTROLS = "control lines must ascend below 3 and differ from the target"


@pytest.mark.parametrize(
    ("gate", "message"),
    [
        (Gate(0, (6,)), CONTROLS),
        (Gate(0, (4, 2)), CONTROLS),
        (Gate(0, (2, 3)), CONTROLS),
        (Gate(0, (0,)), CONTROLS),
        (Gate(0, (1,)), CONTROLS),
        (Gate(0, (-1,)), CONTROLS),
        (Gate(3, ()), "the target must be a line below 3, or PHASE"),
        (Gate(-2, ()), "the target must be a line below 3, or PHASE"),
    ],
)
def test_gates_that_cannot_be_are_refused(gate: Gate, message: str) -> None:
    with pytest.raises(ValueError, match=message):
        Cascade.from_gates(3, [gate])
