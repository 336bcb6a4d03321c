"""The bit-parallel simulator against the slow one, across words, blocks and free bits."""

from __future__ import annotations

import random

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from revsynth.cascade import PHASE, Cascade, Gate
from revsynth.cascade.simulate import BLOCK, permutation, run, signs
from tests.slow_simulator import run_cascade
from tests.strategies import cascades


@given(cascades(max_lines=7, max_gates=20, phase=True))
def test_every_state_and_every_sign(cascade: Cascade) -> None:
    wanted = [run_cascade(cascade, state) for state in range(1 << cascade.lines)]
    assert permutation(cascade).tolist() == [state for state, _ in wanted]
    assert signs(cascade).tolist() == [int(sign < 0) for _, sign in wanted]


@given(cascades(max_lines=6, max_gates=12, phase=True), st.integers(0, 2**32))
def test_any_states_in_any_number_of_words(cascade: Cascade, seed: int) -> None:
    """70 random states a row: the bits of the second word beyond them are nobody's business."""
    source = random.Random(seed)
    states = [source.getrandbits(cascade.lines) for _ in range(70)]
    rows = np.zeros((cascade.lines, 2), dtype=np.uint64)
    for index, state in enumerate(states):
        for line in range(cascade.lines):
            rows[line, index // 64] |= np.uint64(((state >> line) & 1) << index % 64)
    given_rows = rows.copy()
    after, phase = run(cascade, rows)
    assert np.array_equal(rows, given_rows)
    for index, state in enumerate(states):
        got = sum(
            int(after[line, index // 64] >> np.uint64(index % 64)) % 2 << line
            for line in range(cascade.lines)
        )
        negative = int(phase[index // 64] >> np.uint64(index % 64)) % 2
        assert (got, 1 - 2 * negative) == run_cascade(cascade, state)


@pytest.mark.parametrize("words", [1, BLOCK - 1, BLOCK, BLOCK + 1, 2 * BLOCK + 3])
def test_blocks_join_without_a_seam(words: int) -> None:
    """Each word on its own gives the same as all together; random words from a stated seed."""
    gates = [Gate(0), Gate(1, (0, 5)), Gate(PHASE, (1, 2)), Gate(2, (1, 3)), Gate(PHASE), Gate(0, (2, 4))]
    cascade = Cascade.from_gates(3, gates)
    rows = np.random.default_rng(7).integers(0, 2**64, (3, words), dtype=np.uint64)
    after, phase = run(cascade, rows)
    for index in sorted({0, words // 2, BLOCK - 1, BLOCK, words - 1} & set(range(words))):
        alone, alone_phase = run(cascade, rows[:, index : index + 1])
        assert np.array_equal(after[:, index : index + 1], alone)
        assert phase[index] == alone_phase[0]


def test_no_line_at_all() -> None:
    """One state; a phase without controls is still a sign."""
    assert permutation(Cascade.from_gates(0, [])).tolist() == [0]
    assert signs(Cascade.from_gates(0, [Gate(PHASE)])).tolist() == [1]
    assert signs(Cascade.from_gates(0, [Gate(PHASE), Gate(PHASE)])).tolist() == [0]


def test_line_0_is_the_least_significant_bit() -> None:
    """A function that changes under bit reversal: x + 1 modulo 8 (ripple of the carries, common practice)."""
    increment = Cascade.from_gates(3, [Gate(2, (0, 2)), Gate(1, (0,)), Gate(0)])
    assert permutation(increment).tolist() == [1, 2, 3, 4, 5, 6, 7, 0]


def test_not_and_toffoli_give_and_and_or() -> None:
    """Common practice: with them every classical function. Line 2 starts in 0 and gets the result."""
    conjunction = Cascade.from_gates(3, [Gate(2, (0, 2))])
    disjunction = Cascade.from_gates(3, [Gate(2, (1, 3)), Gate(2)])
    for x in range(4):
        a, b = x & 1, x >> 1
        assert permutation(conjunction)[x] == x | (a & b) << 2
        assert permutation(disjunction)[x] == x | (a | b) << 2


def test_a_controlled_z_has_no_distinguished_target() -> None:
    """Common practice: Z on a with controls b, c is Z on b with controls a, c; here one phase gate."""
    assert signs(Cascade.from_gates(3, [Gate(PHASE, (0, 2, 4))])).tolist() == [0, 0, 0, 0, 0, 0, 0, 1]


@pytest.mark.parametrize(
    ("lines", "expected"),
    [(25, "a table of 2**25 states is too large: at most 24 lines")],
)
def test_tables_that_are_too_large(lines: int, expected: str) -> None:
    cascade = Cascade.from_gates(lines, [])
    for table in (permutation, signs):
        with pytest.raises(ValueError) as error:
            table(cascade)
        assert str(error.value) == expected


def test_rows_must_be_those_of_the_lines() -> None:
    with pytest.raises(ValueError, match="2 rows given for 3 lines"):
        run(Cascade.from_gates(3, []), np.zeros((2, 1), dtype=np.uint64))
