"""Swaps that make an output differ across one line, so that it can be had on that line.

An output that is 1 in half of the states is spread evenly, first over the two halves that one line tells
apart, then over their quarters, and so on, each time by one gate on that line that swaps states of the two
halves; at the end every pair of states that differ in the last line alone has a 0 and a 1. The steps are
those of a decomposition along Young subgroups: De Vos, Van Rentergem, "Young subgroups for reversible
computers", Advances in Mathematics of Communications 2(2), 2008, from memory. Free values, the choice of the
lines and of which states are swapped are worked out here.

Values are int8, +1 for an output of 1, -1 for 0, 0 where it is free.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from revsynth.logic.truth_table import Column, unpack

Values = NDArray[np.int8]
Counts = NDArray[np.int32]


def signed(values: Column, fixed: Column, lines: int) -> Values:
    """The values of all 2**lines states, in their order."""
    wanted = unpack(fixed, lines).astype(np.int8)
    return (2 * unpack(values, lines).astype(np.int8) - 1) * wanted


def splitting_order(values: Values, lines: int, last: int, settled: tuple[int, ...]) -> list[int]:
    """Lines in whose order halves are evened out, `last` left for the end.

    All lines that are not named stay as they are: the blocks that they (and `settled`) tell apart are even
    already. From below, the line is taken that leaves the least excess in the blocks of all lines taken so
    far, until none is left: then no gate is needed further up. Raises ValueError where blocks that the
    settled lines tell apart are uneven.
    """
    open_lines = list(range(lines))
    ones, zeros = ((values == sign).astype(np.int32) for sign in (1, -1))
    ones, zeros = _without(ones, last), _without(zeros, last)
    open_lines.remove(last)
    size, taken = 2, []
    while _excess(ones, zeros, size):
        choices = [place for place, line in enumerate(open_lines) if line not in settled]
        if not choices:
            raise ValueError("the output is not even where the settled lines are the same")
        size *= 2
        found = [(_excess(_without(ones, p), _without(zeros, p), size), -p) for p in choices]
        place = -min(found)[1]
        ones, zeros = _without(ones, place), _without(zeros, place)
        taken.append(open_lines.pop(place))
    return taken[::-1]


def _without(counts: Counts, place: int) -> Counts:
    """Summed over the line at `place`, counted from the lowest."""
    parts = counts.reshape(-1, 2, 1 << place)
    total: Counts = parts[:, 0] + parts[:, 1]
    return total.ravel()


def _excess(ones: Counts, zeros: Counts, size: int) -> int:
    half = size // 2
    return int(np.maximum(ones - half, 0).sum()) + int(np.maximum(zeros - half, 0).sum())


def swapping(
    values: Values, lines: int, line: int, below: tuple[int, ...]
) -> tuple[NDArray[np.bool_], NDArray[np.bool_]]:
    """(condition, matters) by state, shape (2**lines,): where a gate on `line` must turn it.

    Afterwards the states that agree on all lines but those of `below` are evenly spread: at most half of
    them are 1, and at most half 0. Now that holds where they agree on all but `below` and `line`. Where the
    two states of a pair are the same the condition is free. Both answers are the same at both values of
    `line`.
    """
    upper = [other for other in range(lines) if other != line and other not in below]
    order = [*below, line, *upper]  # lowest first: the axes are the other way round
    axes = [lines - 1 - other for other in reversed(order)]
    sorted_values = values.reshape((2,) * lines).transpose(axes).reshape(-1, 2, 1 << len(below))
    zero, one = sorted_values[:, 0], sorted_values[:, 1]
    swap = evening_swaps(np.ascontiguousarray(zero), np.ascontiguousarray(one))
    back = np.argsort(axes)
    return _in_state_order(swap, lines, back), _in_state_order(zero != one, lines, back)


def _in_state_order(pairs: NDArray[np.bool_], lines: int, back: NDArray[np.intp]) -> NDArray[np.bool_]:
    both = np.repeat(pairs[:, None, :], 2, axis=1).reshape((2,) * lines)
    return np.ascontiguousarray(both.transpose(back)).ravel()


def evening_swaps(zero: Values, one: Values) -> NDArray[np.bool_]:
    """Which pairs to swap so that no row of either half has more than half ones or half zeros.

    zero, one: shape (blocks, pairs), the two states of each pair; taken together no block has more than
    half ones or half zeros. The first pairs up to a round number where that does it, so that the condition
    is short; else the first that help.
    """
    blocks, pairs = zero.shape
    swap = np.zeros((blocks, pairs), dtype=bool)
    if pairs < 2:
        raise ValueError("blocks of two states have nothing to be spread over")
    most = pairs // 2
    rows = np.flatnonzero(_uneven(zero, most) | _uneven(one, most))
    if rows.size:
        zero, one = zero[rows], one[rows]
        some = _first_pairs(zero, one)
        left = np.flatnonzero(~some.any(axis=1))
        some[left] = _helpful_pairs(zero[left], one[left])
        swap[rows] = some
    return swap


def _uneven(values: Values, most: int) -> NDArray[np.bool_]:
    answer: NDArray[np.bool_] = (np.count_nonzero(values > 0, axis=1) > most) | (
        np.count_nonzero(values < 0, axis=1) > most
    )
    return answer


def _first_pairs(zero: Values, one: Values) -> NDArray[np.bool_]:
    """The pairs below a bound that evens the block out, the roundest there is; none where none does."""
    blocks, pairs = zero.shape
    fits = np.ones((blocks, pairs + 1), dtype=bool)
    for sign in (1, -1):
        at_zero, at_one = zero == sign, one == sign
        total = np.count_nonzero(at_zero, axis=1) + np.count_nonzero(at_one, axis=1)
        moved = np.zeros((blocks, pairs + 1), dtype=np.int32)
        np.cumsum(at_one.astype(np.int8) - at_zero.astype(np.int8), axis=1, dtype=np.int32, out=moved[:, 1:])
        moved += np.count_nonzero(at_zero, axis=1)[:, None].astype(np.int32)
        fits &= (moved <= pairs // 2) & (total[:, None] - moved <= pairs // 2)
    bound = np.zeros(blocks, dtype=np.int64)
    step = pairs
    while step:
        at_steps = fits[:, ::step]
        fresh = (bound == 0) & at_steps.any(axis=1)
        bound[fresh] = at_steps[fresh].argmax(axis=1) * step
        step //= 2
    answer: NDArray[np.bool_] = np.arange(pairs)[None, :] < bound[:, None]
    return answer


def _helpful_pairs(zero: Values, one: Values) -> NDArray[np.bool_]:
    """As many pairs as are needed, those first that help both halves.

    A half with too many ones (or its partner with too many zeros) gives ones for zeros. Where one of the two
    is not in need, pairs with a free value serve as well. There are always enough: of p pairs at least
    d + d' have a 1 against a 0 where d ones and d' zeros are too many.
    """
    most = zero.shape[1] // 2
    too_many = {
        (half, sign): np.count_nonzero(values == sign, axis=1) - most
        for half, values in (("zero", zero), ("one", one))
        for sign in (1, -1)
    }
    answer = np.zeros(zero.shape, dtype=bool)
    for sign in (1, -1):
        given, taken = too_many["zero", sign], too_many["one", -sign]
        need = np.maximum(np.maximum(given, taken), 0)
        best = (zero == sign) & (one == -sign)
        with_free = ((zero == sign) & (one == 0) & (given > 0)[:, None]) | (
            (zero == 0) & (one == -sign) & (taken > 0)[:, None]
        )
        answer |= best & (np.cumsum(best, axis=1) <= need[:, None])
        rest = np.maximum(need - np.count_nonzero(best, axis=1), 0)
        answer |= with_free & (np.cumsum(with_free, axis=1) <= rest[:, None])
    return answer
