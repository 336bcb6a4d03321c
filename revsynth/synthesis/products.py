"""Synthesis from exclusive sums of products: every product is one gate.

In a phase oracle a product is a controlled Z on the input lines, which has no distinguished target (common
practice), so no output line is needed. Otherwise it is a NOT on an output line; a product that feeds several
outputs is computed once, on one of them, between two CNOTs to each of the others. With fewer lines than
inputs and outputs (`embedded`), outputs land on lines of the inputs: see `landing`.
"""

from __future__ import annotations

from collections.abc import Sequence

from revsynth.cascade.model import Cascade
from revsynth.embed.in_place import fewest_lines
from revsynth.logic.cubes import ExclusiveSum
from revsynth.logic.exclusive_sum import cube_prices, minimise, shorten
from revsynth.logic.function import Function
from revsynth.logic.normal_form import algebraic_normal_form, count_by_size
from revsynth.synthesis.interface import Block, Placement, Progress, Task, silent
from revsynth.synthesis.landing import in_place_blocks, why_not_in_place
from revsynth.synthesis.product_gates import output_groups, t_prices, to_gates


class Products:
    """The method `products`."""

    name = "products"

    def unfit(self, task: Task) -> str | None:
        """Why an exclusive sum cannot serve the task."""
        if task.oracle == "inplace":
            return "products are added to lines of their own, so nothing can be 'inplace'"
        if task.oracle == "phase" and task.function.outputs != 1:
            return f"a phase oracle of products needs one output bit, not {task.function.outputs}"
        needed = lines_needed(task)
        if task.oracle == "embedded":
            needed = fewest_lines(task.function)
            reason = why_not_in_place(task.function)
            if needed < lines_needed(task) and reason is not None:
                return reason
        if task.lines is not None and needed > task.lines:
            return f"products need {needed} lines, {task.lines} allowed"
        return None

    def synthesise(self, task: Task, progress: Progress = silent) -> list[Block]:
        """Sums of the fewest cubes and of the least T, the better guess for the aim first.

        Raises BudgetError where the sums would be too long (`exclusive_sum.MAX_CUBES`).
        """
        if task.oracle == "embedded":
            enough = fewest_lines(task.function)
            if enough < lines_needed(task):
                return in_place_blocks(task, enough, progress)
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


def lines_needed(task: Task) -> int:
    """Lines for the inputs, and for the outputs unless it is a phase oracle."""
    return task.function.inputs + (0 if task.oracle == "phase" else task.function.outputs)


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
