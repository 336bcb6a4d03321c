"""Superfluous gates and controls: dropped, and nothing changes for states that keep the promise."""

from __future__ import annotations

from hypothesis import given
from hypothesis import strategies as st

from revsynth.cascade import PHASE, Cascade, Gate
from revsynth.reduction.known_lines import drop_superfluous
from tests.slow_simulator import run_cascade
from tests.strategies import cascades


@given(cascades(max_lines=5, phase=True), st.data())
def test_states_that_keep_the_promise_are_treated_as_before(cascade: Cascade, data: st.DataObject) -> None:
    known = data.draw(st.dictionaries(st.integers(0, cascade.lines - 1), st.integers(0, 1)))
    shorter = drop_superfluous(cascade, known)
    assert len(shorter) <= len(cascade)
    assert len(shorter.control) <= len(cascade.control)
    for state in range(1 << cascade.lines):
        if all((state >> line) & 1 == value for line, value in known.items()):
            assert run_cascade(shorter, state) == run_cascade(cascade, state)


def test_what_never_acts_goes_and_what_always_holds_is_dropped() -> None:
    cascade = Cascade.from_gates(
        3,
        [
            Gate(PHASE, (4,)),  # line 2 starts in 0: never acts
            Gate(1, (0, 5)),  # waits for the 0 that is there
            Gate(2, (0,)),  # line 2 now equals line 0
            Gate(1, (0, 5)),  # both cannot hold
            Gate(1, (0, 4)),
        ],
    )
    assert list(drop_superfluous(cascade, {2: 0})) == [Gate(1, (0,)), Gate(2, (0,)), Gate(1, (0, 4))]
