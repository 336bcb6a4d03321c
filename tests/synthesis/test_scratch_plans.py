"""Plans within few lines: never more lines than asked, exact clean-up, and few ANDs."""

from __future__ import annotations

import hashlib
import random
from itertools import pairwise

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from revsynth.cascade.model import PHASE
from revsynth.errors import BudgetError
from revsynth.logic.network import Network, evaluate
from revsynth.logic.network_function import NetworkFunction
from revsynth.logic.network_simulation import simulate
from revsynth.options import Oracle
from revsynth.synthesis.interface import Block, Task
from revsynth.synthesis.network import NETWORK, trade_off
from revsynth.synthesis.scratch import homes, linear_state
from revsynth.synthesis.scratch.blocks import block_of
from revsynth.synthesis.scratch.checkpoints import (
    Shape,
    blocks,
    checkpointed,
    filled_bounds,
    nested,
    one_level_ands,
)
from revsynth.synthesis.scratch.game import Game
from revsynth.synthesis.scratch.landing import Landing, landed
from revsynth.synthesis.scratch.orders import RULES, ordered
from revsynth.synthesis.scratch.pebbles import POLICIES, pebble
from revsynth.synthesis.scratch.plan import ACT, COMPUTE, ERASE, Plan, plan_of
from revsynth.synthesis.scratch.planner import Planner
from revsynth.synthesis.scratch.units import Units, selected, units_of, with_tails, without_sums
from tests import sha256_network
from tests.synthesis.checks import check_block
from tests.synthesis.random_networks import as_function, networks
from tests.synthesis.wide_networks import (
    factored_clauses,
    planted_clauses,
    product,
    product_equals,
    sha256_first_word_is,
    sum_equals,
)

PLANNED_FORMS: tuple[Oracle, ...] = ("phase", "bit", "fresh")


def cuts(network: Network) -> list[Units]:
    """All ways to cut a network into units."""
    with_sums = with_tails(units_of(network, 2))
    bare = [units_of(network, threshold) for threshold in (2, 3, None)]
    return [*bare, with_sums, without_sums(with_sums)]


def some_plans(units: Units, landing: Landing, budget: int, seed: int) -> list[Plan]:
    """Plans of all families; those made for a budget keep it."""
    game = Game.of(units, landing)
    runs: list[tuple[list[int], str, int]] = []
    for policy in POLICIES:
        operations = pebble(game, budget, policy, seed)
        if operations is not None:
            runs.append((operations, policy, budget))
    for parts in ((2,), (3,), (2, 2), (3, 2), (2, 2, 2)):
        runs.append((checkpointed(game, nested(game, Shape(parts, 0.8, 0.3))), f"{parts}", game.size))
    bounds = filled_bounds(game, budget, max(1, budget - 1))
    if bounds is not None:
        runs.append((checkpointed(game, blocks(bounds)), "filled", budget))
    plans = []
    for operations, name, most in runs:
        plan = plan_of(units, operations, name, landing.lines)
        assert plan.peak <= most
        if name == "filled" and bounds is not None:
            assert plan.ands <= one_level_ands(game, bounds)
        plans.append(plan)
    return plans


@pytest.mark.parametrize("oracle", PLANNED_FORMS)
@given(data=st.data())
def test_every_plan_is_carried_out_exactly_both_ways(oracle: Oracle, data: st.DataObject) -> None:
    network = data.draw(networks(1 if oracle == "phase" else None, most_gates=18))
    task = Task(as_function(network), oracle, network=NetworkFunction(network))
    units = data.draw(st.sampled_from(cuts(network)))
    units = selected(units, ordered(units, data.draw(st.sampled_from((*RULES, "any"))), 5))
    landing = Landing()
    if oracle == "fresh":
        units, landing = landed(units, keep=False)
    budget = data.draw(st.integers(1, max(1, len(units))))
    for plan in some_plans(units, landing, budget, data.draw(st.integers(0, 3))):
        for carry_out in (homes.carry_out, linear_state.carry_out):
            sheet = carry_out(units, plan.operations, landing, oracle == "phase")
            block = block_of(sheet, units, oracle, plan.name, positive=False)
            assert block.work <= plan.peak
            if block.cascade.lines <= 14:
                check_block(task, block)


