"""Directions in which a function hardly changes: derivatives f(x + a) + f(x) of low degree."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from revsynth.logic.normal_form import algebraic_normal_form
from revsynth.logic.truth_table import Columns, pack, unpack

MOST_INPUTS = 16


def flat_directions(columns: Columns, inputs: int, most_degree: int) -> int:
    """The dimension of the space of all a for which f(x + a) + f(x) has at most that degree, for every row.

    columns: shape (k, words), values; degree 0 is constant, 1 affine. O(k n^2 2^n). Raises ValueError above
    16 inputs or for a degree below 0.

    From the highest degree j down: the terms of degree j - 1 of the derivative are linear in a, as long as
    the variables of the directions left do not occur in terms of degree above j. Those directions that make
    them vanish become the first variables of a new basis, which then do not occur in degree j either.
    """
    if inputs > MOST_INPUTS or most_degree < 0:
        raise ValueError(f"at most {MOST_INPUTS} inputs and a degree from 0 on, not {inputs}, {most_degree}")
    left = inputs
    values = np.array([unpack(column, inputs) for column in columns]).reshape(len(columns), 1 << inputs)
    forms = _forms(values, inputs)
    weights = np.bitwise_count(np.arange(1 << inputs))
    for degree in range(inputs, most_degree + 1, -1):
        rows = _linear_part(forms, np.flatnonzero(weights == degree - 1), left)
        kernel, others = _kernel(rows, left)
        if len(kernel) == left:
            continue
        values = values[:, _substitution(inputs, [*kernel, *others])]
        forms = _forms(values, inputs)
        left = len(kernel)
    return left


def _forms(values: NDArray[np.uint8], inputs: int) -> NDArray[np.uint8]:
    if not len(values):
        return values
    packed = np.array([pack(row) for row in values])
    return np.array([unpack(row, inputs) for row in algebraic_normal_form(packed, inputs)])


def _linear_part(forms: NDArray[np.uint8], products: NDArray[np.int64], left: int) -> list[int]:
    """For each product and row of forms: bit i where the product with variable i added is a term."""
    found = np.zeros((len(forms), len(products)), dtype=np.int64)
    for i in range(left):
        absent = (products >> i & 1) == 0
        found |= (forms[:, products | 1 << i] & absent).astype(np.int64) << i
    rows: list[int] = np.unique(found).tolist()
    return rows


def _kernel(rows: list[int], width: int) -> tuple[list[int], list[int]]:
    """A basis of the vectors orthogonal to all rows, and unit vectors that complete it."""
    pivots: dict[int, int] = {}
    for row in rows:
        for bit, other in pivots.items():
            if row >> bit & 1:
                row ^= other
        if row:
            bit = row.bit_length() - 1
            pivots = {b: other ^ row if other >> bit & 1 else other for b, other in pivots.items()}
            pivots[bit] = row
    free = [bit for bit in range(width) if bit not in pivots]
    kernel = [1 << bit | sum(1 << p for p, row in pivots.items() if row >> bit & 1) for bit in free]
    return kernel, [1 << bit for bit in sorted(pivots)]


def _substitution(inputs: int, basis: list[int]) -> NDArray[np.int64]:
    """For each y the sum of basis[i] over its bits i; variables beyond the basis stay."""
    points = np.zeros(1, dtype=np.int64)
    for i in range(inputs):
        points = np.concatenate([points, points ^ (basis[i] if i < len(basis) else 1 << i)])
    return points
