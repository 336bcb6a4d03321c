"""Exclusive sums of products as gates: one gate a product, and what products are paid by."""

from __future__ import annotations

from collections.abc import Iterator, Sequence

import numpy as np

from revsynth.cascade.model import PHASE, Gate, literal
from revsynth.cascade.price import gate_t
from revsynth.logic.cubes import Cube, ExclusiveSum
from revsynth.logic.exclusive_sum import cube_prices
from revsynth.logic.function import Function
from revsynth.options import Controls, Uncompute
from revsynth.synthesis.interface import Task

GROUP_OUTPUTS = 16
"""Outputs that are minimised together, at most: more seldom share cubes, and cubes must fit 64-bit codes."""
_NEAREST_LIMIT = 3000


def t_prices(inputs: int, uncompute: Uncompute, *, phase: bool) -> tuple[int, ...]:
    """Prices by number of literals that make the T count small, then the cubes, then the literals.

    phase: a cube of k literals is a controlled Z, which costs what a NOT with k - 1 controls does.
    """
    controls = [max(size - 1, 0) if phase else size for size in range(inputs + 1)]
    return tuple(64 * gate_t(count, uncompute) + 32 + size for size, count in enumerate(controls))


def prices_for(inputs: int, uncompute: Uncompute, *, least_t: bool) -> tuple[int, ...]:
    """Prices of cubes onto a line by number of literals: for the least T, or for the fewest cubes."""
    return t_prices(inputs, uncompute, phase=False) if least_t else cube_prices(inputs)


def output_groups(function: Function) -> list[Function]:
    """The function cut into runs of outputs that fit one sum; none for a function without outputs."""
    size = min(GROUP_OUTPUTS, 64 - 2 * function.inputs)
    return [
        Function(
            function.inputs,
            min(size, function.outputs - start),
            function.values[start : start + size],
            function.care[start : start + size],
            function.domain,
        )
        for start in range(0, function.outputs, size)
    ]


def to_gates(sums: Sequence[ExclusiveSum], inputs: int, task: Task) -> Iterator[Gate]:
    """The gates of the sums of all groups of outputs, group by group."""
    first = inputs
    for cubes in sums:
        if task.oracle == "phase":
            yield from conjugated([(PHASE, cube) for cube in _in_gate_order(cubes)], task.controls)
        else:
            yield from onto_outputs(cubes, first, task)
        first += cubes.outputs


def _in_gate_order(cubes: ExclusiveSum) -> list[Cube]:
    """Cubes with like controls side by side, the lowest lines compared first."""
    return sorted(cubes, key=lambda cube: (_controls(cube), cube.feeds))


def _controls(cube: Cube) -> tuple[int, ...]:
    return tuple(
        literal(i, not cube.value >> i & 1) for i in range(cube.care.bit_length()) if cube.care >> i & 1
    )


def onto_outputs(cubes: ExclusiveSum, first: int, task: Task) -> Iterator[Gate]:
    """All cubes that feed the same outputs together: CNOTs, the cubes onto one of the outputs, CNOTs again.

    Where outputs start in 0, a line not written yet copies nothing, so the CNOTs before are left out: the
    widest groups come first to make use of it.
    """
    groups: dict[int, list[Cube]] = {}
    for cube in _in_gate_order(cubes):
        groups.setdefault(cube.feeds, []).append(cube)
    zero_at_start = task.oracle in ("fresh", "compute", "embedded")
    written: set[int] = set()
    pending: list[Gate] = []
    for feeds in sorted(groups, key=lambda feeds: (-feeds.bit_count(), feeds)):
        lines = [first + j for j in range(feeds.bit_length()) if feeds >> j & 1]
        unwritten = [line for line in lines if line not in written] if zero_at_start else []
        root = (unwritten or lines)[0]
        spread = [Gate(line, (literal(root),)) for line in lines if line != root]
        if not unwritten:
            pending = _joined(pending, spread)
        yield from pending
        yield from conjugated([(root, cube) for cube in groups[feeds]], task.controls)
        pending = spread
        written.update(lines)
    yield from pending


def _joined(before: list[Gate], after: list[Gate]) -> list[Gate]:
    """Two runs of CNOTs, each from one line, one after the other: equal ones cancel where it is the same."""
    if before and after and before[0].controls == after[0].controls:
        return [gate for gate in before if gate not in after] + [gate for gate in after if gate not in before]
    return before + after


def conjugated(cubes: list[tuple[int, Cube]], controls: Controls) -> Iterator[Gate]:
    """One gate a (target, cube); with positive controls only, X gates around, kept while they are of use."""
    if controls == "mixed":
        for target, cube in cubes:
            yield Gate(target, _controls(cube))
        return
    turned = 0
    for target, cube in _by_turning(cubes):
        change = (turned ^ ~cube.value) & cube.care
        yield from _turns(change)
        turned ^= change
        yield Gate(target, tuple(control & ~1 for control in _controls(cube)))
    yield from _turns(turned)


def _by_turning(cubes: list[tuple[int, Cube]]) -> Iterator[tuple[int, Cube]]:
    """An order with few turns of lines: the cube that needs the fewest next; as it is for very many cubes."""
    if len(cubes) > _NEAREST_LIMIT:
        yield from cubes
        return
    care = np.array([cube.care for _, cube in cubes], dtype=np.uint64)
    value = np.array([cube.value for _, cube in cubes], dtype=np.uint64)
    waiting = np.ones(len(cubes), dtype=bool)
    turned = np.uint64(0)
    for _ in range(len(cubes)):
        turns = np.bitwise_count((turned ^ ~value) & care).astype(np.int64)
        turns[~waiting] = 1 << 20
        choice = int(turns.argmin())
        waiting[choice] = False
        turned ^= (turned ^ ~value[choice]) & care[choice]
        yield cubes[choice]


def _turns(lines: int) -> Iterator[Gate]:
    for line in range(lines.bit_length()):
        if lines >> line & 1:
            yield Gate(line)