@given(data=st.data())
def test_without_a_mirror_the_inputs_come_back_and_garbage_is_kept(data: st.DataObject) -> None:
    network = data.draw(networks(most_gates=18))
    task = Task(as_function(network), "compute", network=NetworkFunction(network))
    units = data.draw(st.sampled_from(cuts(network)))
    budget = data.draw(st.integers(1, max(1, len(units))))
    for plan in some_plans(units, Landing(), budget, data.draw(st.integers(0, 3))):
        sheet = homes.carry_out_once(units, plan.operations)
        block = block_of(sheet, units, "compute", plan.name, positive=False, mirrored=False)
        assert block.keep + block.work <= plan.peak
        if block.cascade.lines <= 14:
            check_block(task, block)


@given(data=st.data())
def test_a_budget_is_kept_or_refused_with_what_is_needed(data: st.DataObject) -> None:
    oracle = data.draw(st.sampled_from(("phase", "bit", "fresh", "compute")))
    network = data.draw(networks(1 if oracle == "phase" else None, most_gates=20))
    bare = network.inputs + (0 if oracle == "phase" else len(network.outputs))
    lines = bare + data.draw(st.integers(0, 8))
    task = Task(as_function(network), oracle, lines=lines, effort="low", network=NetworkFunction(network))
    try:
        found = NETWORK.synthesise(task)
    except BudgetError as error:
        needed = int(str(error).partition("at least ")[2].split()[0])
        assert needed > lines
        return
    assert found
    for block in found:
        assert block.cascade.lines <= lines
        if block.cascade.lines <= 14:
            check_block(task, block)


def test_a_broken_plan_is_noticed() -> None:
    units = units_of(product_equals(2, 3), None)
    whole = [3 * unit + COMPUTE for unit in range(len(units))]
    acts = [3 * act + ACT for act in range(len(units.acts))]
    with pytest.raises(AssertionError, match="forgets an output"):
        plan_of(units, whole, "short")
    with pytest.raises(AssertionError, match="reads what is not there"):
        plan_of(units, acts, "early")
    with pytest.raises(AssertionError, match="comes twice"):
        plan_of(units, [*whole, whole[0], *acts], "twice")
    with pytest.raises(AssertionError, match="comes twice"):
        plan_of(units, [ERASE, *whole, *acts], "nothing there")


def signs(block: Block, inputs: list[int]) -> int:
    """Bit i: whether the sign turns for input i; asserts that all lines end as they started.

    All inputs at once, a Python integer for each line.
    """
    cascade = block.cascade
    everything = (1 << len(inputs)) - 1
    rows = [0] * cascade.lines
    for sample, value in enumerate(inputs):
        for bit in range(block.inputs):
            rows[bit] |= (value >> bit & 1) << sample
    before = list(rows)
    turned = 0
    offset, control = cascade.offset.tolist(), cascade.control.tolist()
    for gate, target in enumerate(cascade.target.tolist()):
        holds = everything
        for literal in control[offset[gate] : offset[gate + 1]]:
            row = rows[literal >> 1]
            holds &= row ^ everything if literal & 1 else row
        if target == PHASE:
            turned ^= holds
        else:
            rows[target] ^= holds
    assert rows == before
    return turned


def check_predicate(block: Block, network: Network, marked: list[int], seed: int) -> None:
    """Lines unchanged and the sign right, on satisfying inputs, their neighbours, and random ones."""
    draw = random.Random(seed)
    samples = list(marked[:8])
    for value in marked[:4]:
        samples.extend(value ^ 1 << draw.randrange(network.inputs) for _ in range(6))
    while len(samples) < 64:
        samples.append(draw.getrandbits(network.inputs))
    turned = signs(block, samples)
    rows = simulate(network, input_words(samples, network.inputs))
    assert turned == int(rows[0, 0])
    assert all(turned >> sample & 1 for sample in range(len(marked[:8])))


def input_words(samples: list[int], inputs: int) -> np.ndarray:
    """64 samples as one word an input."""
    rows = [sum((value >> bit & 1) << i for i, value in enumerate(samples)) for bit in range(inputs)]
    return np.array(rows, dtype=np.uint64).reshape(inputs, 1)


def best_block(network: Network, lines: int) -> tuple[Block, int]:
    """(the first block within so many lines, its T with measured erasure)."""
    task = Task(None, "phase", lines=lines, network=NetworkFunction(network))
    block = NETWORK.synthesise(task)[0]
    assert block.cascade.lines <= lines
    controls = np.diff(block.cascade.offset)
    products = int(np.count_nonzero((controls == 2) & (block.cascade.target != PHASE)))
    assert products % 2 == 0
    # Each AND is computed as often as it is erased, and only the computing costs.
    return block, 2 * products


