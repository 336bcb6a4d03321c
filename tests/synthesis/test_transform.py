"""The method `transform` in every oracle form, against the slow simulator."""

from __future__ import annotations

import itertools

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from revsynth.cascade.price import cascade_t
from revsynth.embed.in_place import fewest_lines
from revsynth.logic.function import Function
from revsynth.synthesis import transform
from revsynth.synthesis.interface import Task
from revsynth.synthesis.transform import TRANSFORM
from tests.strategies import permutations
from tests.synthesis.checks import check_block, from_table

EFFORTS = ("low", "normal")
CONTROLS = ("mixed", "positive")


@st.composite
def functions(draw: st.DrawFn, max_inputs: int = 4, outputs: int | None = None) -> Function:
    """A function with free values: whole inputs, or single bits."""
    inputs = draw(st.integers(1, max_inputs))
    count = outputs or draw(st.integers(1, 3))
    size, full = 1 << inputs, (1 << count) - 1
    values = draw(st.lists(st.integers(0, full), min_size=size, max_size=size))
    care = draw(
        st.one_of(
            st.just([full] * size),
            st.lists(st.sampled_from((0, full)), min_size=size, max_size=size),
            st.lists(st.integers(0, full), min_size=size, max_size=size),
        )
    )
    return from_table(inputs, count, values, care=care)


@given(functions(), st.sampled_from(("bit", "fresh", "compute")), st.sampled_from(CONTROLS))
def test_outputs_are_added_and_all_else_is_left_alone(function: Function, oracle: str, controls: str) -> None:
    task = Task(function, oracle, controls=controls)
    assert TRANSFORM.unfit(task) is None
    blocks = TRANSFORM.synthesise(task)
    assert blocks
    for block in blocks:
        check_block(task, block)


@given(functions(max_inputs=5, outputs=1), st.sampled_from(CONTROLS), st.sampled_from(EFFORTS))
def test_phases(function: Function, controls: str, effort: str) -> None:
    task = Task(function, "phase", controls=controls, effort=effort)
    for block in TRANSFORM.synthesise(task):
        check_block(task, block)


@given(functions(max_inputs=5), st.sampled_from(CONTROLS), st.sampled_from(EFFORTS))
def test_embedded_blocks_have_the_fewest_lines(function: Function, controls: str, effort: str) -> None:
    task = Task(function, "embedded", controls=controls, effort=effort)
    for block in TRANSFORM.synthesise(task):
        check_block(task, block)
        assert block.inputs == fewest_lines(function)


@given(permutations(max_lines=4), st.sampled_from(CONTROLS), st.sampled_from(EFFORTS), st.data())
def test_permutations_with_free_images(
    values: list[int], controls: str, effort: str, data: st.DataObject
) -> None:
    lines = len(values).bit_length() - 1
    free = data.draw(st.sets(st.integers(0, len(values) - 1)))
    function = from_table(lines, lines, [None if x in free else y for x, y in enumerate(values)])
    task = Task(function, "inplace", controls=controls, effort=effort)
    blocks = TRANSFORM.synthesise(task)
    assert blocks
    for block in blocks:
        check_block(task, block)
        assert block.cascade.lines == lines


@given(permutations(max_lines=4), st.data())
def test_bijections_with_free_output_bits(values: list[int], data: st.DataObject) -> None:
    lines = len(values).bit_length() - 1
    full = len(values) - 1
    care = data.draw(st.lists(st.integers(0, full), min_size=len(values), max_size=len(values)))
    task = Task(from_table(lines, lines, values, care=care), "inplace")
    assert TRANSFORM.unfit(task) is None
    for block in TRANSFORM.synthesise(task):
        check_block(task, block)


@pytest.mark.parametrize(("lines", "controls"), [(9, "mixed"), (9, "positive"), (10, "mixed"), (13, "mixed")])
def test_larger_permutations_use_the_kernel(lines: int, controls: str) -> None:
    from revsynth.cascade.simulate import permutation

    table = np.random.default_rng(lines).permutation(1 << lines)
    task = Task(from_table(lines, lines, table), "inplace", controls=controls, effort="low")
    for block in TRANSFORM.synthesise(task):
        assert np.array_equal(permutation(block.cascade), table)
        assert controls == "mixed" or not np.any(block.cascade.control & 1)


