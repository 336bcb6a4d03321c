"""What any block of any method must do, checked state by state with the slow simulator."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from revsynth.logic.function import Function
from revsynth.logic.truth_table import pack, pack_values, unpack, unpack_values
from revsynth.synthesis.interface import Block, Task
from tests.slow_simulator import run_cascade


def from_table(
    inputs: int, outputs: int, values: Sequence[int | None] | np.ndarray, care: Sequence[int] | None = None
) -> Function:
    """A function from its table, None where free; `care` may free single bits instead."""
    full = (1 << outputs) - 1
    mask = np.array([0 if v is None else full for v in values] if care is None else care, dtype=np.int64)
    numbers = np.array([0 if v is None else int(v) for v in values], dtype=np.int64) & mask
    return Function(
        inputs, outputs, pack_values(numbers, outputs), pack_values(mask, outputs), pack(mask != 0)
    )


def check_block(task: Task, block: Block) -> None:
    """Assert that the block does what its oracle form promises, for every input."""
    function = task.function
    values = unpack_values(function.values, function.inputs).tolist()
    care = unpack_values(function.care, function.inputs).tolist()
    if task.lines is not None:
        assert block.cascade.lines <= task.lines
    if task.controls == "positive":
        assert not np.any(block.cascade.control & 1), "a negative control"
    for x, (value, mask) in enumerate(zip(values, care, strict=True)):
        if task.oracle == "phase":
            _check_phase(block, x, value, mask)
        elif task.oracle in ("bit", "fresh", "compute"):
            _check_added(task, block, x, value, mask)
        elif task.oracle == "inplace":
            after, sign = run_cascade(block.cascade, x)
            if mask:
                assert sign == 1
                assert after & mask == value
                assert after >> function.inputs == 0
        else:
            _check_embedded(block, x, value, mask)


def _check_phase(block: Block, x: int, value: int, mask: int) -> None:
    after, sign = run_cascade(block.cascade, x)
    assert after == x, f"input {x} or scratch changed: {after}"
    if mask:
        assert sign == (-1 if value else 1), f"input {x}"


def _check_added(task: Task, block: Block, x: int, value: int, mask: int) -> None:
    inputs, outputs = task.function.inputs, task.function.outputs
    added: set[int] = set()
    for y in range(1 << outputs) if task.oracle == "bit" else (0,):
        after, sign = run_cascade(block.cascade, x | (y << inputs))
        assert sign == 1
        assert after & ((1 << inputs) - 1) == x, f"input {x} changed"
        word = (after >> inputs) & ((1 << outputs) - 1)
        kept = inputs + outputs + (block.keep if task.oracle == "compute" else 0)
        assert after >> kept == 0, f"scratch is left dirty at input {x}"
        assert (word ^ y) & mask == value, f"input {x}, output {y}"
        added.add(word ^ y)
    assert len(added) == 1


def _check_embedded(block: Block, x: int, value: int, mask: int) -> None:
    place = block.placement
    assert place is not None
    assert sorted([*place.before, *(line for line, _ in place.preset)]) == list(range(block.inputs))
    assert len(set(place.after)) == len(place.after)
    state = sum(((x >> bit) & 1) << line for bit, line in enumerate(place.before))
    state |= sum(bit << line for line, bit in place.preset)
    after, sign = run_cascade(block.cascade, state)
    assert sign == 1
    word = sum(((after >> line) & 1) << bit for bit, line in enumerate(place.after))
    assert word & mask == value, f"input {x}"
    assert after >> block.inputs == 0


def is_bijective(values: Sequence[int]) -> bool:
    """Whether no value occurs twice."""
    return len(set(values)) == len(values)


def unpacked(function: Function) -> list[int]:
    """The first output's table."""
    return unpack(function.values[0], function.inputs).tolist()
