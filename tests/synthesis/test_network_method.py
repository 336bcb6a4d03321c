"""The network method: its blocks do what the network says in every oracle form, in few lines and CNOTs."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from revsynth.cascade.model import PHASE, Cascade
from revsynth.logic.function import Function
from revsynth.logic.network import Network
from revsynth.logic.network_function import NetworkFunction
from revsynth.options import Controls, Oracle
from revsynth.synthesis.interface import Block, Task
from revsynth.synthesis.network import NETWORK
from revsynth.synthesis.scratch.from_table import network_function
from revsynth.synthesis.scratch.realise import held
from tests.naive_networks import aes_sbox
from tests.slow_simulator import run_cascade
from tests.synthesis.checks import check_block, from_table
from tests.synthesis.random_networks import as_function, networks
from tests.synthesis.wide_networks import adder, sha256_first_word_is, sum_equals

FORMS: tuple[Oracle, ...] = ("phase", "bit", "fresh", "compute")
SLOW_LINES = 16
"""The slow simulator goes through all states up to here."""


def counts(block: Block) -> tuple[int, int, int]:
    """(lines, CNOTs, gates that cost T)."""
    cascade: Cascade = block.cascade
    controls = np.diff(cascade.offset)
    turns = cascade.target == PHASE
    return (
        cascade.lines,
        int(np.count_nonzero((controls == 1) & ~turns)),
        int(np.count_nonzero((controls == 2) & ~turns)),
    )


@pytest.mark.parametrize("oracle", FORMS)
@given(data=st.data())
def test_every_block_does_what_the_network_says(oracle: Oracle, data: st.DataObject) -> None:
    network = data.draw(networks(1 if oracle == "phase" else None))
    controls: Controls = data.draw(st.sampled_from(["mixed", "positive"]))
    task = Task(as_function(network), oracle, controls=controls, network=NetworkFunction(network))
    blocks = NETWORK.synthesise(task)
    assert blocks
    for block in blocks:
        if block.cascade.lines <= SLOW_LINES:
            check_block(task, block)
        assert block.cascade.lines <= network.inputs + len(network.outputs) + network.gates


@pytest.mark.parametrize("oracle", FORMS)
@given(data=st.data())
def test_a_bare_table_with_free_values_is_enough(oracle: Oracle, data: st.DataObject) -> None:
    inputs = data.draw(st.integers(1, 4))
    outputs = 1 if oracle == "phase" else data.draw(st.integers(1, 2))
    size = 1 << inputs
    entry = st.none() | st.integers(0, (1 << outputs) - 1)
    values = data.draw(st.lists(entry, min_size=size, max_size=size))
    task = Task(from_table(inputs, outputs, values), oracle)
    for block in NETWORK.synthesise(task):
        if block.cascade.lines <= SLOW_LINES:
            check_block(task, block)


@given(data=st.data())
def test_values_that_do_not_count_are_free(data: st.DataObject) -> None:
    network = data.draw(networks(1))
    draw = data.draw(st.lists(st.integers(0, 1), min_size=1 << network.inputs, max_size=1 << network.inputs))
    care = network_function(from_table(network.inputs, 1, draw)).values
    table = as_function(network).values
    fixed = as_function(care).values
    function = Function(network.inputs, 1, table & fixed, fixed, fixed[0])
    task = Task(function, "phase", network=NetworkFunction(network, care))
    for block in NETWORK.synthesise(task):
        if block.cascade.lines <= SLOW_LINES:
            check_block(task, block)


def task_of(network: Network, oracle: Oracle) -> Task:
    return Task(None, oracle, network=NetworkFunction(network))


def test_forms_that_change_the_inputs_are_refused() -> None:
    reason = NETWORK.unfit(task_of(adder(2), "embedded"))
    assert reason is not None
    assert "so nothing can be 'embedded'; 'embedded' goes up to 24 input bits, by table" in reason
    reason = NETWORK.unfit(task_of(adder(2), "inplace"))
    assert reason is not None
    assert "in place" in reason


def test_what_does_not_fit_is_said() -> None:
    assert "one output bit, not 3" in (NETWORK.unfit(task_of(adder(2), "phase")) or "")
    narrow = replace(task_of(adder(2), "bit"), lines=6)
    assert NETWORK.unfit(narrow) == "a network needs 7 lines before any scratch, 6 allowed"


@pytest.mark.quality
def test_a_sum_compared_with_a_constant_folds_everything_in_place() -> None:
    """62 ANDs, the last of them a CZ: 61 scratch lines, and 63 CNOTs each way."""
    for one in held(sum_equals(32, 2863311530), "phase"):
        assert counts(one.block) == (125, 126, 122)


@pytest.mark.quality
def test_an_adder_on_fresh_outputs_needs_no_scratch() -> None:
    """One AND a bit, each on an output line; nothing is erased."""
    assert min(counts(one.block) for one in held(adder(64), "fresh")) == (193, 567, 64)


@pytest.mark.quality
def test_cnots_stay_within_three_for_each_xor() -> None:
    network = sha256_first_word_is(0x12345678)
    block = held(network, "phase")[0].block
    lines, cnots, products = counts(block)
    assert products == 2 * (network.ands - 1)
    assert cnots <= 3 * network.xors
    assert lines <= 33_300
    assert 2 * products <= 86_732


@pytest.mark.quality
def test_the_aes_substitution_from_its_bare_table() -> None:
    """FIPS 197's table, 32 ANDs: 18 of them act right on the outputs, so that 14 scratch lines are enough."""
    task = Task(from_table(8, 8, aes_sbox()), "bit")
    blocks = NETWORK.synthesise(task)
    for block in blocks:
        check_block_once(block)
    least = min(counts(block) for block in blocks)
    assert least <= (30, 326, 46)
    assert min(counts(block)[1] for block in blocks) <= 306


def check_block_once(block: Block) -> None:
    """The S-box on all inputs with outputs at a pattern that depends on them, all lines looked at."""
    for x, value in enumerate(aes_sbox()):
        start = x | (x * 37 & 255) << 8
        after, sign = run_cascade(block.cascade, start)
        assert sign == 1
        assert after == start ^ value << 8
