"""Synthesis from exclusive sums of products: every product is one gate.

In a phase oracle a product is a controlled Z on the input lines, which has no distinguished target (common
practice), so no output line is needed. Otherwise it is a NOT on an output line; a product that feeds several
outputs is computed once, on one of them, between two CNOTs to each of the others.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence

import numpy as np

from revsynth.cascade.model import PHASE, Cascade, Gate, literal
from revsynth.cascade.price import gate_t
from revsynth.embed.in_place import fewest_lines
from revsynth.logic.cubes import Cube, ExclusiveSum
from revsynth.logic.exclusive_sum import cube_prices, minimise, shorten
from revsynth.logic.function import Function
from revsynth.logic.normal_form import algebraic_normal_form, count_by_size
from revsynth.options import Controls, Uncompute
from revsynth.synthesis.interface import Block, Placement, Progress, Task, silent

GROUP_OUTPUTS = 16
"""Outputs that are minimised together, at most: more seldom share cubes, and cubes must fit 64-bit codes."""
_NEAREST_LIMIT = 3000


class Products:
    """The method `products`."""

    name = "products"

    def unfit(self, task: Task) -> str | None:
        """Why an exclusive sum cannot serve the task."""
        if task.oracle == "inplace":
            return "products are added to lines of their own, so nothing can be 'inplace'"
        if task.oracle == "embedded":
            enough = fewest_lines(task.function)
            if enough < lines_needed(task):
                return f"products need {lines_needed(task)} lines, and {enough} are enough for 'embedded'"
        if task.oracle == "phase" and task.function.outputs != 1:
            return f"a phase oracle of products needs one output bit, not {task.function.outputs}"
        needed = lines_needed(task)
        if task.lines is not None and needed > task.lines:
            return f"products need {needed} lines, {task.lines} allowed"
        return None

    def synthesise(self, task: Task, progress: Progress = silent) -> list[Block]:
        """Sums of the fewest cubes and of the least T, the better guess for the aim first.

        Raises BudgetError where the sums would be too long (`exclusive_sum.MAX_CUBES`).
        """
        by_cubes: list[ExclusiveSum] = []
        by_t: list[ExclusiveSum] = []
        inputs = task.function.inputs
        fewest = cube_prices(inputs)
        least_t = t_prices(inputs, task.uncompute, phase=task.oracle == "phase")
        groups = output_groups(task.function)
        for number, part in enumerate(groups, start=1):
            where = f" of outputs, group {number} of {len(groups)}" if len(groups) > 1 else ""
            progress(f"products: looking for few cubes{where}")
            short = minimise(part, fewest, effort=task.effort, seed=task.seed)
            by_cubes.append(short)
            progress(f"products: {len(short)} cubes, looking for few T gates{where}")
            by_t.append(_cheapest_t(part, short, least_t, task))
        found = {"fewest cubes": by_cubes, "fewest T": by_t}
        if task.controls == "positive":
            plain = positive_forms(groups, [4 * len(short) + 16 for short in by_cubes])
            if plain is not None:
                found["positive polarity"] = plain
        return _blocks(found, task)


PRODUCTS = Products()


def t_prices(inputs: int, uncompute: Uncompute, *, phase: bool) -> tuple[int, ...]:
    """Prices by number of literals that make the T count small, then the cubes, then the literals.

    phase: a cube of k literals is a controlled Z, which costs what a NOT with k - 1 controls does.
    """
    controls = [max(size - 1, 0) if phase else size for size in range(inputs + 1)]
    return tuple(64 * gate_t(count, uncompute) + 32 + size for size, count in enumerate(controls))


def lines_needed(task: Task) -> int:
    """Lines of the cascade: the inputs, and the outputs unless it is a phase oracle."""
    return task.function.inputs + (0 if task.oracle == "phase" else task.function.outputs)


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


def _cheapest_t(part: Function, short: ExclusiveSum, prices: Sequence[int], task: Task) -> ExclusiveSum:
    """From the sum of few cubes, and, where the work is small or wanted, from a start of its own."""
    if part.inputs <= 5 and part.outputs == 1:
        return minimise(part, prices, effort=task.effort, seed=task.seed)
    found = [shorten(short, prices, care=part.care, effort=task.effort, seed=task.seed)]
    if part.inputs <= 6 or task.effort == "high":
        found.append(minimise(part, prices, effort=task.effort, seed=task.seed))
    return min(found, key=lambda cubes: cubes.price(prices))


def positive_forms(parts: Sequence[Function], most: Sequence[int]) -> list[ExclusiveSum] | None:
    """The algebraic normal form of each part, free values 0; None where one has more than `most` products."""
    found: list[ExclusiveSum] = []
    for part, limit in zip(parts, most, strict=True):
        coefficients = algebraic_normal_form(part.values, part.inputs)
        if int(count_by_size(coefficients, part.inputs).sum()) > limit:
            return None
        found.append(ExclusiveSum.from_coefficients(coefficients, part.inputs, 0))
    return found


def _blocks(found: dict[str, list[ExclusiveSum]], task: Task) -> list[Block]:
    blocks: list[Block] = []
    for variant, sums in found.items():
        cascade = Cascade.from_gates(lines_needed(task), to_gates(sums, task.function.inputs, task))
        if all(cascade != block.cascade for block in blocks):
            blocks.append(_block(cascade, f"products, {variant}", task))
    if task.aim in ("t", "depth", "qubits") and len(blocks) > 1:
        blocks[0], blocks[1] = blocks[1], blocks[0]
    return blocks


def _block(cascade: Cascade, method: str, task: Task) -> Block:
    """With the roles of the form; `embedded` has the outputs on the last lines, which start in 0."""
    inputs, lines = task.function.inputs, cascade.lines
    if task.oracle != "embedded":
        return Block(cascade, method, inputs, lines - inputs)
    outputs = tuple(range(inputs, lines))
    placement = Placement(tuple(range(inputs)), tuple((line, 0) for line in outputs), outputs)
    return Block(cascade, method, lines, placement=placement)


def to_gates(sums: Sequence[ExclusiveSum], inputs: int, task: Task) -> Iterator[Gate]:
    """The gates of the sums of all groups of outputs, group by group."""
    first = inputs
    for cubes in sums:
        if task.oracle == "phase":
            yield from _conjugated([(PHASE, cube) for cube in _in_gate_order(cubes)], task.controls)
        else:
            yield from _onto_outputs(cubes, first, task)
        first += cubes.outputs


def _in_gate_order(cubes: ExclusiveSum) -> list[Cube]:
    """Cubes with like controls side by side, the lowest lines compared first."""
    return sorted(cubes, key=lambda cube: (_controls(cube), cube.feeds))


def _controls(cube: Cube) -> tuple[int, ...]:
    return tuple(
        literal(i, not cube.value >> i & 1) for i in range(cube.care.bit_length()) if cube.care >> i & 1
    )


def _onto_outputs(cubes: ExclusiveSum, first: int, task: Task) -> Iterator[Gate]:
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
        yield from _conjugated([(root, cube) for cube in groups[feeds]], task.controls)
        pending = spread
        written.update(lines)
    yield from pending


def _joined(before: list[Gate], after: list[Gate]) -> list[Gate]:
    """Two runs of CNOTs, each from one line, one after the other: equal ones cancel where it is the same."""
    if before and after and before[0].controls == after[0].controls:
        return [gate for gate in before if gate not in after] + [gate for gate in after if gate not in before]
    return before + after


def _conjugated(cubes: list[tuple[int, Cube]], controls: Controls) -> Iterator[Gate]:
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
