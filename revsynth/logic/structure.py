"""Structure of partly free columns: inputs that do not matter, affine forms, linear inputs, symmetric groups.

Inputs are numbered as in `truth_table`: input bit 0 is the least significant bit of the input number.
`values` is 0 wherever `care` is 0.
"""

from __future__ import annotations

from collections.abc import Sequence
from itertools import combinations

import numpy as np

from revsynth.logic.normal_form import algebraic_normal_form, essential_inputs
from revsynth.logic.truth_table import Column, Columns, count_ones, last_word_mask, ones, variable

_SPREAD = np.arange(512, dtype=np.uint64) * np.uint64(0x9E3779B97F4A7C15) >> np.uint64(20)
EXACT_DEGREE_INPUTS = 10
"""The least degree over all choices of the free values is worked out exactly up to here."""


def halves(column: Column, inputs: int, index: int) -> tuple[Column, Column]:
    """The values at x with input bit `index` 0 and 1, lined up with each other (elsewhere 0)."""
    if index >= 6:
        parts = column.reshape(-1, 2, 1 << (index - 6))
        return parts[:, 0].ravel(), parts[:, 1].ravel()
    low = ~variable(inputs, index)
    return column & low, (column >> np.uint64(1 << index)) & low & last_word_mask(inputs)


def doubled(half: Column, index: int) -> Column:
    """The column that has the values of `half` (as `halves` gives them) at both values of the input bit."""
    if index >= 6:
        parts = half.reshape(-1, 1, 1 << (index - 6))
        return np.concatenate([parts, parts], axis=1).ravel()
    return half | (half << np.uint64(1 << index))


def matters(values: Columns, care: Columns, inputs: int, index: int) -> bool:
    """Whether some row has two fixed values that differ across input bit `index`."""
    for row, fixed in zip(values, care, strict=True):
        low, high = halves(row, inputs, index)
        low_fixed, high_fixed = halves(fixed, inputs, index)
        if np.any((low ^ high) & low_fixed & high_fixed):
            return True
    return False


def inputs_without_effect(values: Columns, care: Columns, inputs: int) -> int:
    """A mask of input bits that no row needs, all of them together, with free values chosen for that.

    Where free values leave a choice of such sets, bit 0 is dropped first, then bit 1, and so on.
    """
    if np.all(care == last_word_mask(inputs)):
        return ~essential_inputs(algebraic_normal_form(values, inputs), inputs) & ((1 << inputs) - 1)
    values, care = values.copy(), care.copy()
    dropped = 0
    for index in range(inputs):
        if matters(values, care, inputs, index):
            continue
        dropped |= 1 << index
        for row in range(len(values)):
            for table in (values, care):
                low, high = halves(table[row], inputs, index)
                table[row] = doubled(low | high, index)
    return dropped


def linear_inputs(values: Column, care: Column, inputs: int) -> int:
    """A mask of input bits i with f = x_i XOR (something without x_i), wherever f is fixed on both sides.

    Bits with no pair of inputs at which f is fixed on both sides are left out.
    """
    mask = 0
    for index in range(inputs):
        low, high = halves(values, inputs, index)
        low_fixed, high_fixed = halves(care, inputs, index)
        both = low_fixed & high_fixed
        if np.any(both) and not np.any(~(low ^ high) & both):
            mask |= 1 << index
    return mask


def affine_form(values: Column, care: Column, inputs: int) -> tuple[int, int] | None:
    """(mask, constant) with f(x) = parity(x & mask) XOR constant wherever f is fixed; None: no such form.

    By elimination over the columns of the inputs; of several forms, the one that leans on the lowest inputs.
    """
    basis: list[tuple[int, int, Column, int]] = []

    def reduced(column: Column, combination: int) -> tuple[Column, int]:
        for word, bit, other, theirs in basis:
            if int(column[word]) >> bit & 1:
                column = column ^ other
                combination ^= theirs
        return column, combination

    columns = [ones(inputs)] + [variable(inputs, i) for i in range(inputs)]
    for number, column in enumerate(columns):
        left, combination = reduced(column & care, 1 << number)
        found = _first_one(left)
        if found is not None:
            basis.append((*found, left, combination))
    left, combination = reduced(values, 0)
    if _first_one(left) is not None:
        return None
    return combination >> 1, combination & 1


def _first_one(column: Column) -> tuple[int, int] | None:
    word = int(np.argmax(column != 0))
    value = int(column[word])
    return None if value == 0 else (word, (value & -value).bit_length() - 1)