@pytest.mark.parametrize("oracle", ["phase", "bit", "fresh", "compute", "embedded"])
def test_the_same_task_gives_the_same_blocks(oracle: str) -> None:
    random = np.random.default_rng(3)
    function = from_table(4, 1, random.integers(0, 2, 16))
    task = Task(function, oracle, seed=5)
    once, again = TRANSFORM.synthesise(task), TRANSFORM.synthesise(task)
    assert [block.cascade for block in once] == [block.cascade for block in again]
    assert [block.method for block in once] == [block.method for block in again]


def test_more_effort_is_never_worse_for_the_aim() -> None:
    table = np.random.default_rng(8).permutation(32)
    found = []
    for effort in ("low", "normal", "high"):
        task = Task(from_table(5, 5, table), "inplace", effort=effort)
        found.append(cascade_t(TRANSFORM.synthesise(task)[0].cascade, "unitary"))
    assert found == sorted(found, reverse=True)


def test_a_wide_function_that_matters_little_is_done() -> None:
    """Ten digits on 4 lines to 7 segments each: all else is free (BCD to 7-segment, common practice)."""
    segments = [0x3F, 0x06, 0x5B, 0x4F, 0x66, 0x6D, 0x7D, 0x07, 0x7F, 0x6F]
    function = from_table(4, 7, segments + [None] * 6)
    for oracle in ("embedded", "bit", "fresh"):
        task = Task(function, oracle)
        for block in TRANSFORM.synthesise(task):
            check_block(task, block)


@pytest.mark.parametrize("most_rows", [1 << 14, 1 << 10])
def test_large_embedded_blocks(most_rows: int, monkeypatch: pytest.MonkeyPatch) -> None:
    """With free values chosen on the way, and (beyond a number of rows) completed first."""
    from revsynth.cascade.simulate import permutation

    monkeypatch.setattr(transform, "LAZY_ROWS", most_rows)
    x = np.arange(1 << 11)
    task = Task(from_table(11, 3, np.bitwise_count(x) % 5), "embedded", effort="low")
    (block, *_) = TRANSFORM.synthesise(task)
    assert ("free values" in block.method) == (most_rows >= 1 << 11)
    place = block.placement
    assert place is not None
    assert place.before == tuple(range(11))
    assert block.inputs == fewest_lines(task.function)
    after = permutation(block.cascade)[: 1 << 11]
    word = sum(((after >> line) & 1) << bit for bit, line in enumerate(place.after))
    assert np.array_equal(word, np.bitwise_count(x) % 5)


@pytest.mark.parametrize(
    ("values", "bits", "oracle", "lines", "reason"),
    [
        ([0, 1, 3, 1], 2, "inplace", None, "not reversible: inputs 1 and 3 have the same image 1"),
        ([0, 1, 1, 0], 1, "inplace", None, "2 input bits but 1 output bits: not reversible in place"),
        ([0, 1, 2, 3], 2, "phase", None, "a phase oracle has one output bit, not 2"),
        ([0, 0, 0, 1], 1, "embedded", 2, "it needs 3 lines, 2 allowed"),
        ([0, 0, 0, 1], 1, "phase", 2, "it needs 3 lines, 2 allowed"),
        ([0, 0, 0, 1], 1, "bit", 2, "it needs 3 lines, 2 allowed"),
        ([1, 0, 3, 2], 2, "inplace", 1, "it needs 2 lines, 1 allowed"),
    ],
)
def test_reasons(values: list[int], bits: int, oracle: str, lines: int | None, reason: str) -> None:
    task = Task(from_table(2, bits, values), oracle, lines=lines)
    assert TRANSFORM.unfit(task) == reason
    with pytest.raises(ValueError, match=reason):
        TRANSFORM.synthesise(task)


