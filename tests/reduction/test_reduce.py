"""The whole of reduction: the same function and signs, never worse, at rest after one call, deterministic."""

from __future__ import annotations

import random
import subprocess
import sys

import numpy as np
import pytest
from hypothesis import assume, given
from hypothesis import strategies as st

from revsynth.cascade import PHASE, Cascade, Gate
from revsynth.cascade.price import cascade_t
from revsynth.cascade.simulate import permutation, signs
from revsynth.errors import UsageError
from revsynth.options import Controls, Uncompute
from revsynth.reduction import reduce
from revsynth.synthesis.rows import transform_many
from tests.reduction.sameness import broken, cost, difference, not_worse, some_states
from tests.strategies import cascades, permutations

settings = st.tuples(st.sampled_from(("mixed", "positive")), st.sampled_from(("unitary", "measured")))


def positive(cascade: Cascade) -> Cascade:
    """The same gates with every control waiting for 1."""
    gates = (Gate(t, tuple(c & ~1 for c in controls)) for t, controls in cascade)
    return Cascade.from_gates(cascade.lines, gates)


def random_cascade(lines: int, gates: int, most_controls: int, seed: int, phase: bool = True) -> Cascade:
    source = random.Random(seed)
    found = []
    for _ in range(gates):
        chosen = source.sample(range(lines), source.randint(1, min(most_controls + 1, lines)))
        target = PHASE if phase and source.random() < 0.2 else chosen.pop()
        found.append(Gate(target, tuple(sorted(2 * line + source.getrandbits(1) for line in chosen))))
    return Cascade.from_gates(lines, found)


@given(cascades(max_lines=6, max_gates=24, phase=True), settings)
def test_the_function_stays_and_nothing_gets_worse(
    cascade: Cascade, setting: tuple[Controls, Uncompute]
) -> None:
    controls, uncompute = setting
    shorter = reduce(cascade, controls=controls, uncompute=uncompute)
    assert difference(cascade, shorter) is None
    assert not_worse(cascade, shorter, uncompute)


@given(cascades(max_lines=6, max_gates=24, phase=True), settings)
def test_a_second_call_changes_nothing(cascade: Cascade, setting: tuple[Controls, Uncompute]) -> None:
    controls, uncompute = setting
    shorter = reduce(cascade, controls=controls, uncompute=uncompute)
    assert reduce(shorter, controls=controls, uncompute=uncompute) is shorter


@given(cascades(max_lines=5, max_gates=20, phase=True).map(positive))
def test_positive_controls_stay_positive(cascade: Cascade) -> None:
    shorter = reduce(cascade, controls="positive")
    assert difference(cascade, shorter) is None
    assert not np.any(shorter.control & 1)


@given(cascades(max_lines=5, max_gates=20, phase=True))
def test_positive_brings_in_no_negative_control(cascade: Cascade) -> None:
    shorter = reduce(cascade, controls="positive")
    assert np.count_nonzero(shorter.control & 1) <= np.count_nonzero(cascade.control & 1)


@given(cascades(max_lines=5, max_gates=16, phase=True), settings)
def test_a_reduced_cascade_and_its_inverse_vanish(
    cascade: Cascade, setting: tuple[Controls, Uncompute]
) -> None:
    controls, uncompute = setting
    shorter = reduce(cascade, controls=controls, uncompute=uncompute)
    assert len(reduce(shorter + shorter.inverse(), controls=controls, uncompute=uncompute)) == 0


@given(permutations(max_lines=4), settings)
def test_synthesised_cascades(values: list[int], setting: tuple[Controls, Uncompute]) -> None:
    controls, uncompute = setting
    cascade = transform_many(np.array([values])).cascade(0)
    shorter = reduce(cascade, controls=controls, uncompute=uncompute)
    assert permutation(shorter).tolist() == values
    assert not signs(shorter).any()
    assert not_worse(cascade, shorter, uncompute)


@given(cascades(max_lines=4, max_gates=16, phase=True), st.data())
def test_a_gate_that_reduction_broke_would_be_seen(cascade: Cascade, data: st.DataObject) -> None:
    shorter = reduce(cascade)
    assume(len(shorter))
    index = data.draw(st.integers(0, len(shorter) - 1))
    assert difference(cascade, broken(shorter, index, "left out")) is not None


@pytest.mark.parametrize(
    ("lines", "gates", "most_controls"),
    [(12, 300, 4), (10, 1_500, 3), (64, 800, 3), (65, 800, 3), (300, 400, 2), (5_000, 3_000, 3)],
)
def test_larger_cascades_on_random_states(lines: int, gates: int, most_controls: int) -> None:
    """Across the borders of all searches and of the wide form; states run through the slow simulator."""
    cascade = random_cascade(lines, gates, most_controls, seed=lines)
    cascade = cascade + cascade.inverse() + random_cascade(lines, 50, most_controls, seed=1)
    shorter = reduce(cascade)
    assert len(shorter) < len(cascade)
    assert difference(cascade, shorter, some_states(lines, 20, seed=2)) is None
    assert not_worse(cascade, shorter, "unitary")
    assert reduce(shorter) == shorter


