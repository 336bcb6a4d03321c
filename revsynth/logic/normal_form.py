"""Algebraic normal forms and fixed-polarity Reed-Muller forms of packed columns.

A column of *coefficients* over n inputs is packed as a truth table is: bit c of it says whether the product
of the variables in the bits of c takes part in the exclusive sum. With the polarity p, variable i takes part
negated where bit i of p is 1; polarity 0 is the algebraic normal form.

Sources: D. E. Muller, IRE Trans. Electronic Computers 3, 1954; I. S. Reed, IRE Trans. Information Theory 4,
1954 (the forms); the butterfly is the Moebius transform of the subset order (common practice); walking
through all polarities one variable at a time: T. Sasao, "Switching theory for logic synthesis", 1999, from
memory.
"""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
from numpy.typing import NDArray

from revsynth.logic.truth_table import ALL_ONES, Columns, variable

EXHAUSTIVE_INPUTS = 12
"""Up to here every polarity is tried; above, one variable at a time is turned while that helps."""

_LOW = tuple(np.uint64(~int(variable(6, i)[0]) & int(ALL_ONES)) for i in range(6))
_LEVELS = tuple(
    np.uint64(sum(1 << index for index in range(64) if index.bit_count() == ones)) for ones in range(7)
)


def algebraic_normal_form(columns: Columns, inputs: int) -> Columns:
    """The coefficients of each row, from values; its own inverse.

    columns: shape (k, words) or (words,), not changed. O(n 2^n / 64) word operations.
    """
    result = np.array(columns, dtype=np.uint64)
    for index in range(min(inputs, 6)):
        result ^= (result & _LOW[index]) << np.uint64(1 << index)
    for index in range(6, inputs):
        halves = _halves(result, index)
        halves[..., 1, :] ^= halves[..., 0, :]
    return result


def turn_variable(coefficients: Columns, index: int) -> None:
    """Change the polarity of one variable, in place: x = 1 + x' moves each coefficient of x also to 1.

    Raises ValueError unless the array is contiguous.
    """
    if not coefficients.flags.c_contiguous:
        raise ValueError("coefficients are turned in place: a contiguous array is needed")
    if index < 6:
        coefficients ^= (coefficients >> np.uint64(1 << index)) & _LOW[index]
    else:
        halves = _halves(coefficients, index)
        halves[..., 0, :] ^= halves[..., 1, :]


def fixed_polarity(columns: Columns, inputs: int, polarity: int) -> Columns:
    """The coefficients of each row with the variables in the bits of `polarity` negated."""
    if not 0 <= polarity < 1 << inputs:
        raise ValueError(f"polarity {polarity} has bits beyond the {inputs} inputs")
    result = algebraic_normal_form(columns, inputs)
    for index in range(inputs):
        if polarity >> index & 1:
            turn_variable(result, index)
    return result


def evaluate_fixed_polarity(coefficients: Columns, inputs: int, polarity: int) -> Columns:
    """The values again: the inverse of `fixed_polarity`."""
    result = np.array(coefficients, dtype=np.uint64)
    for index in range(inputs):
        if polarity >> index & 1:
            turn_variable(result, index)
    return algebraic_normal_form(result, inputs)


def count_by_size(coefficients: Columns, inputs: int) -> NDArray[np.int64]:
    """How many products of 0, 1, ... n variables take part in any of the rows, shape (inputs + 1,)."""
    together = coefficients if coefficients.ndim == 1 else np.bitwise_or.reduce(coefficients, axis=0)
    outer = np.bitwise_count(np.arange(len(together), dtype=np.uint32))
    counts = np.zeros(max(inputs, 6) + 1, dtype=np.int64)
    for ones, level in enumerate(_LEVELS):
        found = np.bitwise_count(together & level)
        by_outer = np.bincount(outer, weights=found, minlength=1)
        counts[ones : ones + len(by_outer)] += by_outer.astype(np.int64)
    return counts[: inputs + 1]