def test_half_free_images_that_cannot_all_differ_are_refused() -> None:
    function = from_table(1, 1, [0, 0], care=[1, 1])
    assert TRANSFORM.unfit(Task(function, "inplace")) == (
        "not reversible: inputs 0 and 1 have the same image 0"
    )
    function = from_table(2, 2, [0, 0, 0, 0], care=[1, 1, 1, 2])
    assert TRANSFORM.unfit(Task(function, "inplace")) == (
        "not reversible: no choice of the free output bits gives every input an image of its own"
    )


def test_half_free_images_are_not_refused_on_the_strength_of_an_upper_bound() -> None:
    """252 images of 0 with five free bits each can all differ, though that is too many to spread best."""
    free = [sum(1 << bit for bit in five) for five in itertools.combinations(range(10), 5)]
    care = [0x3FF & ~mask for mask in free] + [0] * (1024 - len(free))
    task = Task(from_table(10, 10, [0] * 1024, care=care), "inplace", effort="low")
    assert TRANSFORM.unfit(task) is None
    for block in TRANSFORM.synthesise(task):
        check_block(task, block)


def test_too_large_tables_are_refused_with_numbers() -> None:
    from revsynth.logic.truth_table import ones, zeros

    def wide(inputs: int, outputs: int) -> Function:
        care = np.stack([ones(inputs)] * outputs)
        return Function(inputs, outputs, np.stack([zeros(inputs)] * outputs), care, ones(inputs))

    assert TRANSFORM.unfit(Task(wide(19, 19), "inplace")) == "19 lines are too many: at most 18"
    assert TRANSFORM.unfit(Task(wide(19, 1), "embedded")) == (
        "more than 18 lines: a table of all their states would be too large"
    )
    assert TRANSFORM.unfit(Task(wide(18, 1), "embedded")) == (
        "in place it needs 19 lines, at most 18 are possible"
    )
    assert TRANSFORM.unfit(Task(wide(11, 1), "phase")) == (
        "computed in place and undone it has 2048 rows on 12 lines; "
        "at most 1024 rows on 12 lines are worth it"
    )


@pytest.mark.parametrize("oracle", ["bit", "fresh", "compute"])
def test_a_tight_line_budget_takes_the_out_of_place_form(oracle: str) -> None:
    x = np.arange(64)
    function = from_table(6, 3, (x & 7) * (x >> 3) >> 3)
    task = Task(function, oracle, lines=9)
    blocks = TRANSFORM.synthesise(task)
    assert [block.work for block in blocks] == [0] * len(blocks)
    for block in blocks:
        check_block(task, block)


@given(
    functions(max_inputs=4),
    st.sampled_from(("bit", "fresh", "compute", "embedded")),
    st.sampled_from(("t", "gates", "qubits", "depth")),
    st.integers(1, 9),
)
def test_line_budgets_are_kept_for_every_aim(function: Function, oracle: str, aim: str, lines: int) -> None:
    task = Task(function, oracle, aim=aim, lines=lines, effort="low")
    if TRANSFORM.unfit(task) is not None:
        return
    blocks = TRANSFORM.synthesise(task)
    assert blocks
    for block in blocks:
        check_block(task, block)


def test_small_work_imports_no_compiler() -> None:
    """Eight lines must not pay half a second for numba."""
    import subprocess
    import sys

    program = (
        "import sys, numpy as np\n"
        "from revsynth.synthesis.rows import transform_many\n"
        "from revsynth.synthesis.transform import TRANSFORM\n"
        "from revsynth.synthesis.linear import LINEAR\n"
        "from revsynth.synthesis.relabelled import best_cascades\n"
        "best_cascades(np.arange(256)[::-1].copy(), positive=False, aim='t', uncompute='unitary',"
        " effort='low', seed=0)\n"
        "assert 'numba' not in sys.modules\n"
    )
    subprocess.run([sys.executable, "-c", program], check=True, timeout=60)