@pytest.mark.quality
@pytest.mark.parametrize(("lines", "most"), [(125, 244), (110, 304), (95, 364), (86, 400), (80, 424)])
def test_a_sum_compared_with_a_constant_on_few_lines(lines: int, most: int) -> None:
    value = 2863311530
    network = sum_equals(32, value)
    block, t = best_block(network, lines)
    assert t <= most
    draw = random.Random(lines)
    firsts = [draw.getrandbits(32) for _ in range(8)]
    check_predicate(block, network, [a | ((value - a) & 0xFFFFFFFF) << 32 for a in firsts], lines)


@pytest.mark.quality
@pytest.mark.parametrize(("lines", "most"), [(150, 536), (117, 668), (84, 800)])
def test_a_product_compared_with_a_constant_on_few_lines(lines: int, most: int) -> None:
    network = product_equals(8, 58483)
    block, t = best_block(network, lines)
    assert t <= most
    marked = [a | b << 8 for a in range(256) for b in range(256) if a * b == 58483]
    check_predicate(block, network, marked, lines)


@pytest.mark.quality
@pytest.mark.parametrize(("lines", "most"), [(143, 492), (99, 668), (73, 772), (53, 852)])
def test_clauses_on_few_lines(lines: int, most: int) -> None:
    clauses, planted = planted_clauses(20, 91, 1)
    network = factored_clauses(20, clauses)
    block, t = best_block(network, lines)
    assert t <= most
    check_predicate(block, network, [sum(bit << i for i, bit in enumerate(planted))], lines)


def hash_predicate(rounds: int) -> tuple[Network, int]:
    """(whether the first word after so many rounds is that of a message, the message as an input)."""
    message = b"beacon"
    padded = message + b"\x80" + bytes(55 - len(message)) + (8 * len(message)).to_bytes(8, "big")
    words = [int.from_bytes(padded[4 * i : 4 * i + 4], "big") for i in range(16)]
    marked = sum(word << 32 * i for i, word in enumerate(words))
    digest = evaluate(sha256_network.build(rounds).select(range(32)), [marked >> i & 1 for i in range(512)])
    return sha256_first_word_is(sum(bit << i for i, bit in enumerate(digest)), rounds), marked


@pytest.mark.quality
def test_some_rounds_of_a_hash_within_a_third_of_the_lines() -> None:
    network, marked = hash_predicate(18)
    block, t = best_block(network, 3250)
    assert t <= 34_300
    check_predicate(block, network, [marked], 1)


@pytest.mark.quality
@pytest.mark.slow
def test_a_hash_predicate_within_a_fifth_of_the_lines() -> None:
    network, marked = hash_predicate(64)
    block, t = best_block(network, 8600)
    assert t <= 156_500
    check_predicate(block, network, [marked], 1)


def test_the_hash_network_is_that_of_the_standard() -> None:
    """Against the standard library's SHA-256 (FIPS 180-4)."""
    network, marked = hash_predicate(64)
    assert evaluate(network, [marked >> i & 1 for i in range(512)]) == [1]
    first = int.from_bytes(hashlib.sha256(b"beacon").digest()[:4], "big")
    assert evaluate(sha256_first_word_is(first), [marked >> i & 1 for i in range(512)]) == [1]


@pytest.mark.parametrize("oracle", [*PLANNED_FORMS, "compute"])
def test_the_curve_falls_and_a_task_reaches_its_points(oracle: Oracle) -> None:
    network = product_equals(4, 143) if oracle == "phase" else product(4)
    points = trade_off(Task(None, oracle, effort="low", network=NetworkFunction(network)))
    assert len(points) >= 3
    for one, other in pairwise(points):
        assert one.qubits < other.qubits
        assert one.t_measured > other.t_measured or (other is points[-1] and one.cnots > other.cnots)
    for point in (points[0], points[len(points) // 2], points[-1]):
        task = Task(None, oracle, lines=point.qubits, effort="low", network=NetworkFunction(network))
        blocks_there = NETWORK.synthesise(task)
        assert all(block.cascade.lines <= point.qubits for block in blocks_there)
        products = min(int(np.count_nonzero(np.diff(block.cascade.offset) == 2)) for block in blocks_there)
        assert 4 * products <= point.t_unitary + 4 * len(network.outputs)


def test_plans_are_the_same_again() -> None:
    network = product_equals(5, 667)
    one = Planner(network, "phase", "low", 3).best(32)
    other = Planner(network, "phase", "low", 3).best(32)
    assert [found.plan for found in one] == [found.plan for found in other]
    assert one
