"""Products in place: small functions state by state, large ones in columns, recorded figures."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from revsynth.cascade.simulate import run
from revsynth.embed.in_place import fewest_lines
from revsynth.errors import BudgetError
from revsynth.logic.function import Function
from revsynth.logic.truth_table import ones, pack_values, variable
from revsynth.options import Aim, Controls
from revsynth.synthesis import landing
from revsynth.synthesis.interface import Block, Task
from revsynth.synthesis.products import PRODUCTS
from tests.logic.tables import functions
from tests.synthesis.checks import check_block, from_table


def complete(inputs: int, outputs: int, values: np.ndarray) -> Function:
    """A function that is fixed everywhere, from its values."""
    columns = pack_values(values, outputs)
    return Function(
        inputs, outputs, columns, np.broadcast_to(ones(inputs), columns.shape).copy(), ones(inputs)
    )


def words(bits: int) -> tuple[np.ndarray, np.ndarray]:
    """Two words of so many bits at all inputs, the first in the lower bits."""
    x = np.arange(1 << 2 * bits, dtype=np.int64)
    return x & ((1 << bits) - 1), x >> bits


def adder(bits: int, *, keep: bool = False, carry: bool = False) -> Function:
    one, two = words(bits)
    wide = bits + carry
    total = (one + two) & ((1 << wide) - 1)
    return complete(2 * bits, wide + bits * keep, total | (two << wide) if keep else total)


def majority(inputs: int) -> Function:
    return complete(inputs, 1, (np.bitwise_count(np.arange(1 << inputs)) > inputs // 2).astype(np.int64))


def check_columns(function: Function, block: Block) -> None:
    """The same as `check_block` in packed columns: all inputs at once."""
    place = block.placement
    assert place is not None
    rows = np.zeros((block.cascade.lines, len(function.domain)), dtype=np.uint64)
    for bit, line in enumerate(place.before):
        rows[line] = variable(function.inputs, bit)
    after, _ = run(block.cascade, rows)
    for output, line in enumerate(place.after):
        assert not np.any((after[line] ^ function.values[output]) & function.care[output])


@given(
    functions(max_inputs=4, max_outputs=4),
    st.sampled_from(["mixed", "positive"]),
    st.sampled_from(["t", "gates"]),
)
def test_outputs_with_free_values_land_with_the_fewest_lines(
    function: Function, controls: Controls, aim: Aim
) -> None:
    task = Task(function, "embedded", controls=controls, aim=aim, effort="low")
    for block in PRODUCTS.synthesise(task):
        check_block(task, block)
        assert block.cascade.lines == fewest_lines(function)


@given(st.permutations(range(16)), st.integers(1, 4))
def test_balanced_outputs_need_no_further_line(values: list[int], outputs: int) -> None:
    table = [value & ((1 << outputs) - 1) for value in values]
    task = Task(from_table(4, outputs, table), "embedded", effort="low")
    for block in PRODUCTS.synthesise(task):
        check_block(task, block)
        assert block.cascade.lines == 4


def test_an_output_on_a_new_line_tells_apart_what_the_others_cannot() -> None:
    """One-hot codes of two bits: no two outputs are even on two lines, so they look at a third one."""
    task = Task(from_table(2, 4, [1, 2, 4, 8]), "embedded")
    for block in PRODUCTS.synthesise(task):
        check_block(task, block)
        assert block.cascade.lines == 4


def test_inputs_that_are_outputs_already_take_no_gates() -> None:
    task = Task(from_table(3, 2, [x >> 1 for x in range(8)]), "embedded")
    block = PRODUCTS.synthesise(task)[0]
    assert len(block.cascade) == 0
    check_block(task, block)


def test_a_majority_of_three_takes_one_toffoli() -> None:
    """Common practice: two CNOTs and one Toffoli; the Toffoli alone would not be even."""
    task = Task(majority(3), "embedded")
    block = PRODUCTS.synthesise(task)[0]
    check_block(task, block)
    assert sorted(np.diff(block.cascade.offset).tolist()) == [1, 1, 2]


@pytest.mark.quality
@pytest.mark.parametrize(
    ("keep", "carry", "recorded"), [(False, False, 36), (True, False, 36), (False, True, 44)]
)
def test_an_adder_takes_as_many_gates_as_bits_squared(keep: bool, carry: bool, recorded: int) -> None:
    """Eight bits: every carry is a sum of as many products as there are bits below; may fall, never rise."""
    function = adder(8, keep=keep, carry=carry)
    block = PRODUCTS.synthesise(Task(function, "embedded"))[0]
    check_columns(function, block)
    assert block.cascade.lines == 16 + carry
    assert len(block.cascade) <= recorded, f"{len(block.cascade)} gates, recorded {recorded}"


def test_twenty_inputs_even_only_as_a_whole() -> None:
    x = np.arange(1 << 20)
    function = complete(20, 1, ((x >= 300_001) & (x < 300_001 + (1 << 19))).astype(np.int64))
    block = PRODUCTS.synthesise(Task(function, "embedded"))[0]
    check_columns(function, block)
    assert block.cascade.lines == 20
    assert len(block.cascade) <= 6


def test_an_irregular_predicate_of_ten_inputs() -> None:
    function = complete(10, 1, np.random.default_rng(0).permutation(1 << 10) & 1)
    block = PRODUCTS.synthesise(Task(function, "embedded", effort="low"))[0]
    check_columns(function, block)
    assert block.cascade.lines == 10


def test_a_product_looks_at_lines_of_other_outputs() -> None:
    one, two = words(4)
    function = complete(8, 8, one * two)
    block = PRODUCTS.synthesise(Task(function, "embedded", effort="low"))[0]
    check_columns(function, block)
    assert block.cascade.lines == fewest_lines(function) == 13


@pytest.mark.slow
@pytest.mark.parametrize("carry", [False, True])
def test_twelve_bits_and_twelve_bits(carry: bool) -> None:
    function = adder(12, carry=carry)
    block = PRODUCTS.synthesise(Task(function, "embedded"))[0]
    check_columns(function, block)
    assert block.cascade.lines == 24 + carry
    assert len(block.cascade) <= 90


@pytest.mark.slow
def test_an_irregular_predicate_of_eighteen_inputs() -> None:
    function = complete(18, 1, np.random.default_rng(0).permutation(1 << 18) & 1)
    block = PRODUCTS.synthesise(Task(function, "embedded", effort="low"))[0]
    check_columns(function, block)
    assert block.cascade.lines == 18


def test_limits_speak_of_gates(monkeypatch: pytest.MonkeyPatch) -> None:
    function = complete(8, 1, np.random.default_rng(0).permutation(1 << 8) & 1)
    monkeypatch.setattr(landing, "MAX_GATES", 20)
    with pytest.raises(BudgetError, match="products in place would be more than 20 gates"):
        PRODUCTS.synthesise(Task(function, "embedded", effort="low"))
    monkeypatch.setattr(landing, "TABLE_LINES", 2)
    with pytest.raises(BudgetError, match="would be over 3 lines, and they are looked for over at most 2"):
        PRODUCTS.synthesise(Task(from_table(2, 4, [1, 2, 4, 8]), "embedded", effort="low"))


def test_too_wide_values_are_refused() -> None:
    function = complete(1, 64, np.array([0, 1]))
    reason = PRODUCTS.unfit(Task(function, "embedded"))
    assert reason == "64 output bits are too many in place: at most 63"


def test_the_same_task_gives_the_same_blocks() -> None:
    task = Task(complete(7, 1, np.random.default_rng(1).permutation(128) & 1), "embedded")
    assert [b.cascade for b in PRODUCTS.synthesise(task)] == [b.cascade for b in PRODUCTS.synthesise(task)]


def test_a_predicate_on_a_sum_is_found_by_a_chain() -> None:
    """The top bit of a sum of two words: 64 products over the words as they are."""
    one, two = words(7)
    function = complete(14, 1, (one + two) >> 6 & 1)
    block = PRODUCTS.synthesise(Task(function, "embedded"))[0]
    check_columns(function, block)
    assert block.cascade.lines == 14
    assert len(block.cascade) <= 13
