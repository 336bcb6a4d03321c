"""The method `optimal`: what it proves, over what is free, and what it says where no table reaches."""

from __future__ import annotations

from collections.abc import Iterator
from itertools import permutations
from pathlib import Path

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

import revsynth
from revsynth.choice import and_count
from revsynth.cli.main import main
from revsynth.errors import BudgetError, UndecidedError
from revsynth.logic.affine_classes import and_count as fewest_ands_of
from revsynth.optimal.small_tables import small_table
from revsynth.options import Aim, Oracle
from revsynth.synthesis import optimal
from revsynth.synthesis.interface import Block, Task
from revsynth.synthesis.optimal import OPTIMAL
from tests.synthesis.checks import check_block, from_table

HIDDEN_WEIGHT = [0, 2, 4, 12, 8, 5, 9, 11, 1, 6, 10, 13, 3, 14, 7, 15]


@pytest.fixture(scope="module", autouse=True)
def _a_small_table() -> Iterator[None]:
    """Of four lines: up to eight gates at once, ten with high effort."""
    with pytest.MonkeyPatch.context() as patch:
        patch.setattr(optimal, "SIZE", 4)
        patch.setattr(optimal, "LARGE_SIZE", 5)
        yield


def synthesised(task: Task) -> list[Block]:
    blocks = OPTIMAL.synthesise(task)
    for block in blocks:
        check_block(task, block)
    return blocks


@settings(max_examples=12)
@given(st.permutations(range(8)).map(list), st.lists(st.integers(0, 7), max_size=4))
def test_free_images_are_filled_in_as_is_cheapest(values: list[int], free: list[int]) -> None:
    """By trying every completion, one by one."""
    wanted = [None if x in free else value for x, value in enumerate(values)]
    by_gates = small_table(3, "mixed", "gates")
    least = min(
        by_gates.cost_of(by_gates.index(images)).gates
        for images in permutations(range(8))
        if all(value in (None, image) for value, image in zip(wanted, images, strict=True))
    )
    blocks = synthesised(Task(from_table(3, 3, wanted), "inplace", aim="gates"))
    assert len(blocks[0].cascade) == least
    assert blocks[0].method == "optimal, proved minimal in gates"
    assert blocks[1].method == "optimal, proved fewest Toffolis"
    assert and_count(blocks[1], "inplace") <= and_count(blocks[0], "inplace")


@pytest.mark.parametrize("aim", ["t", "gates"])
def test_the_proof_comes_first_that_the_aim_asks_for(aim: Aim) -> None:
    blocks = synthesised(Task(from_table(3, 3, [1, 0, 3, 2, 5, 4, 7, 6]), "inplace", aim=aim))
    assert blocks[0].method.endswith("gates" if aim == "gates" else "Toffolis")


def test_four_lines() -> None:
    """Sizes: see tests/optimal/test_classes.py."""
    for values, size in (([5 * x & 15 for x in range(16)], 3), ([3 * x & 15 for x in range(16)], 6)):
        (block,) = synthesised(Task(from_table(4, 4, values), "inplace", controls="positive"))
        assert len(block.cascade) == size
        assert block.method == f"optimal, {size} gates proved minimal with positive controls"


def test_four_lines_with_negative_controls() -> None:
    """A NOT with three negative controls; positive ones take six gates, one less than NOTs around it."""
    values = [x ^ 8 if x & 7 == 0 else x for x in range(16)]
    (block,) = synthesised(Task(from_table(4, 4, values), "inplace"))
    assert len(block.cascade) == 1
    assert block.method == "optimal, proved minimal in gates"
    (positive,) = synthesised(Task(from_table(4, 4, values), "inplace", controls="positive"))
    assert len(positive.cascade) == 6


def test_four_lines_with_free_images() -> None:
    """Three images of 5x mod 16 are free; the given one takes three gates, none takes more than that."""
    values: list[int | None] = [5 * x & 15 for x in range(16)]
    values[3] = values[7] = values[15] = None
    (block,) = synthesised(Task(from_table(4, 4, values), "inplace"))
    assert len(block.cascade) <= 3
    few: list[int | None] = [None] * 5 + values[5:]
    reason = OPTIMAL.unfit(Task(from_table(4, 4, few), "inplace"))
    assert reason == "its free images can be filled in in more than 24 ways"


def test_beyond_the_table_it_says_what_was_proved() -> None:
    """The function needs 11 gates: Golubitsky, Maslov, IEEE Trans. Computers 61(9), 2012."""
    task = Task(from_table(4, 4, HIDDEN_WEIGHT), "inplace")
    with pytest.raises(
        UndecidedError, match=r"needs at least 9 gates with positive controls \(proved\)"
    ) as one:
        OPTIMAL.synthesise(task)
    assert "the table of size 4 reaches 8; --effort high uses one that reaches 10" in str(one.value)
    with pytest.raises(UndecidedError, match="needs at least 11 gates") as other:
        OPTIMAL.synthesise(Task(task.function, "inplace", effort="high"))
    assert str(other.value).endswith("the table of size 5 reaches 10")


def test_the_command_exits_with_3_there(capsys: pytest.CaptureFixture[str], tmp_path: Path) -> None:
    spec = tmp_path / "lamps.toml"
    spec.write_text(f"[permutation]\nvalues = {HIDDEN_WEIGHT}\n")
    for effort, least in (("normal", 9), ("high", 11)):
        words = ["build", str(spec), "--method", "optimal", "--effort", effort, "-o", str(tmp_path / "o")]
        assert main(words) == 3
        assert f"needs at least {least} gates" in capsys.readouterr().err
    assert not (tmp_path / "o").exists()


