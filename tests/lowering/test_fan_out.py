"""Joining gates of the same controls keeps the function, and finds those that may move."""

from __future__ import annotations

from hypothesis import given

from revsynth.cascade import PHASE, Cascade, Gate
from revsynth.lowering.fan_out import Unit, gather_units, units_of
from tests.slow_simulator import run_cascade
from tests.strategies import cascades


def as_cascade(lines: int, units: list[Unit]) -> Cascade:
    """One gate for each target again."""
    made = [Gate(t, unit.controls) for unit in units for t in unit.targets or (PHASE,)]
    return Cascade.from_gates(lines, made)


@given(cascades(max_lines=5, max_gates=20, phase=True))
def test_the_function_stays(cascade):
    units = gather_units(cascade.lines, cascade)
    joined = as_cascade(cascade.lines, units)
    assert len(joined) == len(cascade)
    assert all(run_cascade(joined, x) == run_cascade(cascade, x) for x in range(1 << cascade.lines))
    assert as_cascade(cascade.lines, units_of(cascade)) == cascade


def test_gates_move_past_what_they_commute_with():
    same = (0, 3)
    assert gather_units(5, [Gate(2, same), Gate(3, (0,)), Gate(4, same)]) == [
        Unit(same, (2, 4)),
        Unit((0,), (3,)),
    ]
    assert len(gather_units(5, [Gate(2, same), Gate(PHASE, (0, 4)), Gate(4, same)])) == 2


def test_gates_stay_where_they_may_not_move():
    same = (0, 3)
    assert len(gather_units(5, [Gate(2, same), Gate(0, (8,)), Gate(4, same)])) == 3
    assert len(gather_units(5, [Gate(2, same), Gate(3, (8,)), Gate(4, same)])) == 3
    assert len(gather_units(5, [Gate(2, same), Gate(2, same)])) == 2
    assert len(gather_units(5, [Gate(2, (0,)), Gate(3, (0,))])) == 2
