"""Functions and columns for the tests of this room: random ones, chosen ones, and slow evaluators."""

from __future__ import annotations

from collections.abc import Callable

import numpy as np
from hypothesis import strategies as st

from revsynth.logic.cubes import Cube, ExclusiveSum
from revsynth.logic.function import Function
from revsynth.logic.truth_table import Column, Columns, ones, pack, words_for


def columns_of(inputs: int, tables: list[list[int]]) -> Columns:
    """Pack 0/1 tables, input 0 first, one row each."""
    rows = [pack(np.array(table, dtype=np.uint8)) for table in tables]
    return np.array(rows, dtype=np.uint64).reshape(len(rows), words_for(inputs))


def function_of(inputs: int, values: list[list[int]], care: list[list[int]] | None = None) -> Function:
    """A function from tables of values and of what is fixed; the domain is every input."""
    care = [[1] * (1 << inputs) for _ in values] if care is None else care
    fixed = [[v & c for v, c in zip(row, mask, strict=True)] for row, mask in zip(values, care, strict=True)]
    return Function(inputs, len(values), columns_of(inputs, fixed), columns_of(inputs, care), ones(inputs))


def from_rule(inputs: int, rule: Callable[[np.ndarray], np.ndarray]) -> Function:
    """A complete predicate from a rule over all input numbers."""
    column = pack(rule(np.arange(1 << inputs)).astype(np.uint8))
    return Function(inputs, 1, column[None].copy(), ones(inputs)[None].copy(), ones(inputs))


def random_column(inputs: int, seed: int) -> Column:
    """A random function, the same for a seed wherever it is run."""
    bits = np.random.Generator(np.random.PCG64(seed)).integers(0, 2, size=1 << inputs, dtype=np.uint8)
    return pack(bits)


def random_function(inputs: int, seed: int, outputs: int = 1, free: float = 0.0) -> Function:
    """A random function; each value is free with the chance `free`."""
    source = np.random.Generator(np.random.PCG64(seed))
    values = source.integers(0, 2, size=(outputs, 1 << inputs), dtype=np.uint8)
    care = (source.random(size=(outputs, 1 << inputs)) >= free).astype(np.uint8)
    return function_of(inputs, values.tolist(), care.tolist())


def slow_value(cubes: ExclusiveSum, x: int) -> int:
    """The output bits at one input, cube by cube."""
    total = 0
    for cube in cubes:
        if x & cube.care == cube.value:
            total ^= cube.feeds
    return total


@st.composite
def tables(draw: st.DrawFn, max_inputs: int = 8, max_outputs: int = 1) -> tuple[int, list[list[int]]]:
    """(inputs, 0/1 tables of 1 ... max_outputs outputs)."""
    inputs = draw(st.integers(0, max_inputs))
    outputs = draw(st.integers(1, max_outputs))
    size = 1 << inputs
    numbers = [draw(st.integers(0, (1 << size) - 1)) for _ in range(outputs)]
    return inputs, [[number >> x & 1 for x in range(size)] for number in numbers]


@st.composite
def functions(draw: st.DrawFn, max_inputs: int = 6, max_outputs: int = 3) -> Function:
    """A function with 0 ... max_outputs outputs, values free here and there."""
    inputs = draw(st.integers(0, max_inputs))
    outputs = draw(st.integers(0, max_outputs))
    size = 1 << inputs
    numbers = [draw(st.integers(0, (1 << size) - 1)) for _ in range(outputs)]
    masks = [
        draw(st.one_of(st.just((1 << size) - 1), st.integers(0, (1 << size) - 1))) for _ in range(outputs)
    ]
    rows = [[[n >> x & 1 for x in range(size)] for n in group] for group in (numbers, masks)]
    return function_of(inputs, rows[0], rows[1])


@st.composite
def sums(draw: st.DrawFn, max_inputs: int = 6, max_outputs: int = 3, max_cubes: int = 12) -> ExclusiveSum:
    """Any exclusive sum, equal and needless cubes included."""
    inputs = draw(st.integers(0, max_inputs))
    outputs = draw(st.integers(1, max_outputs))
    top = (1 << inputs) - 1
    cubes = []
    for _ in range(draw(st.integers(0, max_cubes))):
        care = draw(st.integers(0, top))
        cubes.append(Cube(care, draw(st.integers(0, top)) & care, draw(st.integers(1, (1 << outputs) - 1))))
    return ExclusiveSum.of(inputs, outputs, cubes)