def test_high_effort_takes_the_larger_table_only_where_it_must(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(optimal, "LARGE_SIZE", 99)
    values = [x + 1 & 15 for x in range(16)]
    (block,) = synthesised(Task(from_table(4, 4, values), "inplace", effort="high"))
    assert len(block.cascade) == 4


@pytest.mark.slow
def test_with_the_table_of_size_six(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(optimal, "SIZE", 6)
    (block,) = synthesised(Task(from_table(4, 4, HIDDEN_WEIGHT), "inplace"))
    assert len(block.cascade) == 11


@given(
    st.integers(1, 5).flatmap(
        lambda n: st.lists(st.sampled_from([0, 1, 1, 0, None]), min_size=1 << n, max_size=1 << n)
    ),
    st.sampled_from(["phase", "bit", "fresh", "compute"]),
)
def test_predicates_have_the_fewest_ands(values: list[int | None], oracle: Oracle) -> None:
    """Free inputs by trying every filling where they are few."""
    inputs = len(values).bit_length() - 1
    task = Task(from_table(inputs, 1, values), oracle)
    free = [x for x, value in enumerate(values) if value is None]
    if OPTIMAL.unfit(task) is not None:
        assert len(free) > 16
        return
    blocks = synthesised(task)
    said = int(blocks[0].method.rpartition("(")[2].rstrip(")"))
    if len(free) <= 6:
        base = sum(1 << x for x, value in enumerate(values) if value)
        fillings = [
            base | sum(1 << x for i, x in enumerate(free) if choice >> i & 1)
            for choice in range(1 << len(free))
        ]
        assert said == min(fewest_ands_of(inputs, table) for table in fillings)
    for block in blocks:
        assert block.method.startswith("optimal, proved fewest ANDs")
        assert and_count(block, oracle) == said


def test_too_few_lines_for_the_ands_is_a_budget_error() -> None:
    values = [int(x in (15, 31, 23, 7, 8)) for x in range(32)]
    with pytest.raises(BudgetError, match="ANDs held at once need"):
        OPTIMAL.synthesise(Task(from_table(5, 1, values), "bit", lines=6))


def test_small_embeddings_over_all_placements() -> None:
    """AND and XOR of two bits: one Toffoli, one CNOT on three lines (half adder, common practice)."""
    half_adder = from_table(2, 2, [0, 1, 1, 2])
    blocks = synthesised(Task(half_adder, "embedded", aim="gates"))
    assert [len(block.cascade) for block in blocks] == [2, 2]
    constant = from_table(1, 1, [1, 1])
    (block, _) = synthesised(Task(constant, "embedded", aim="gates"))
    assert len(block.cascade) == 0


def test_several_outputs_beside_the_inputs() -> None:
    copies = from_table(2, 2, [0, 3, 3, 0])
    (block,) = synthesised(Task(copies, "bit"))
    assert len(block.cascade) == 4
    free = from_table(1, 2, [0, None])
    blocks = synthesised(Task(free, "bit"))
    assert [len(block.cascade) for block in blocks] == [0, 0]


@pytest.mark.parametrize(
    ("inputs", "outputs", "oracle", "reason"),
    [
        (5, 5, "inplace", "optima are known up to 4 lines, not 5"),
        (2, 3, "inplace", "2 input bits but 3 output bits: not reversible in place"),
        (6, 1, "phase", "the fewest ANDs are known up to 5 inputs, not 6"),
        (2, 2, "phase", "the fewest ANDs are known for one output bit, not 2"),
        (3, 2, "bit", "5 lines for inputs and outputs: optima are known up to 4"),
        (4, 2, "embedded", "it takes 6 lines; embeddings are tabulated up to 3"),
    ],
)
def test_what_no_table_reaches_is_said(inputs: int, outputs: int, oracle: Oracle, reason: str) -> None:
    task = Task(from_table(inputs, outputs, [0] * (1 << inputs)), oracle)
    assert OPTIMAL.unfit(task) == reason
    with pytest.raises(ValueError, match=reason[:20]):
        OPTIMAL.synthesise(task)


def test_images_that_cannot_be_told_apart_are_no_permutation() -> None:
    for lines in (3, 4):
        values = [0] * 2 + list(range(2, 1 << lines))
        reason = OPTIMAL.unfit(Task(from_table(lines, lines, values), "inplace"))
        assert reason is not None
        assert reason.startswith("not reversible")


def test_auto_takes_it_along_where_it_costs_nothing() -> None:
    built = revsynth.build(revsynth.permutation([7, 1, 4, 3, 0, 2, 6, 5]), aim="gates", gates="cascade")
    best = small_table(3, "mixed", "gates")
    assert built.cost["cascade"] == best.cost_of(best.index([7, 1, 4, 3, 0, 2, 6, 5])).gates
    tried = {trial["method"] for trial in built.to_json()["tried"]}
    assert "optimal" in tried
    four = revsynth.build(revsynth.permutation([*range(1, 16), 0]))
    failed = {trial["method"]: trial.get("failed") for trial in four.to_json()["tried"]}
    assert failed["optimal"] == "a large table is made or read only for --method optimal"


def test_all_functions_of_two_lines_in_place() -> None:
    for images in permutations(range(4)):
        blocks = synthesised(Task(from_table(2, 2, list(images)), "inplace", controls="positive"))
        assert len({len(block.cascade) for block in blocks}) == 1
        assert not np.any(blocks[0].cascade.control & 1)
