"""The method `products`: blocks simulated state by state, shared products, recorded figures."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from revsynth.cascade import PHASE, Gate
from revsynth.cascade.price import cascade_t, gate_t
from revsynth.embed.in_place import fewest_lines
from revsynth.logic.cubes import Cube, ExclusiveSum
from revsynth.logic.function import Function
from revsynth.logic.normal_form import algebraic_normal_form, count_by_size
from revsynth.logic.truth_table import ALL_ONES, ones
from revsynth.options import Controls, Oracle
from revsynth.synthesis.interface import Task
from revsynth.synthesis.product_gates import output_groups, t_prices, to_gates
from revsynth.synthesis.products import PRODUCTS, positive_forms
from tests.logic.tables import from_rule, function_of, functions, random_function
from tests.synthesis.checks import check_block, from_table


@given(
    functions(max_inputs=4, max_outputs=3),
    st.sampled_from(["phase", "bit", "fresh", "compute"]),
    st.sampled_from(["mixed", "positive"]),
    st.sampled_from(["t", "gates"]),
)
def test_every_block_does_what_its_oracle_promises(
    function: Function, oracle: Oracle, controls: Controls, aim: str
) -> None:
    task = Task(function, oracle, controls=controls, aim=aim, effort="low")  # type: ignore[arg-type]
    if PRODUCTS.unfit(task) is not None:
        assert oracle == "phase"
        assert function.outputs != 1
        return
    blocks = PRODUCTS.synthesise(task)
    assert blocks
    for block in blocks:
        check_block(task, block)


@pytest.mark.parametrize("oracle", ["phase", "bit", "fresh"])
@pytest.mark.parametrize("controls", ["mixed", "positive"])
def test_six_inputs(oracle: Oracle, controls: Controls) -> None:
    task = Task(random_function(6, seed=1, free=0.1), oracle, controls=controls)
    for block in PRODUCTS.synthesise(task):
        check_block(task, block)


def gates_of(cubes: list[Cube], oracle: Oracle, controls: Controls = "mixed") -> list[Gate]:
    outputs = max(cube.feeds for cube in cubes).bit_length()
    total = ExclusiveSum.of(2, outputs, cubes)
    function = function_of(2, [[0] * 4] * outputs)
    return list(to_gates([total], 2, Task(function, oracle, controls=controls)))


def test_each_product_of_a_phase_oracle_is_one_controlled_z() -> None:
    assert gates_of([Cube(0b11, 0b01), Cube(0, 0)], "phase") == [Gate(PHASE), Gate(PHASE, (0, 3))]


def test_a_product_for_two_outputs_is_computed_once() -> None:
    # y1 ^= y0, y0 ^= ab, y1 ^= y0: two CNOTs instead of a second Toffoli
    shared = [Cube(0b11, 0b11, 0b11)]
    assert gates_of(shared, "bit") == [Gate(3, (4,)), Gate(2, (0, 2)), Gate(3, (4,))]
    # from outputs in 0 the first copy would copy nothing
    assert gates_of(shared, "fresh") == [Gate(2, (0, 2)), Gate(3, (4,))]
    assert gates_of([*shared, Cube(0b01, 0b01, 0b10)], "fresh") == [
        Gate(2, (0, 2)),
        Gate(3, (4,)),
        Gate(3, (0,)),
    ]


def test_a_normal_form_is_offered_whole_or_not_at_all() -> None:
    coefficients = np.full((1, 1 << 11), ALL_ONES ^ np.uint64(1 << 63))
    values = algebraic_normal_form(coefficients, 17)
    part = Function(17, 1, values, ones(17)[None], ones(17))
    products = int(count_by_size(coefficients, 17).sum())
    assert products > 1 << 16
    whole = positive_forms([part], [products])
    assert whole is not None
    assert len(whole[0]) == products
    assert np.all(whole[0].feeds == 1)
    assert positive_forms([part], [products - 1]) is None


def test_positive_controls_turn_lines_and_turn_them_back_once() -> None:
    gates = gates_of([Cube(0b11, 0b01), Cube(0b10, 0b00)], "phase", "positive")
    assert gates.count(Gate(1)) == 2
    assert not any(control & 1 for gate in gates for control in gate.controls)
    assert len(gates) == 4


def test_unfit_says_why() -> None:
    function = from_table(2, 2, [1, 0, 2, 3])
    assert "nothing can be 'inplace'" in str(PRODUCTS.unfit(Task(function, "inplace")))
    assert PRODUCTS.unfit(Task(function, "embedded", lines=1)) == "products need 2 lines, 1 allowed"
    assert "needs one output bit, not 2" in str(PRODUCTS.unfit(Task(function, "phase")))
    assert PRODUCTS.unfit(Task(function, "bit", lines=3)) == "products need 4 lines, 3 allowed"
    assert PRODUCTS.unfit(Task(function, "bit", lines=4)) is None


def test_many_outputs_are_taken_in_groups() -> None:
    function = random_function(3, seed=1, outputs=40)
    assert [part.outputs for part in output_groups(function)] == [16, 16, 8]
    task = Task(function, "fresh", effort="low")
    block = PRODUCTS.synthesise(task)[0]
    assert block.cascade.lines == 43
    check_block(task, block)


def test_prices_are_those_of_the_lowered_gates() -> None:
    for phase in (False, True):
        prices = t_prices(6, "unitary", phase=phase)
        assert [price // 64 for price in prices] == [
            gate_t(max(k - 1, 0) if phase else k, "unitary") for k in range(7)
        ]


def test_the_same_task_gives_the_same_blocks() -> None:
    task = Task(random_function(7, seed=2, outputs=2), "bit", seed=9)
    assert [b.cascade for b in PRODUCTS.synthesise(task)] == [b.cascade for b in PRODUCTS.synthesise(task)]


# Outside facts (common practice): BCD to 7 segments; the carry of an adder is a majority.


def test_bcd_to_seven_segments() -> None:
    """Segments a ... g as bits 0 ... 6, digits 6 and 9 with their tails; inputs above 9 are free."""
    digits = [0x3F, 0x06, 0x5B, 0x4F, 0x66, 0x6D, 0x7D, 0x07, 0x7F, 0x6F]
    task = Task(from_table(4, 7, [*digits, *[None] * 6]), "fresh")
    for block in PRODUCTS.synthesise(task):
        check_block(task, block)
    assert min(cascade_t(block.cascade, "measured") for block in PRODUCTS.synthesise(task)) <= 28


def test_a_full_adder_takes_three_toffolis() -> None:
    """The carry is a majority, ab + ac + bc, and no exclusive sum of it is shorter; the sum takes CNOTs."""
    table = [x.bit_count() for x in range(8)]
    task = Task(from_table(3, 2, table), "bit")
    block = PRODUCTS.synthesise(task)[0]
    check_block(task, block)
    assert sum(len(gate.controls) == 2 for gate in block.cascade) == 3


@pytest.mark.quality
@pytest.mark.parametrize(
    ("inputs", "oracle", "recorded"),
    [
        (4, "bit", 21.2),
        (5, "bit", 50.4),
        (6, "bit", 112.4),
        (7, "bit", 247.6),
        (8, "bit", 573.6),
        (8, "phase", 428.4),
    ],
)
def test_mean_t_of_random_predicates(inputs: int, oracle: Oracle, recorded: float) -> None:
    """T with measured erasure, mean over 10 random functions (seeds 0-9); may fall, never rise."""
    total = 0
    for seed in range(10):
        task = Task(random_function(inputs, seed), oracle, uncompute="measured")
        total += min(cascade_t(block.cascade, "measured") for block in PRODUCTS.synthesise(task))
    assert total / 10 <= recorded, f"{total / 10} T, recorded {recorded}"


@pytest.mark.quality
def test_a_sixteen_input_predicate_stays_small() -> None:
    rule = from_rule(16, lambda x: (x & 255) * (x >> 8) == 59 * 61)
    blocks = PRODUCTS.synthesise(Task(rule, "phase", uncompute="measured"))
    assert len(blocks[0].cascade) == 2
    assert np.all(blocks[0].cascade.target == PHASE)


def test_a_predicate_whose_values_are_uneven_is_embedded_with_the_fewest_lines() -> None:
    function = from_rule(5, lambda x: x % 7 == 3)
    task = Task(function, "embedded")
    blocks = PRODUCTS.synthesise(task)
    for block in blocks:
        check_block(task, block)
        assert block.cascade.lines == fewest_lines(function) == 6