def least_degree(values: Column, care: Column, inputs: int) -> int:
    """The least degree of a polynomial that agrees with f wherever it is fixed, exactly.

    Up to EXACT_DEGREE_INPUTS inputs (ValueError beyond): elimination over the monomials by rising degree.
    """
    if inputs > EXACT_DEGREE_INPUTS:
        raise ValueError(f"the least degree is worked out up to {EXACT_DEGREE_INPUTS} inputs, not {inputs}")
    fixed = _as_integer(care)
    target = _as_integer(values)
    literals = [_as_integer(variable(inputs, i)) for i in range(inputs)]
    basis: dict[int, int] = {}
    for size in range(inputs + 1):
        for chosen in combinations(range(inputs), size):
            column = fixed
            for i in chosen:
                column &= literals[i]
            column = _reduce(column, basis)
            if column:
                basis[column.bit_length()] = column
        target = _reduce(target, basis)
        if target == 0:
            return size
    raise AssertionError("all monomials together give every function")


def _as_integer(column: Column) -> int:
    return int.from_bytes(column.astype("<u8").tobytes(), "little")


def _reduce(column: int, basis: dict[int, int]) -> int:
    """Clear, from the top, every leading one that the basis has; stops at the first that it has not."""
    while column:
        other = basis.get(column.bit_length())
        if other is None:
            return column
        column ^= other
    return 0


def symmetric_groups(rows: Columns, inputs: int, leave_out: int = 0) -> list[list[tuple[int, bool]]]:
    """Groups of input bits that may be permuted among each other without changing any row.

    Each group, of two bits at least, lists (input bit, negated) with the lowest bit first and never
    negated: the rows are unchanged when the group's inputs, those marked taken negated, are permuted. Pass
    the care columns as further rows where values are free; `leave_out` is a mask of bits not looked at, such
    as those of no effect. O(n^2 2^n / 64), most pairs being ruled out by counting ones and by samples.
    """
    totals = [count_ones(row) for row in rows]
    weights = [[count_ones(row & variable(inputs, i)) for row in rows] for i in range(inputs)]
    opposite = [[t - w for t, w in zip(totals, weight, strict=True)] for weight in weights]
    waiting = [i for i in range(inputs) if not leave_out >> i & 1]
    groups: list[list[tuple[int, bool]]] = []
    while waiting:
        i = waiting.pop(0)
        members = [(i, False)]
        for j in waiting:
            if weights[i] == weights[j] and all(swap_invariant(row, inputs, i, j) for row in rows):
                members.append((j, False))
            elif weights[i] == opposite[j] and all(
                swap_invariant(row, inputs, i, j, negated=True) for row in rows
            ):
                members.append((j, True))
        if len(members) > 1:
            taken = {j for j, _ in members}
            waiting = [j for j in waiting if j not in taken]
            groups.append(members)
    return groups


def swap_invariant(column: Column, inputs: int, i: int, j: int, *, negated: bool = False) -> bool:
    """Whether f is unchanged when input bits i and j are swapped (both negated on the way, if asked)."""
    i, j = min(i, j), max(i, j)
    if _differs_at_samples(column, inputs, i, j, negated):
        return False
    if i >= 6:
        parts = column.reshape(-1, 2, 1 << (j - i - 1), 2, 1 << (i - 6))
        if negated:
            return bool(np.array_equal(parts[:, 0, :, 0], parts[:, 1, :, 1]))
        return bool(np.array_equal(parts[:, 0, :, 1], parts[:, 1, :, 0]))
    low_i, high_i = halves(column, inputs, i)
    zero_zero, zero_one = halves(low_i, inputs, j)
    one_zero, one_one = halves(high_i, inputs, j)
    if negated:
        return bool(np.array_equal(zero_zero, one_one))
    return bool(np.array_equal(zero_one, one_zero))


def _differs_at_samples(column: Column, inputs: int, i: int, j: int, negated: bool) -> bool:
    """A quick look at a few inputs spread over a long column: True only where f is not invariant."""
    if inputs < 12:
        return False
    x = _SPREAD & np.uint64((1 << inputs) - 1)
    one, two = (x >> np.uint64(i)) & np.uint64(1), (x >> np.uint64(j)) & np.uint64(1)
    turn = (one ^ two ^ np.uint64(int(negated))) * np.uint64(1 << i | 1 << j)
    return bool(np.any(_bits_at(column, x) != _bits_at(column, x ^ turn)))


def _bits_at(column: Column, x: Column) -> Column:
    bits: Column = (column[x >> np.uint64(6)] >> (x & np.uint64(63))) & np.uint64(1)
    return bits


def independent_nonlinear(forms: Columns, inputs: int) -> int:
    """How many rows are independent modulo affine functions, from their normal forms (the first 64)."""
    strip = ones(inputs)
    for monomial in [0] + [1 << i for i in range(inputs)]:
        strip[monomial >> 6] &= ~(np.uint64(1) << np.uint64(monomial & 63))
    basis: list[tuple[int, int, Column]] = []
    for row in forms[:64]:
        column = row & strip
        for word, bit, other in basis:
            if int(column[word]) >> bit & 1:
                column = column ^ other
        found = _first_one(column)
        if found is not None:
            basis.append((*found, column))
    return len(basis)


def indices(mask: int) -> Sequence[int]:
    """The numbers of the bits set, ascending."""
    return [i for i in range(mask.bit_length()) if mask >> i & 1]
