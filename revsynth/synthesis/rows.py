"""Transformation-based synthesis of many small permutations at once, row by row.

Source: Miller, Maslov, Dueck, "A transformation based algorithm for reversible logic synthesis", DAC 2003.
Rows 0, 1, 2, ... are brought to their own value one after the other, by gates that cannot move a smaller
value. Numpy over a whole batch: small work needs no compiler, and a search over relabellings of one
permutation is a batch like any other. For one large permutation see `kernels`.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

import numpy as np
from numpy.typing import NDArray

from revsynth.cascade.model import Cascade
from revsynth.cascade.price import gate_t
from revsynth.options import Uncompute

Directions = Literal["one", "both"]
"""`one`: gates are added behind the permutation only; `both`: before it too, whichever side is nearer."""
ControlChoice = Literal["minimal", "published"]
"""`published`: all ones of the current value; `minimal`: its highest ones until they reach the row."""
Side = Literal["distance", "price"]
"""How `both` chooses the side: by Hamming distance, or by the T gates of the row's own gates first.

Ties go to the smaller value, which leaves the larger ones for later rows to use (7.36 instead of 7.39
gates on average over all functions of 3 lines)."""

MAX_LINES = 16


@dataclass(frozen=True)
class GateLists:
    """Positive-control cascades of a batch, flat.

    offset: int64 (count + 1,), cascade k has the gates offset[k]:offset[k + 1], first gate first;
    target: int32 (gates,); care: uint64 (gates,), bit l set where line l is a (positive) control.
    """

    lines: int
    offset: NDArray[np.int64]
    target: NDArray[np.int32]
    care: NDArray[np.uint64]

    def __len__(self) -> int:
        return len(self.offset) - 1

    def cascade(self, index: int) -> Cascade:
        """Cascade `index` of the batch."""
        part = slice(int(self.offset[index]), int(self.offset[index + 1]))
        return Cascade.from_masks(self.lines, self.target[part], self.care[part], self.care[part])

    def sizes(self) -> NDArray[np.int64]:
        """Gates of each cascade, shape (count,)."""
        return np.diff(self.offset)

    def prices(self, uncompute: Uncompute) -> NDArray[np.int64]:
        """T gates of each cascade as `cascade.price` counts them, shape (count,)."""
        each = np.array([gate_t(k, uncompute) for k in range(self.lines + 1)], dtype=np.int64)
        total = np.zeros(len(self.care) + 1, dtype=np.int64)
        np.cumsum(each[np.bitwise_count(self.care)], out=total[1:])
        return total[self.offset[1:]] - total[self.offset[:-1]]


def transform_many(
    tables: NDArray[np.integer],
    *,
    directions: Directions = "both",
    controls: ControlChoice = "minimal",
    side: Side = "distance",
) -> GateLists:
    """Synthesise every permutation of `tables`, shape (count, 2**lines), entry x the image of x.

    Bit 0 of a value is line 0. Time grows as count * lines * 4**lines. Raises ValueError where a row of
    `tables` is no permutation or the shape is wrong.
    """
    forward, lines = _checked(tables)
    batch = _Batch(forward, lines, directions == "both", side)
    for row in range(1 << lines):
        batch.bring_home(row, _control_table(lines, row, controls))
    return batch.gate_lists()


def _checked(tables: NDArray[np.integer]) -> tuple[NDArray[np.integer], int]:
    if tables.ndim != 2 or tables.shape[1] & (tables.shape[1] - 1) or tables.shape[1] == 0:
        raise ValueError(f"tables of shape (count, 2**lines) wanted, not {tables.shape}")
    lines = tables.shape[1].bit_length() - 1
    if lines > MAX_LINES:
        raise ValueError(f"{lines} lines are too many for the batch form: at most {MAX_LINES}")
    wide = np.asarray(tables, dtype=np.int64)
    if not np.array_equal(np.sort(wide, axis=1), np.broadcast_to(np.arange(1 << lines), wide.shape)):
        raise ValueError("every row of tables must hold each of 0 ... 2**lines - 1 once")
    return wide.astype(np.uint8 if lines <= 8 else np.uint16), lines


def _control_table(lines: int, row: int, controls: ControlChoice) -> NDArray[np.uint16]:
    """The controls for each value left after taking the target out of it, shape (2**lines,).

    A gate with positive controls C moves no value below C, so C >= row keeps all rows that are done.
    """
    value = np.arange(1 << lines, dtype=np.uint16)
    if controls == "published":
        return value
    chosen = np.zeros_like(value)
    for bit in reversed(range(lines)):
        chosen |= np.where(chosen < row, value & np.uint16(1 << bit), np.uint16(0))
    return chosen


class _Batch:
    """The state of a batch: tables after the gates so far, value side only.

    With the gates a (before) and b (behind), `after[k, x]` is b(p(x)) and `before[k, y]` the value of
    a^-1(p^-1(y)). So each gate changes one table by an XOR, and the current permutation b.p.a is read
    through the original one.
    """

    def __init__(self, forward: NDArray[np.integer], lines: int, both: bool, side: Side) -> None:
        self.lines = lines
        self.both = both
        self.side = side
        self.forward = forward
        self.after = forward.copy()
        self.index = np.arange(len(forward))
        if both:
            self.inverse = np.argsort(forward, axis=1).astype(forward.dtype)
            self.before = self.inverse.copy()
        self.steps: list[tuple[NDArray[np.int64], NDArray[np.uint8], int, NDArray[np.uint16]]] = []

    def bring_home(self, row: int, control: NDArray[np.uint16]) -> None:
        """Add the gates that make `row` its own image in every permutation of the batch."""
        value, on_input = self._nearer_side(row, control)
        for bit in (*self._bits(row, wanted=1), *self._bits(row, wanted=0)):
            wrong = np.flatnonzero(((value ^ row) >> bit) & 1)
            if wrong.size:
                self._gate(wrong, on_input, bit, control[value[wrong] & ~(1 << bit)])
                value[wrong] ^= 1 << bit

    def _bits(self, row: int, wanted: int) -> list[int]:
        return [bit for bit in range(self.lines) if (row >> bit) & 1 == wanted]

    def _nearer_side(
        self, row: int, control: NDArray[np.uint16]
    ) -> tuple[NDArray[np.int64], NDArray[np.uint8]]:
        if not self.both:
            return self.after[:, row].astype(np.int64), np.zeros(len(self.index), dtype=np.uint8)
        image_of = np.argmax(self.before == row, axis=1)
        output = self.after[self.index, self.inverse[self.index, image_of]].astype(np.int64)
        origin_of = np.argmax(self.after == row, axis=1)
        source = self.before[self.index, self.forward[self.index, origin_of]].astype(np.int64)
        cost = _row_cost(self.lines, row, control, self.side)
        on_input = (cost[source] < cost[output]).astype(np.uint8)
        return np.where(on_input, source, output), on_input

    def _gate(
        self, who: NDArray[np.int64], on_input: NDArray[np.uint8], bit: int, care: NDArray[np.uint16]
    ) -> None:
        self.steps.append((who, on_input[who], bit, care))
        for flag, table in ((0, self.after), (1, self.before if self.both else None)):
            mine = on_input[who] == flag
            if table is None or not mine.any():
                continue
            part = table[who[mine]]
            mask = care[mine].astype(part.dtype)[:, None]
            part ^= ((part & mask) == mask).astype(part.dtype) << part.dtype.type(bit)
            table[who[mine]] = part

    def gate_lists(self) -> GateLists:
        """Gates before the permutation in their order, then those behind it in reverse."""
        count = len(self.index)
        if not self.steps:
            empty = np.zeros(0, dtype=np.int64)
            return GateLists(
                self.lines, np.zeros(count + 1, np.int64), empty.astype(np.int32), empty.astype(np.uint64)
            )
        who = np.concatenate([step[0] for step in self.steps])
        on_input = np.concatenate([step[1] for step in self.steps]).astype(bool)
        length = [len(step[0]) for step in self.steps]
        when = np.repeat(np.arange(len(self.steps)), length)
        target = np.repeat(np.array([step[2] for step in self.steps], dtype=np.int32), length)
        care = np.concatenate([step[3] for step in self.steps]).astype(np.uint64)
        order = np.lexsort((np.where(on_input, when, 2 * len(self.steps) - when), who))
        offset = np.zeros(count + 1, dtype=np.int64)
        np.cumsum(np.bincount(who, minlength=count), out=offset[1:])
        return GateLists(self.lines, offset, target[order], care[order])


def _row_cost(lines: int, row: int, control: NDArray[np.uint16], side: Side) -> NDArray[np.int64]:
    """What the side is chosen by, for each value: distance (after T gates), ties to the smaller value."""
    value = np.arange(1 << lines, dtype=np.int64)
    cost = np.bitwise_count(value ^ row).astype(np.int64)
    if side == "price":
        cost += 64 * _row_price(lines, row, control)
    keyed: NDArray[np.int64] = (cost << lines) + value
    return keyed


def _row_price(lines: int, row: int, control: NDArray[np.uint16]) -> NDArray[np.int64]:
    """T gates (4 an AND) of the gates that take each value >= row to `row`, shape (2**lines,)."""
    value = np.arange(1 << lines, dtype=np.int64)
    total = np.zeros(1 << lines, dtype=np.int64)
    bits = sorted(range(lines), key=lambda bit: (1 - ((row >> bit) & 1), bit))
    for bit in bits:
        wrong = (((value ^ row) >> bit) & 1).astype(bool)
        used = np.bitwise_count(control[value & ~(1 << bit)]).astype(np.int64)
        total += np.where(wrong, 4 * np.maximum(used - 1, 0), 0)
        value = np.where(wrong, value ^ (1 << bit), value)
    return total
