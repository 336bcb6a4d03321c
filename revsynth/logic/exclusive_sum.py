"""Short exclusive sums of products for several outputs with free values: the whole way.

Free values are settled, starting sums are made (the best fixed polarity, decompositions in several orders of
the inputs), and the cheapest is shortened by pair rewriting. The work is fixed by `effort`, never by a clock.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence

import numpy as np

from revsynth.errors import BudgetError
from revsynth.logic.annealing import anneal
from revsynth.logic.completion import complete
from revsynth.logic.cube_codes import CodeSpace, decode, encode, fits
from revsynth.logic.cubes import Cube, ExclusiveSum
from revsynth.logic.decomposition import decompose
from revsynth.logic.four_inputs import INPUTS as LEAF_INPUTS
from revsynth.logic.four_inputs import five_input_cubes
from revsynth.logic.free_cubes import FreeCubes
from revsynth.logic.function import Function
from revsynth.logic.normal_form import best_polarity, count_by_size
from revsynth.logic.pair_rewriting import rewrite
from revsynth.logic.random_words import Random
from revsynth.logic.truth_table import Columns, count_ones, first_inputs, last_word_mask
from revsynth.options import Effort

_STEPS: dict[Effort, int] = {"low": 60, "normal": 220, "high": 400}
_MOVES: dict[Effort, int] = {"low": 60_000, "normal": 300_000, "high": 3_000_000}
_MOVES_A_CUBE = 40_000
_ORDERS: dict[Effort, int] = {"low": 6, "normal": 24, "high": 120}

WALKED_CUBES = 96
"""Sums of at most so many cubes are shortened without numba, which costs half a second to start."""
SECOND_START = 2.15
"""A fixed-polarity form at most so many times dearer than the best start is tried as well."""
MAX_CUBES = 1 << 18
"""Longer sums are not made: a function that needs more is no case for products."""


def cube_prices(inputs: int) -> tuple[int, ...]:
    """Prices by number of literals that make the number of cubes small, then the literals."""
    return tuple(1024 + size for size in range(inputs + 1))


def minimise(
    function: Function, prices: Sequence[int], *, effort: Effort = "normal", seed: int = 0
) -> ExclusiveSum:
    """A cheap exclusive sum for every output, right wherever `function.care` is 1.

    prices: the price of a cube of 0 ... n literals, from 1 up; a cube that feeds several outputs is paid
    once. Raises ValueError where 2 * inputs + outputs exceeds 64, BudgetError where MAX_CUBES do not suffice.
    """
    if not fits(function.inputs, function.outputs):
        raise ValueError(f"{function.inputs} inputs and {function.outputs} outputs are too many for one sum")
    columns = complete(function, prices)
    if function.inputs <= LEAF_INPUTS and function.outputs == 1:
        return starting_sums(columns, function.inputs, prices, effort="low")[0]  # exact already
    if function.inputs == LEAF_INPUTS + 1 and function.outputs == 1:
        starts = [_five_inputs(columns, prices)]
        if np.all(function.care == last_word_mask(function.inputs)):
            return starts[0]
    else:
        starts = starting_sums(columns, function.inputs, prices, effort=effort, seed=seed)
    if len(starts) == 1 or (effort != "high" and len(starts[1]) > WALKED_CUBES):
        return shorten(starts[0], prices, care=function.care, effort=effort, seed=seed)
    found = [
        shorten(start, prices, care=function.care, effort=effort, seed=seed, share=share)
        for start, share in zip(starts, (0.7, 0.5), strict=True)
    ]
    return min(found, key=lambda cubes: cubes.price(prices))


def _five_inputs(columns: Columns, prices: Sequence[int]) -> ExclusiveSum:
    cubes = five_input_cubes(int(columns[0, 0]), tuple(prices))
    return ExclusiveSum.of(5, 1, [Cube(care, value) for care, value in cubes]).in_order()


def shorten(
    cubes: ExclusiveSum,
    prices: Sequence[int],
    *,
    care: Columns | None = None,
    effort: Effort = "normal",
    seed: int = 0,
    share: float = 1.0,
) -> ExclusiveSum:
    """Rewrite a sum to one that is no dearer, for the same function, or wherever `care` is 1.

    care: shape (outputs, words); None where all values are fixed. Free values are made use of up to
    `free_cubes.MAX_INPUTS` inputs. share: the part of the work of `effort` that is spent.
    """
    free = None if care is None else FreeCubes.of(care, cubes.inputs)
    if len(cubes) <= WALKED_CUBES:
        cubes = rewrite(cubes, prices, steps=int(share * _STEPS[effort]), seed=seed, free=free)
        if effort != "high" or len(cubes) <= 3:
            return cubes
    moves = int(share * min(_MOVES[effort], _MOVES_A_CUBE * len(cubes)))
    heat = 0.2 if moves > 5000 * len(cubes) else (0.12 if moves > 1500 * len(cubes) else 0.05)
    if free is None:
        return anneal(cubes, prices, moves=moves, heat=heat, seed=seed)
    space = CodeSpace(cubes.inputs, prices)
    for part in range(3):
        cubes = anneal(cubes, prices, moves=moves // 3, heat=heat, seed=seed + part)
        cubes = decode(free.loosen(encode(cubes), space), cubes.inputs, cubes.outputs).in_order()
    return cubes


def starting_sums(
    columns: Columns, inputs: int, prices: Sequence[int], *, effort: Effort = "normal", seed: int = 0
) -> list[ExclusiveSum]:
    """The cheapest of: best common polarity, best polarity a row, decompositions, a cube an input.

    A form of one polarity that is not much dearer comes second: regular functions often shorten better
    from it. columns: values, shape (outputs, words). Raises BudgetError where each has more than MAX_CUBES.
    """
    starts: list[ExclusiveSum] = []
    polarity, coefficients = best_polarity(columns, inputs, prices)
    if int(count_by_size(coefficients, inputs).sum()) <= MAX_CUBES:
        starts.append(ExclusiveSum.from_coefficients(coefficients, inputs, polarity))
        if columns.shape[0] > 1:
            starts.append(_row_by_row(columns, inputs, prices))
    forms = len(starts)
    for order in _orders(inputs, effort, seed):
        found = decompose(columns, inputs, prices, order)
        if found is None:
            break
        if len(found) <= MAX_CUBES:
            starts.append(found)
    fewest = min((len(start) for start in starts), default=MAX_CUBES + 1)
    if not starts or count_ones(np.bitwise_or.reduce(columns, axis=0)) < fewest:
        starts.append(_input_by_input(columns, inputs))
    cost = [start.price(prices) for start in starts]
    best = cost.index(min(cost))
    if forms and best and cost[0] <= SECOND_START * cost[best]:
        return [starts[best], starts[0]]
    return [starts[best]]


def _input_by_input(columns: Columns, inputs: int) -> ExclusiveSum:
    """A cube for every input at which some row is 1: what is left for large functions with few of them."""
    some = np.bitwise_or.reduce(columns, axis=0)
    if count_ones(some) > MAX_CUBES:
        raise BudgetError(f"the exclusive sum would have more than {MAX_CUBES:,} products")
    points = np.array(first_inputs(some, MAX_CUBES), dtype=np.uint64)
    word, bit = (points >> np.uint64(6)).astype(np.int64), points & np.uint64(63)
    feeds = np.zeros(len(points), dtype=np.uint64)
    for row, column in enumerate(columns):
        feeds |= ((column[word] >> bit) & np.uint64(1)) << np.uint64(row)
    care = np.full(len(points), (1 << inputs) - 1, dtype=np.uint64)
    return ExclusiveSum(inputs, columns.shape[0], care, points, feeds).in_order()


def _row_by_row(columns: Columns, inputs: int, prices: Sequence[int]) -> ExclusiveSum:
    """Each row with its own best polarity, equal cubes joined."""
    parts = []
    for row, column in enumerate(columns):
        polarity, coefficients = best_polarity(column[None], inputs, prices)
        part = ExclusiveSum.from_coefficients(coefficients, inputs, polarity)
        parts.append((part.care, part.value, np.full(len(part), 1 << row, dtype=np.uint64)))
    care, value, feeds = (np.concatenate(column) for column in zip(*parts, strict=True))
    return ExclusiveSum(inputs, columns.shape[0], care, value, feeds).in_order()


def _orders(inputs: int, effort: Effort, seed: int) -> Iterator[tuple[int, ...]]:
    """The natural order, the reversed one, then shuffled ones; fewer where a decomposition is long work."""
    natural = tuple(range(inputs))
    yield natural
    if inputs <= 3:
        return
    wanted = max(1, min(_ORDERS[effort], (_ORDERS[effort] << 12) // 3 ** min(inputs - 4, 16)))
    if wanted > 1:
        yield natural[::-1]
    random = Random(seed)
    for _ in range(wanted - 2):
        yield tuple(np.argsort(random.words(inputs), kind="stable").tolist())
