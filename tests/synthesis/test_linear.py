"""The method `linear`, against the slow simulator, over all oracles and with free values."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from revsynth.cascade.price import cascade_t
from revsynth.logic.function import Function
from revsynth.synthesis.interface import Task
from revsynth.synthesis.linear import LINEAR
from tests.synthesis.checks import check_block, from_table, is_bijective

ORACLES = ("phase", "bit", "fresh", "compute", "inplace", "embedded")


@st.composite
def affine_functions(draw: st.DrawFn, same: bool = False, outputs: int | None = None) -> Function:
    """An affine function with some values free; with `same`, as many outputs as inputs."""
    inputs = draw(st.integers(1, 5))
    count = outputs or (inputs if same else draw(st.integers(1, 4)))
    forms = draw(st.lists(st.integers(0, (2 << inputs) - 1), min_size=count, max_size=count))
    cared = draw(st.lists(st.integers(0, (1 << count) - 1), min_size=1 << inputs, max_size=1 << inputs))
    if draw(st.booleans()):
        cared = [(1 << count) - 1] * (1 << inputs)
    values = [
        sum((((form & (x | (1 << inputs))).bit_count() & 1) << k) for k, form in enumerate(forms))
        for x in range(1 << inputs)
    ]
    return from_table(inputs, count, values, care=cared)


@given(affine_functions(), st.sampled_from(("bit", "fresh", "compute", "embedded")))
def test_affine_functions_take_no_toffoli(function: Function, oracle: str) -> None:
    task = Task(function, oracle)
    if LINEAR.unfit(task) is not None:
        assert oracle == "embedded"
        assert not function.is_complete
        return
    (block,) = LINEAR.synthesise(task)
    check_block(task, block)
    assert cascade_t(block.cascade, "unitary") == 0


@given(affine_functions(outputs=1))
def test_affine_predicates_are_a_z_for_each_variable(function: Function) -> None:
    task = Task(function, "phase")
    assert LINEAR.unfit(task) is None
    (block,) = LINEAR.synthesise(task)
    check_block(task, block)
    assert all(len(gate.controls) <= 1 for gate in block.cascade)
    assert len(block.cascade) <= function.inputs + 1


@given(affine_functions(same=True))
def test_affine_bijections_are_done_in_place(function: Function) -> None:
    task = Task(function, "inplace")
    if LINEAR.unfit(task) is None:
        (block,) = LINEAR.synthesise(task)
        check_block(task, block)
        assert block.work == 0


@given(st.integers(1, 5), st.integers(0, 10_000))
def test_an_affine_bijection_with_free_images_is_found(lines: int, seed: int) -> None:
    """Some of the images of a random affine bijection freed: a completion must be found."""
    random = np.random.default_rng(seed)
    while True:
        rows = [int(row) for row in random.integers(0, 1 << lines, lines)]
        table = [
            sum(((row & x).bit_count() & 1) << k for k, row in enumerate(rows)) for x in range(1 << lines)
        ]
        if is_bijective(table):
            break
    shift = int(random.integers(0, 1 << lines))
    care = (((1 << lines) - 1) * random.integers(0, 2, 1 << lines)).tolist()
    task = Task(from_table(lines, lines, np.array(table) ^ shift, care=care), "inplace")
    assert LINEAR.unfit(task) is None
    check_block(task, LINEAR.synthesise(task)[0])


@given(st.integers(1, 4), st.integers(1, 2), st.data())
def test_what_it_calls_not_affine_has_no_affine_completion(
    inputs: int, outputs: int, data: st.DataObject
) -> None:
    size = 1 << inputs
    values = data.draw(st.lists(st.integers(0, (1 << outputs) - 1), min_size=size, max_size=size))
    care = data.draw(st.lists(st.integers(0, (1 << outputs) - 1), min_size=size, max_size=size))
    reason = LINEAR.unfit(Task(from_table(inputs, outputs, values, care=care), "bit"))
    fits = [
        any(
            all(
                not (care[x] >> k) & 1 or ((form & (x | size)).bit_count() & 1) == (values[x] >> k) & 1
                for x in range(size)
            )
            for form in range(2 * size)
        )
        for k in range(outputs)
    ]
    assert (reason is None) == all(fits)
    if reason is not None:
        assert reason == f"output bit {fits.index(False)} is not an affine function of the inputs"


@pytest.mark.parametrize("bits", [2, 4, 8, 16])
def test_gray_code_takes_one_cnot_less_than_bits(bits: int) -> None:
    """x XOR x >> 1 (common practice): n - 1 CNOTs suffice, and each of n - 1 outputs needs one."""
    values = np.arange(1 << bits) ^ (np.arange(1 << bits) >> 1)
    task = Task(from_table(bits, bits, values), "inplace")
    (block,) = LINEAR.synthesise(task)
    assert len(block.cascade) == bits - 1
    if bits <= 8:
        check_block(task, block)


@pytest.mark.parametrize(("shift", "swaps"), [(1, 5), (3, 3), (2, 4)])
def test_a_rotation_of_wires_is_three_cnots_a_swap(shift: int, swaps: int) -> None:
    """Each cycle of k wires takes k - 1 swaps (common practice)."""
    x = np.arange(64)
    task = Task(from_table(6, 6, ((x << shift) | (x >> (6 - shift))) & 63), "inplace")
    (block,) = LINEAR.synthesise(task)
    check_block(task, block)
    assert len(block.cascade) == 3 * swaps


def test_inverting_all_lines_is_not_spread_through_the_cnots() -> None:
    x = np.arange(16)
    task = Task(from_table(4, 4, x ^ 15), "inplace")
    assert [len(gate.controls) for gate in LINEAR.synthesise(task)[0].cascade] == [0, 0, 0, 0]


def test_a_constant_predicate_is_the_empty_phase_gate() -> None:
    (block,) = LINEAR.synthesise(Task(from_table(3, 1, [1] * 8), "phase"))
    assert list(block.cascade) == [(-1, ())]


def test_twenty_four_inputs_are_recognised_without_a_table_of_forms() -> None:
    from revsynth.logic.truth_table import ones, variable, zeros

    values = variable(24, 3) ^ variable(24, 23) ^ ones(24)
    function = Function(24, 1, values[None], ones(24)[None], ones(24))
    (block,) = LINEAR.synthesise(Task(function, "phase"))
    assert [gate.controls for gate in block.cascade] == [(6,), (46,), ()]
    values = values & variable(24, 7)
    assert LINEAR.unfit(Task(Function(24, 1, values[None], ones(24)[None], ones(24)), "phase")) is not None
    empty = Function(24, 1, zeros(24)[None], zeros(24)[None], zeros(24))
    assert len(LINEAR.synthesise(Task(empty, "phase"))[0].cascade) == 0


def test_reasons_say_what_is_wrong() -> None:
    assert LINEAR.unfit(Task(from_table(2, 1, [0, 0, 0, 1]), "bit")) == (
        "output bit 0 is not an affine function of the inputs"
    )
    assert LINEAR.unfit(Task(from_table(2, 1, [0, 1, 1, 0]), "inplace")) == (
        "2 input bits but 1 output bits: not reversible in place"
    )
    assert LINEAR.unfit(Task(from_table(1, 1, [1, 1]), "inplace")) == (
        "no affine choice of the free values is one-to-one"
    )
    assert LINEAR.unfit(Task(from_table(1, 2, [0, 3]), "phase")) == "a phase oracle has one output bit, not 2"
    with pytest.raises(ValueError, match="output bit 0 is not an affine function"):
        LINEAR.synthesise(Task(from_table(2, 1, [0, 0, 0, 1]), "bit"))


@pytest.mark.parametrize("oracle", ORACLES)
def test_every_oracle_of_a_wire(oracle: str) -> None:
    task = Task(from_table(1, 1, [1, 0]), oracle)
    (block,) = LINEAR.synthesise(task)
    check_block(task, block)
