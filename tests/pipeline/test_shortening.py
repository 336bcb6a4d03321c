"""Shortened blocks keep their oracle form, lose idle work lines, and never grow."""

from __future__ import annotations

import random

from hypothesis import given
from hypothesis import strategies as st

from revsynth.cascade import PHASE, Cascade, Gate
from revsynth.options import BuildOptions
from revsynth.shortening import shorten, without_idle_work
from revsynth.synthesis.interface import Block
from tests.slow_simulator import run_cascade
from tests.strategies import cascades


@given(cascades(max_lines=5, phase=True), st.integers(0, 3))
def test_inputs_see_the_same_while_work_starts_in_0(cascade: Cascade, work: int) -> None:
    work = min(work, cascade.lines)
    block = Block(cascade, "made up", cascade.lines - work, work=work)
    shorter = shorten(block, "phase", BuildOptions())
    assert len(shorter.cascade) <= len(cascade)
    assert shorter.work <= work
    low = (1 << block.inputs) - 1
    for x in range(1 << block.inputs):
        (before, sign), (after, sign_after) = run_cascade(cascade, x), run_cascade(shorter.cascade, x)
        assert (after & low, sign_after) == (before & low, sign)


def test_idle_work_lines_go_and_the_others_move_up() -> None:
    gates = [Gate(4, (0, 2)), Gate(PHASE, (9,)), Gate(4, (0, 2))]
    block = without_idle_work(Block(Cascade.from_gates(5, gates), "made up", 2, work=3))
    assert block.work == 1
    assert list(block.cascade) == [Gate(2, (0, 2)), Gate(PHASE, (5,)), Gate(2, (0, 2))]


def test_reducing_a_long_cascade_says_that_it_is_at_work() -> None:
    """Each call of progress is also where the time limit is looked at."""
    draw = random.Random(1)
    gates = []
    for _ in range(1300):
        target, *controls = draw.sample(range(24), 5)
        gates.append(Gate(target, tuple(sorted(2 * line + draw.randrange(2) for line in controls))))
    said: list[str] = []
    shorten(Block(Cascade.from_gates(24, gates), "made up", 24), "inplace", BuildOptions(), said.append)
    assert said
