"""One body for every method in the list: its blocks do what the task says, also when shortened."""

from __future__ import annotations

from collections.abc import Iterator

import pytest
from hypothesis import given
from hypothesis import strategies as st

from revsynth.errors import UndecidedError
from revsynth.options import Aim, BuildOptions, Controls, Effort, Oracle
from revsynth.shortening import shorten
from revsynth.synthesis import optimal
from revsynth.synthesis.interface import Method, Task
from revsynth.synthesis.methods import METHODS
from tests.synthesis.checks import check_block, from_table

ORACLES: tuple[Oracle, ...] = ("phase", "bit", "fresh", "compute", "inplace", "embedded")


@pytest.fixture(scope="module", autouse=True)
def _a_small_table() -> Iterator[None]:
    """Of four lines: up to eight gates at once."""
    with pytest.MonkeyPatch.context() as patch:
        patch.setattr(optimal, "SIZE", 4)
        yield


@st.composite
def tasks(draw: st.DrawFn, oracle: Oracle) -> Task:
    """A task on at most 4 inputs, with free values, affine about half the time."""
    inputs = draw(st.integers(1, 4))
    outputs = 1 if oracle == "phase" else inputs if oracle == "inplace" else draw(st.integers(1, 3))
    size, full = 1 << inputs, (1 << outputs) - 1
    if draw(st.booleans()):
        rows = [draw(st.integers(0, full)) for _ in range(inputs)]
        constant = draw(st.integers(0, full))
        values: list[int | None] = []
        for x in range(size):
            value = constant
            for bit, row in enumerate(rows):
                value ^= row * ((x >> bit) & 1)
            values.append(value)
    elif oracle == "inplace":
        values = list(draw(st.permutations(range(size))))
    else:
        values = [draw(st.integers(0, full)) for _ in range(size)]
    for x in draw(st.lists(st.integers(0, size - 1), max_size=4)):
        values[x] = None
    controls: Controls = draw(st.sampled_from(["mixed", "positive"]))
    function = from_table(inputs, outputs, values)
    effort: Effort = draw(st.sampled_from(["low", "low", "low", "normal"]))
    aim: Aim = draw(st.sampled_from(["t", "gates", "qubits"]))
    return Task(function, oracle, controls=controls, aim=aim, effort=effort)


@pytest.mark.parametrize("method", METHODS, ids=lambda method: method.name)
@pytest.mark.parametrize("oracle", ORACLES)
@given(data=st.data())
def test_what_a_method_gives_does_what_the_task_says(
    method: Method, oracle: Oracle, data: st.DataObject
) -> None:
    task = data.draw(tasks(oracle))
    if method.unfit(task) is not None:
        return
    try:
        blocks = method.synthesise(task)
    except UndecidedError:
        assert method is optimal.OPTIMAL
        return
    assert blocks
    again = method.synthesise(task)
    options = BuildOptions(controls=task.controls)
    for block, second in zip(blocks, again, strict=True):
        assert block.cascade == second.cascade
        check_block(task, block)
        check_block(task, shorten(block, oracle, options))


@pytest.mark.parametrize("oracle", ORACLES)
def test_some_method_serves_every_oracle(oracle: Oracle) -> None:
    values = [2, 0, 3, 1] if oracle != "phase" else [0, 1, 1, 0]
    task = Task(from_table(2, 1 if oracle == "phase" else 2, values), oracle)
    assert any(method.unfit(task) is None for method in METHODS)