def degree(coefficients: Columns, inputs: int) -> int:
    """The most variables in one product, over all rows; 0 for constants, the zero function included.

    coefficients: an algebraic normal form (the degree is the same for every polarity).
    """
    present = np.flatnonzero(count_by_size(coefficients, inputs))
    return int(present[-1]) if len(present) else 0


def essential_inputs(coefficients: Columns, inputs: int) -> int:
    """A mask with bit i set where some row's normal form has variable i: f depends on it."""
    together = coefficients if coefficients.ndim == 1 else np.bitwise_or.reduce(coefficients, axis=0)
    in_words = int(np.bitwise_or.reduce(together)) if inputs else 0
    low = sum(1 << i for i in range(min(inputs, 6)) if in_words & int(variable(6, i)[0]))
    return low | sum(1 << i for i in range(6, inputs) if np.any(_halves(together, i)[:, 1]))


class PolarityPrice:
    """Adds up prices[k] over the products of k literals of the rows together (a shared one counts once)."""

    def __init__(self, inputs: int, words: int, prices: Sequence[int]) -> None:
        padded = np.zeros(max(inputs, 6) + 7, dtype=np.int64)
        padded[: inputs + 1] = prices[: inputs + 1]
        outer = np.bitwise_count(np.arange(words, dtype=np.uint32)).astype(np.int64)
        self._levels = np.array(_LEVELS[: min(inputs, 6) + 1], dtype=np.uint64)
        self._weights = np.stack([padded[outer + ones] for ones in range(len(self._levels))])

    def __call__(self, coefficients: Columns) -> int:
        together = coefficients[0] if len(coefficients) == 1 else np.bitwise_or.reduce(coefficients, axis=0)
        if len(together) <= 1024:
            return int((np.bitwise_count(together & self._levels[:, None]) * self._weights).sum())
        return sum(
            int(np.dot(np.bitwise_count(together & level).astype(np.int64), weights))
            for level, weights in zip(self._levels, self._weights, strict=True)
        )


def best_polarity(columns: Columns, inputs: int, prices: Sequence[int]) -> tuple[int, Columns]:
    """The polarity (common to all rows) of the least price, and the coefficients under it.

    columns: values, shape (k, words). prices: the price of a product of 0 ... n literals; a product that
    takes part in several rows is paid once. Exhaustive in Gray-code order up to EXHAUSTIVE_INPUTS, the lowest
    polarity at a tie; above, steepest descent over single variables from the polarities 0 and 2^n - 1.
    """
    if columns.shape[0] == 0:
        return 0, np.array(columns, dtype=np.uint64)
    price = PolarityPrice(inputs, columns.shape[1], prices)
    if inputs <= EXHAUSTIVE_INPUTS:
        polarity = _every_polarity(columns, inputs, price)
    else:
        starts = (0, (1 << inputs) - 1)
        polarity = min(_descend(columns, inputs, price, start) for start in starts)[1]
    return polarity, fixed_polarity(columns, inputs, polarity)


def _every_polarity(columns: Columns, inputs: int, price: PolarityPrice) -> int:
    state = algebraic_normal_form(columns, inputs)
    best = (price(state), 0)
    polarity = 0
    for step in range(1, 1 << inputs):
        index = (step & -step).bit_length() - 1
        turn_variable(state, index)
        polarity ^= 1 << index
        best = min(best, (price(state), polarity))
    return best[1]


def _descend(columns: Columns, inputs: int, price: PolarityPrice, polarity: int) -> tuple[int, int]:
    state = fixed_polarity(columns, inputs, polarity)
    here = price(state)
    while True:
        neighbours = []
        for index in range(inputs):
            turn_variable(state, index)
            neighbours.append((price(state), index))
            turn_variable(state, index)
        cost, index = min(neighbours)
        if cost >= here:
            return here, polarity
        turn_variable(state, index)
        polarity ^= 1 << index
        here = cost


def _halves(array: Columns, index: int) -> Columns:
    """A view (..., blocks, 2, words) that splits a word-level variable (index >= 6)."""
    block = 1 << (index - 6)
    return array.reshape(*array.shape[:-1], array.shape[-1] // (2 * block), 2, block)
