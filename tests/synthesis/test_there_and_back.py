"""Permutations by networks on fresh lines, there and back, against the slow simulator."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from revsynth.cascade.price import held_t
from revsynth.errors import UsageError
from revsynth.synthesis.interface import Block, Task, known_lines
from revsynth.synthesis.network import NETWORK
from revsynth.synthesis.there_and_back import there_and_back
from tests.slow_simulator import run_cascade
from tests.strategies import permutations
from tests.synthesis.checks import check_block, from_table


@settings(max_examples=20)
@given(permutations(max_lines=4), st.sampled_from(("mixed", "positive")), st.data())
def test_permutations_with_free_images(values: list[int], controls: str, data: st.DataObject) -> None:
    lines = len(values).bit_length() - 1
    free = data.draw(st.sets(st.integers(0, len(values) - 1)))
    function = from_table(lines, lines, [None if x in free else y for x, y in enumerate(values)])
    task = Task(function, "inplace", controls=controls, effort="low")
    assert NETWORK.unfit(task) is None
    for block in NETWORK.synthesise(task):
        check_block(task, block)
        after = {run_cascade(block.cascade, x)[0] for x in range(len(values))}
        assert after == set(range(len(values)))


def eight_lines(rule: object) -> tuple[Block, int]:
    table = np.array([rule(x) for x in range(256)])  # type: ignore[operator]
    block = NETWORK.synthesise(Task(from_table(8, 8, table), "inplace", uncompute="measured"))[0]
    for x in (0, 1, 85, 170, 254, 255, 37):
        assert run_cascade(block.cascade, x)[0] == table[x]
    return block, held_t(block.cascade, known_lines(block, "inplace"), "measured")


@pytest.mark.quality
def test_a_random_permutation_of_eight_lines() -> None:
    """61 ANDs for any 8-bit table, there and back: Goudarzi, Rivain, CHES 2016 (61 from memory)."""
    table = np.random.default_rng(0).permutation(256)
    _, t = eight_lines(lambda x: table[x])
    assert t <= 4 * 2 * 61


@pytest.mark.quality
def test_the_ands_of_a_carry_chain() -> None:
    """3 x modulo 256 is a sum of two words, 7 ANDs (common practice); its inverse has no shorter table."""
    _, t = eight_lines(lambda x: 3 * x % 256)
    assert t <= 60


def test_budgets_of_lines_are_kept_or_refused() -> None:
    table = np.random.default_rng(3).permutation(16)
    function = from_table(4, 4, table)
    assert "8 lines before any scratch, 7 allowed" in str(NETWORK.unfit(Task(function, "inplace", lines=7)))
    task = Task(function, "inplace", lines=12)
    for block in NETWORK.synthesise(task):
        check_block(task, block)


def test_what_is_not_reversible_is_refused() -> None:
    task = Task(from_table(2, 2, [0, 0, 1, 2]), "inplace")
    assert "same image" in str(NETWORK.unfit(task))
    with pytest.raises(UsageError, match="same image"):
        there_and_back(task, NETWORK.synthesise, lambda _: None)
    assert "3 output bits" in str(NETWORK.unfit(Task(from_table(2, 3, [0, 1, 2, 3]), "inplace")))
    wide = Task(from_table(9, 9, np.arange(512)), "inplace")
    assert "more than 8 lines" in str(NETWORK.unfit(wide))
