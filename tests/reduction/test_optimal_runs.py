"""Runs on three lines against the complete tables: never worse, the same, found across other gates."""

from __future__ import annotations

import pytest
from hypothesis import given
from hypothesis import strategies as st

from revsynth.cascade import PHASE, Cascade, Gate
from revsynth.cascade.simulate import permutation
from revsynth.optimal.small_tables import small_table
from revsynth.options import Controls, Uncompute
from revsynth.reduction import reduce
from revsynth.reduction.masks import masked
from revsynth.reduction.optimal_runs import Runs, replace_runs, whole_optimum
from tests.reduction.sameness import difference, not_worse, of
from tests.strategies import cascades

RUNS = Runs(lines=3, reach=24, shortest=3, longest=16, choices=4)
SHORT_RUNS = Runs(lines=4, reach=16, shortest=4, longest=6, choices=4)
settings = st.tuples(st.sampled_from(("mixed", "positive")), st.sampled_from(("unitary", "measured")))


@pytest.mark.parametrize("runs", [RUNS, SHORT_RUNS], ids=["three lines", "four lines"])
@given(cascade=cascades(max_lines=6, max_gates=24, phase=True), setting=settings)
def test_the_pass_keeps_the_function_and_the_promise(
    cascade: Cascade, setting: tuple[Controls, Uncompute], runs: Runs
) -> None:
    gates = masked(cascade)
    after, changed = replace_runs(gates, [True] * len(gates), runs, *setting)
    shorter = of(cascade.lines, after)
    assert difference(cascade, shorter) is None
    assert not_worse(cascade, shorter, setting[1])
    assert len(changed) == len(after)
    again, marks = replace_runs(after, [True] * len(after), runs, *setting)
    assert again == after
    assert not any(marks)


@given(cascades(max_lines=3, max_gates=16), settings)
def test_three_lines_come_out_no_worse_than_the_table(
    cascade: Cascade, setting: tuple[Controls, Uncompute]
) -> None:
    controls, uncompute = setting
    positive = Cascade.from_gates(cascade.lines, [Gate(t, tuple(c & ~1 for c in cs)) for t, cs in cascade])
    cascade = positive if controls == "positive" else cascade
    shorter = reduce(cascade, controls=controls, uncompute=uncompute)
    table = small_table(cascade.lines, controls, "gates")
    least = table.cost_of(table.index(permutation(cascade).tolist()))
    toffolis = sum(len(gate.controls) > 1 for gate in shorter)
    if len(cascade) >= 3:
        assert len(shorter) == least.gates or toffolis < least.toffolis
    assert difference(cascade, shorter) is None


@given(cascades(max_lines=3, max_gates=12, phase=True), settings)
def test_a_whole_cascade_is_looked_up_or_left(cascade: Cascade, setting: tuple[Controls, Uncompute]) -> None:
    gates = masked(cascade)
    found = whole_optimum(gates, cascade.lines, *setting)
    has_phase = any(gate.target == PHASE for gate in cascade)
    has_negative = setting[0] == "positive" and any(gate[2] for gate in gates)
    if has_phase or has_negative or len(gates) < 3:
        assert found is None
    if found is not None:
        assert difference(cascade, of(cascade.lines, found)) is None
        assert not_worse(cascade, of(cascade.lines, found), setting[1])
        assert whole_optimum(found, cascade.lines, *setting) in (found, None)


SWAPPED = [Gate(1, (0,)), Gate(0, (2,)), Gate(1, (0,)), Gate(0, (2,))]
"""Four CNOTs that do what two do: the first two, three times over, do nothing (common practice)."""


@pytest.mark.parametrize(
    "between",
    [
        [Gate(5, (0, 6))],
        [Gate(3, (2,)), Gate(PHASE, (4, 6))],
        [Gate(PHASE, (4, 6)), Gate(4, (6, 10)), Gate(5, (4,))],
    ],
)
def test_gates_on_other_lines_do_not_stand_in_the_way(between: list[Gate]) -> None:
    """Nothing between flips a line of the run's last gates, so the run is taken up past it."""
    gates = [*SWAPPED[:2], *SWAPPED[2:3], *between[1:], *SWAPPED[3:], *between[:1]]
    cascade = Cascade.from_gates(6, gates)
    after, _ = replace_runs(masked(cascade), [True] * len(gates), RUNS, "mixed", "unitary")
    assert len(after) == len(gates) - 2
    assert difference(cascade, of(6, after)) is None


def test_what_reads_a_line_in_between_stands_in_the_way() -> None:
    gates = [*SWAPPED[:2], Gate(3, (0, 2)), *SWAPPED[2:]]
    cascade = Cascade.from_gates(4, gates)
    after, _ = replace_runs(masked(cascade), [True] * len(gates), RUNS, "mixed", "unitary")
    assert difference(cascade, of(4, after)) is None


def test_wider_gates_are_no_run() -> None:
    gates = masked(Cascade.from_gates(5, [Gate(4, (0, 2, 4)), Gate(4, (0, 2, 5)), Gate(4, (0, 3, 5))]))
    after, changed = replace_runs(gates, [True] * 3, RUNS, "mixed", "unitary")
    assert (after, changed) == (gates, [False] * 3)
