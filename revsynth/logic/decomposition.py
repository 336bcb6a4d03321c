"""Exclusive sums by pseudo-Kronecker decomposition down to four inputs, which are done exactly.

With f0, f1 the halves of f at x = 0 and x = 1 and f2 = f0 + f1 (exclusive), f is f0 + x f2, or f1 + x' f2, or
x' f0 + x f1. Every part of every part is looked at once (equal parts are one part), the cheapest of the three
ways is settled from below, and the cubes are read off from above.

Sources: P. Davio, J. Deschamps, A. Thayse, "Discrete and switching functions", 1978 (the expansions); T.
Sasao, "Switching theory for logic synthesis", 1999 (choosing them node by node), both from memory.
"""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
from numpy.typing import NDArray

from revsynth.logic.cubes import ExclusiveSum
from revsynth.logic.four_inputs import INPUTS as LEAF_INPUTS
from revsynth.logic.four_inputs import FourInputSums, four_input_sums
from revsynth.logic.truth_table import Columns, pack, unpack

MAX_PARTS = 3_000_000
"""Parts of one level that are still looked at; a random function of 18 inputs has about half of that."""

Indices = NDArray[np.int64]


def decompose(
    columns: Columns, inputs: int, prices: Sequence[int], order: Sequence[int] | None = None
) -> ExclusiveSum | None:
    """A cheap exclusive sum of each row, equal cubes of several rows joined; None: too many parts.

    columns: values, shape (k, words). prices: price of a cube of 0 ... n literals, from 1 up. order: the
    input bits in the order of splitting from the last to the first (default 0, 1, ... n-1: the highest
    first); order[:4] are the inputs of the exact part. Exact for up to four inputs and one row.
    """
    order = tuple(range(inputs)) if order is None else tuple(order)
    if sorted(order) != list(range(inputs)):
        raise ValueError(f"order {order} does not list each of the {inputs} inputs once")
    width = max(inputs, LEAF_INPUTS)
    rows = _arranged(columns, inputs, order)
    if rows.shape[0] == 0:
        return ExclusiveSum.of(inputs, 0, [])
    roots, levels, leaves = _split_down(rows, width)
    if levels is None:
        return None
    tables = _leaf_tables(tuple(prices), width)
    choices, empty = _settle(levels, leaves, tables)
    care, value, feeds = _read_off(roots, levels, choices, empty, leaves, tables)
    if inputs < LEAF_INPUTS:
        inside = value >> np.uint64(inputs) == 0
        low = np.uint64((1 << inputs) - 1)
        care, value, feeds = care[inside] & low, value[inside], feeds[inside]
    return ExclusiveSum(inputs, rows.shape[0], _moved(care, order), _moved(value, order), feeds).in_order()


def _arranged(columns: Columns, inputs: int, order: tuple[int, ...]) -> NDArray[np.uint64]:
    """The rows with input bit order[i] moved to place i, and repeated up to four inputs."""
    if order == tuple(range(inputs)) and inputs >= LEAF_INPUTS:
        return columns
    rows = []
    for column in columns:
        bits = unpack(column, inputs)
        if order != tuple(range(inputs)):
            axes = [inputs - 1 - order[inputs - 1 - axis] for axis in range(inputs)]
            bits = bits.reshape((2,) * inputs).transpose(axes).ravel()
        rows.append(pack(np.tile(bits, 1 << max(LEAF_INPUTS - inputs, 0))))
    return np.array(rows, dtype=np.uint64).reshape(len(rows), columns.shape[1])


def _moved(masks: NDArray[np.uint64], order: tuple[int, ...]) -> NDArray[np.uint64]:
    if order == tuple(range(len(order))):
        return masks
    result = np.zeros_like(masks)
    for place, index in enumerate(order):
        result |= ((masks >> np.uint64(place)) & np.uint64(1)) << np.uint64(index)
    return result


def _distinct(rows: NDArray[np.uint64]) -> tuple[NDArray[np.uint64], Indices]:
    """The distinct rows and, for each row, which of them it is."""
    if rows.shape[1] == 1:
        found, inverse = np.unique(rows[:, 0], return_inverse=True)
        return found[:, None], inverse.astype(np.int64)
    known: dict[bytes, int] = {}
    inverse = np.array([known.setdefault(row.tobytes(), len(known)) for row in rows], dtype=np.int64)
    first = np.zeros(len(known), dtype=np.int64)
    first[inverse[::-1]] = np.arange(len(rows) - 1, -1, -1)
    return rows[first], inverse


