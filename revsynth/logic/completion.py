"""Choosing the free values of a function so that its exclusive sums get short.

A few sensible completions are made for each output (all 0, all 1, the normal form of low degree, copies
across one input) and the one whose quick exclusive sum is cheapest is kept. The rewriting may change free
values later.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence

import numpy as np

from revsynth.logic.decomposition import decompose
from revsynth.logic.four_inputs import INPUTS as LEAF_INPUTS
from revsynth.logic.four_inputs import four_input_sums
from revsynth.logic.function import Function
from revsynth.logic.normal_form import PolarityPrice, algebraic_normal_form, best_polarity, fixed_polarity
from revsynth.logic.truth_table import Column, Columns, last_word_mask, variable

DECOMPOSED_INPUTS = 12
"""Up to here a completion is judged by its decomposition, above by the best of a few polarities."""


def complete(function: Function, prices: Sequence[int]) -> Columns:
    """Values of all outputs with every free value settled, shape (outputs, words); deterministic."""
    full = last_word_mask(function.inputs)
    rows = []
    for values, care in zip(function.values, function.care, strict=True):
        if np.all(care == full):
            rows.append(values)
        else:
            rows.append(_cheapest(values, care, function.inputs, prices))
    return np.array(rows, dtype=np.uint64).reshape(function.outputs, len(function.domain))


def low_degree_completion(values: Column, care: Column, inputs: int, polarity: int = 0) -> Column:
    """Free values that make each coefficient of the form with that polarity 0 where a free value can.

    The coefficient of a product depends on the values at the inputs below it only, so going up by the number
    of ones settles every free value once (inputs counted from the polarity).
    """
    free = ~care & last_word_mask(inputs)
    result = values.copy()
    for members in _levels(inputs, polarity):
        # Values and coefficients are lined up: the coefficient of c meets the value at c ^ polarity.
        coefficients = fixed_polarity(result[None], inputs, polarity)[0]
        at_inputs = _shifted(coefficients, inputs, polarity)
        result ^= at_inputs & free & members
    return result


def _levels(inputs: int, polarity: int) -> Iterator[Column]:
    """Columns of the inputs x with 0, 1, ... n ones in x ^ polarity."""
    words = 1 << max(inputs - 6, 0)
    in_word = np.array([x ^ (polarity & 63) for x in range(64)])
    weight = np.bitwise_count(in_word & ((1 << min(inputs, 6)) - 1))
    outer = np.bitwise_count(np.arange(words, dtype=np.uint32) ^ np.uint32(polarity >> 6))
    masks = np.array(
        [sum(1 << x for x in range(64) if weight[x] == w) for w in range(7)] + [0] * max(inputs, 1),
        dtype=np.uint64,
    )
    for ones in range(inputs + 1):
        need = ones - outer.astype(np.int64)
        yield np.where(need >= 0, masks[np.maximum(need, 0)], np.uint64(0)) & last_word_mask(inputs)


def _shifted(column: Column, inputs: int, polarity: int) -> Column:
    """The column x -> column(x ^ polarity)."""
    result = column.copy()
    for index in range(inputs):
        if polarity >> index & 1:
            ones = variable(inputs, index)
            if index < 6:
                step = np.uint64(1 << index)
                result = ((result & ones) >> step) | ((result << step) & ones)
            else:
                halves = result.reshape(-1, 2, 1 << (index - 6))
                result = halves[:, ::-1].reshape(-1).copy()
    return result


def _candidates(values: Column, care: Column, inputs: int, prices: Sequence[int]) -> Iterator[Column]:
    full = last_word_mask(inputs)
    free = ~care & full
    yield values
    yield values | free
    polarities = {0: None, (1 << inputs) - 1: None}
    for start in (values, values | free):
        polarities[best_polarity(start[None], inputs, prices)[0]] = None
    for polarity in polarities:
        yield low_degree_completion(values, care, inputs, polarity)
    for index in range(inputs):
        mirrored = _shifted(values, inputs, 1 << index)
        yield values | (mirrored & free)


def _cheapest(values: Column, care: Column, inputs: int, prices: Sequence[int]) -> Column:
    if inputs <= LEAF_INPUTS:
        return _cheapest_exactly(values, care, inputs, prices)
    best: tuple[int, Column] | None = None
    seen: set[bytes] = set()
    quick = PolarityPrice(inputs, len(values), prices)
    for candidate in _candidates(values, care, inputs, prices):
        key = candidate.tobytes()
        if key in seen:
            continue
        seen.add(key)
        found = decompose(candidate[None], inputs, prices) if inputs <= DECOMPOSED_INPUTS else None
        if found is not None:
            price = found.price(prices)
        else:
            price = min(
                quick(algebraic_normal_form(candidate[None], inputs)),
                quick(fixed_polarity(candidate[None], inputs, (1 << inputs) - 1)),
            )
        if best is None or price < best[0]:
            best = (price, candidate)
    assert best is not None
    return best[1]


def _cheapest_exactly(values: Column, care: Column, inputs: int, prices: Sequence[int]) -> Column:
    """The best of all completions, for up to four inputs."""
    padded = tuple(prices) + (prices[-1],) * (LEAF_INPUTS - inputs)
    table = four_input_sums(padded).cost
    choices = np.array([int(values[0])], dtype=np.int64)
    for x in range(1 << inputs):
        if not int(care[0]) >> x & 1:
            choices = np.concatenate([choices, choices | 1 << x])
    repeated = sum(1 << (shift << inputs) for shift in range(1 << (LEAF_INPUTS - inputs)))
    cost = table[choices * repeated]
    return np.array([choices[int(cost.argmin())]], dtype=np.uint64)
