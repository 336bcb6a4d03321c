"""Cascades of multi-controlled NOTs, and of multi-controlled Z gates in phase oracles.

A *control literal* is `2 * line + 1` where the gate waits for 0 (negative control), `2 * line` where it
waits for 1. A phase gate has the target `PHASE` and multiplies by -1 where all its literals hold; it has
no distinguished target (common practice), and with no literal at all it is the constant phase -1.
"""

from __future__ import annotations

from collections.abc import Iterable, Iterator
from itertools import pairwise
from typing import NamedTuple, TypeAlias

import numpy as np
from numpy.typing import NDArray

Line: TypeAlias = int
Literal: TypeAlias = int

PHASE = -1


def literal(line: Line, negative: bool = False) -> Literal:
    """The control literal of `line`."""
    return 2 * line + int(negative)


def line_of(control: Literal) -> Line:
    """The line a control literal is on."""
    return control >> 1


def is_negative(control: Literal) -> bool:
    """True where the literal waits for 0."""
    return bool(control & 1)


class Gate(NamedTuple):
    """One gate: NOT on `target` (or a phase of -1 for `PHASE`) where all `controls` hold; controls ascend."""

    target: int
    controls: tuple[Literal, ...] = ()

    @property
    def lines(self) -> tuple[Line, ...]:
        """Every line the gate touches: controls ascending, then the target."""
        touched = tuple(control >> 1 for control in self.controls)
        return touched if self.target == PHASE else (*touched, self.target)


class Cascade:
    """An immutable sequence of gates on `lines` lines, first gate first, in flat arrays.

    target:  int32 (g,)    the target line, or PHASE
    offset:  int64 (g+1,)  gate i has the control literals control[offset[i]:offset[i+1]], ascending
    control: int32 (total,)
    """

    __slots__ = ("control", "lines", "offset", "target")

    def __init__(
        self,
        lines: int,
        target: NDArray[np.int32],
        offset: NDArray[np.int64],
        control: NDArray[np.int32],
    ) -> None:
        self.lines = lines
        self.target = target
        self.offset = offset
        self.control = control

    @classmethod
    def from_gates(cls, lines: int, gates: Iterable[Gate]) -> Cascade:
        """Collect gates; raises ValueError for a line out of range, repeated, or controls out of order."""
        target: list[int] = []
        offset = [0]
        control: list[int] = []
        for gate in gates:
            _check(gate, lines)
            target.append(gate.target)
            control.extend(gate.controls)
            offset.append(len(control))
        return cls(
            lines,
            np.array(target, dtype=np.int32),
            np.array(offset, dtype=np.int64),
            np.array(control, dtype=np.int32),
        )

    @classmethod
    def from_masks(
        cls,
        lines: int,
        target: NDArray[np.integer],
        care: NDArray[np.uint64],
        value: NDArray[np.uint64],
    ) -> Cascade:
        """From bit masks bit l of `care`: l is a control; of `value`: it waits for 1."""
        if lines > 64:
            raise ValueError(f"masks hold 64 lines, not {lines}")
        count = np.bitwise_count(care).astype(np.int64)
        offset = np.zeros(len(care) + 1, dtype=np.int64)
        np.cumsum(count, out=offset[1:])
        control = np.empty(int(offset[-1]), dtype=np.int32)
        cursor = offset[:-1].copy()
        for line in range(lines):
            bit = np.uint64(line)
            has = ((care >> bit) & np.uint64(1)).astype(bool)
            negative = 1 - ((value[has] >> bit) & np.uint64(1)).astype(np.int32)
            control[cursor[has]] = 2 * line + negative
            cursor[has] += 1
        return cls(lines, np.asarray(target).astype(np.int32), offset, control)

    def masks(self) -> tuple[NDArray[np.int32], NDArray[np.uint64], NDArray[np.uint64]]:
        """(target, care, value) as in `from_masks`; raises ValueError above 64 lines."""
        if self.lines > 64:
            raise ValueError(f"masks hold 64 lines, not {self.lines}")
        bit = np.uint64(1) << (self.control >> 1).astype(np.uint64)
        owner = np.repeat(np.arange(len(self)), np.diff(self.offset))
        care = np.zeros(len(self), dtype=np.uint64)
        value = np.zeros(len(self), dtype=np.uint64)
        np.bitwise_or.at(care, owner, bit)
        positive = (self.control & 1) == 0
        np.bitwise_or.at(value, owner[positive], bit[positive])
        return self.target, care, value

    def __len__(self) -> int:
        return len(self.target)

    def __iter__(self) -> Iterator[Gate]:
        control = self.control.tolist()
        ends = self.offset.tolist()
        controls = [tuple(control[begin:end]) for begin, end in pairwise(ends)]
        return map(Gate._make, zip(self.target.tolist(), controls, strict=True))

    def __eq__(self, other: object) -> bool:
        if not isinstance(other, Cascade):
            return NotImplemented
        return (
            self.lines == other.lines
            and np.array_equal(self.target, other.target)
            and np.array_equal(self.offset, other.offset)
            and np.array_equal(self.control, other.control)
        )

    __hash__ = None  # type: ignore[assignment]

    def __repr__(self) -> str:
        return f"<Cascade of {len(self)} gates on {self.lines} lines>"

    def _repr_svg_(self) -> str | None:
        """The drawing that a notebook shows, if it is not too large; else the text form stands for it."""
        from revsynth.report.cascade_svg import notebook_picture

        return notebook_picture(self)

    def __add__(self, other: Cascade) -> Cascade:
        """This cascade, then the other (on as many lines)."""
        if self.lines != other.lines:
            raise ValueError(f"cascades on {self.lines} and {other.lines} lines do not compose")
        return Cascade(
            self.lines,
            np.concatenate([self.target, other.target]),
            np.concatenate([self.offset, other.offset[1:] + self.offset[-1]]),
            np.concatenate([self.control, other.control]),
        )

    def inverse(self) -> Cascade:
        """The reversed cascade: every gate is its own inverse (common practice)."""
        return Cascade.from_gates(self.lines, reversed(list(self)))

    def on_lines(self, lines: int, placement: tuple[Line, ...]) -> Cascade:
        """The same gates on `lines` lines, line i moved to `placement[i]`."""
        moved = (
            Gate(
                PHASE if gate.target == PHASE else placement[gate.target],
                tuple(sorted(2 * placement[c >> 1] + (c & 1) for c in gate.controls)),
            )
            for gate in self
        )
        return Cascade.from_gates(lines, moved)


def _check(gate: Gate, lines: int) -> None:
    previous = -1
    for control in gate.controls:
        if control >> 1 <= previous or control >> 1 >= lines or control >> 1 == gate.target:
            raise ValueError(f"{gate}: control lines must ascend below {lines} and differ from the target")
        previous = control >> 1
    if not PHASE <= gate.target < lines:
        raise ValueError(f"{gate}: the target must be a line below {lines}, or PHASE")