def _split_down(
    rows: NDArray[np.uint64], width: int
) -> tuple[Indices, list[tuple[Indices, Indices, Indices]] | None, NDArray[np.uint64]]:
    """Split the highest variable again and again; returns roots, children by level, and the leaves."""
    parts, roots = _distinct(rows)
    levels = []
    for left in range(width, LEAF_INPUTS, -1):
        if parts.shape[1] > 1:
            half = parts.shape[1] // 2
            low, high = parts[:, :half], parts[:, half:]
        else:
            shift = np.uint64(1 << (left - 1))
            low, high = parts & ((np.uint64(1) << shift) - np.uint64(1)), parts >> shift
        if 3 * len(parts) * low.shape[1] > 8 * MAX_PARTS:
            return roots, None, parts
        parts, where = _distinct(np.concatenate([low, high, low ^ high]))
        if len(parts) > MAX_PARTS:
            return roots, None, parts
        count = len(low)
        levels.append((where[:count], where[count : 2 * count], where[2 * count :]))
    return roots, levels, parts[:, 0]


def _leaf_tables(prices: tuple[int, ...], width: int) -> list[FourInputSums]:
    """Exact tables for 0, 1, 2, ... literals gathered above the leaf, until the prices grow evenly."""
    padded = prices + (prices[-1],) * (width + 1 - len(prices))
    steps = np.diff(padded)
    uneven = [k for k in range(len(steps) - 1) if steps[k] != steps[k + 1]]
    last = min(max(uneven[-1] + 1 if uneven else 0, 1), width - LEAF_INPUTS)
    return [four_input_sums(tuple(padded[d : d + 5])) for d in range(last + 1)]


def _leaf_costs(leaves: NDArray[np.uint64], tables: list[FourInputSums], depth: int) -> NDArray[np.int64]:
    """Costs by literals gathered above, shape (depth + 1, leaves)."""
    rows = [table.cost[leaves] for table in tables[: depth + 1]]
    while len(rows) <= depth:
        rows.append(rows[-1] + (rows[-1] - rows[-2] if len(rows) > 1 else 0))
    return np.stack(rows)


def _settle(
    levels: list[tuple[Indices, Indices, Indices]],
    leaves: NDArray[np.uint64],
    tables: list[FourInputSums],
) -> tuple[list[NDArray[np.int8]], list[NDArray[np.bool_]]]:
    """The cheapest of the three ways for every part, by literals gathered above: shape (depth + 1, parts).

    Also, level by level, which parts are the constant 0 and take no cube.
    """
    cost = _leaf_costs(leaves, tables, len(levels))
    choices: list[NDArray[np.int8]] = []
    empty = [cost[0] == 0]
    for depth in range(len(levels) - 1, -1, -1):
        zero, one, both = levels[depth]
        same, more = cost[: depth + 1], cost[1 : depth + 2]
        ways = np.stack(
            [same[:, zero] + more[:, both], same[:, one] + more[:, both], more[:, zero] + more[:, one]]
        )
        choice = ways.argmin(axis=0)
        cost = np.take_along_axis(ways, choice[None], axis=0)[0]
        choices.append(choice.astype(np.int8))
        empty.append(cost[0] == 0)
    return choices[::-1], empty[::-1]


def _read_off(
    roots: Indices,
    levels: list[tuple[Indices, Indices, Indices]],
    choices: list[NDArray[np.int8]],
    empty: list[NDArray[np.bool_]],
    leaves: NDArray[np.uint64],
    tables: list[FourInputSums],
) -> tuple[NDArray[np.uint64], NDArray[np.uint64], NDArray[np.uint64]]:
    """Follow the choices from the roots; returns care, value, feeds in the arranged order of inputs."""
    node = roots
    care = np.zeros(len(roots), dtype=np.uint64)
    value = np.zeros(len(roots), dtype=np.uint64)
    feeds = np.uint64(1) << np.arange(len(roots), dtype=np.uint64)
    for depth, (zero, one, both) in enumerate(levels):
        bit = np.uint64(1 << (LEAF_INPUTS + len(levels) - 1 - depth))
        way = choices[depth][np.bitwise_count(care), node]
        first = np.where(way == 1, one[node], zero[node])
        second = np.where(way == 2, one[node], both[node])
        first_care = care | np.where(way == 2, bit, np.uint64(0))
        second_value = value | np.where(way == 1, np.uint64(0), bit)
        node = np.concatenate([first, second])
        care = np.concatenate([first_care, care | bit])
        value = np.concatenate([value, second_value])
        feeds = np.concatenate([feeds, feeds])
        used = ~empty[depth + 1][node]
        node, care, value, feeds = node[used], care[used], value[used], feeds[used]
    rows: list[tuple[int, int, int]] = []
    for leaf, above, positive, fed in zip(
        leaves[node].tolist(), care.tolist(), value.tolist(), feeds.tolist(), strict=True
    ):
        table = tables[min(above.bit_count(), len(tables) - 1)]
        rows.extend((above | c, positive | v, fed) for c, v in table.cubes(leaf))
    found = np.array(rows, dtype=np.uint64).reshape(-1, 3)
    return found[:, 0], found[:, 1], found[:, 2]