@pytest.mark.slow
def test_a_long_cascade_is_searched_too_and_comes_to_rest() -> None:
    """Above the longest search of windows: 101,000 gates."""
    cascade = random_cascade(12, 101_000, 5, seed=5, phase=False)
    shorter = reduce(cascade)
    assert len(shorter) > 100_000 * 0.5
    assert len(shorter) < len(cascade)
    assert np.array_equal(permutation(shorter), permutation(cascade))


def test_hundreds_of_controls_and_thousands_of_lines() -> None:
    """Two gates of 2,000 controls that differ in one merge past what lies between on other lines."""
    wide = tuple(range(0, 8_000, 4))
    between = [Gate(4_001 + i, (2 * (4_002 + i),)) for i in range(0, 20, 2)]
    cascade = Cascade.from_gates(5_000, [Gate(1, wide), *between, Gate(1, wide[:-1])])
    shorter = reduce(cascade)
    assert len(shorter) == len(cascade) - 1
    assert Gate(1, (*wide[:-1], wide[-1] + 1)) in list(shorter)


@pytest.mark.parametrize("lines", [0, 1, 7, 300])
def test_nothing_in_nothing_out(lines: int) -> None:
    empty = Cascade.from_gates(lines, [])
    assert reduce(empty) is empty


def test_signs_without_controls_cancel_in_pairs() -> None:
    sign = Gate(PHASE, ())
    assert len(reduce(Cascade.from_gates(0, [sign, sign, sign]))) == 1
    assert list(reduce(Cascade.from_gates(1, [Gate(PHASE, (0,)), Gate(PHASE, (1,))]))) == [sign]


def test_a_not_is_taken_up_by_a_control_far_away() -> None:
    """NOT a, then gates that read a, then NOT a: the controls turn and both NOTs go (common practice)."""
    readers = [Gate(1 + i, (0,)) for i in range(4)]
    cascade = Cascade.from_gates(6, [Gate(0), *readers, Gate(0)])
    assert len(reduce(cascade)) == 4
    assert np.all(reduce(cascade).control & 1)
    assert len(reduce(cascade, controls="positive")) == 6


@pytest.mark.parametrize(
    ("options", "message"),
    [
        ({"controls": "negative"}, "controls 'negative' is not one of mixed, positive"),
        ({"uncompute": "never"}, "uncompute 'never' is not one of unitary, measured"),
    ],
)
def test_unknown_options_are_refused_in_words(options: dict[str, str], message: str) -> None:
    with pytest.raises(UsageError, match=message):
        reduce(Cascade.from_gates(1, []), **options)  # type: ignore[arg-type]


def test_progress_is_told_of_long_work() -> None:
    said: list[str] = []
    cascade = random_cascade(8, 1_500, 3, seed=9)
    reduce(cascade, progress=said.append)
    assert said
    assert all(line.startswith("searching ") and "\n" not in line for line in said)
    said.clear()
    reduce(random_cascade(8, 50, 3, seed=9), progress=said.append)
    assert not said


PROGRAM = """
import random, sys
from revsynth.cascade import Cascade, Gate
from revsynth.reduction import reduce
source = random.Random(3)
gates = []
for _ in range(200):
    chosen = source.sample(range(6), 4)
    gates.append(Gate(chosen[0], tuple(sorted(2 * line + source.getrandbits(1) for line in chosen[1:]))))
print(list(reduce(Cascade.from_gates(6, gates))))
assert "numba" not in sys.modules, "reduction does not pay for a compiler"
"""


def test_the_same_in_any_process_and_without_a_compiler() -> None:
    outputs = {
        subprocess.run(
            [sys.executable, "-c", PROGRAM],
            env={"PYTHONHASHSEED": seed},
            capture_output=True,
            text=True,
            check=True,
        ).stdout
        for seed in ("1", "2")
    }
    assert len(outputs) == 1


def test_what_was_worked_on_before_does_not_matter() -> None:
    """The rewriter is shared and remembers: a cascade must come out the same first and last."""
    cascade = random_cascade(6, 120, 3, seed=11)
    first = reduce(cascade)
    for seed in range(20):
        reduce(random_cascade(6, 60, 3, seed=seed))
    assert reduce(cascade) == first
    assert cost(first, "unitary") < cost(cascade, "unitary")
    assert cascade_t(first, "unitary") <= cascade_t(cascade, "unitary")
