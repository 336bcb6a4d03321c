"""Where every operation of a circuit goes in a drawing: columns, packed left, broken into rows of columns.

Shared by the picture and the terminal drawing, so that both show the same steps.
"""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass
from fractions import Fraction

from revsynth.circuit.model import Circuit, Kind, Op


@dataclass(frozen=True)
class Column:
    """Operations drawn above each other at the same step; their lines do not overlap."""

    operations: tuple[Op, ...]


LABELS = {
    Kind.Y: "Y",
    Kind.Z: "Z",
    Kind.H: "H",
    Kind.S: "S",
    Kind.SDG: "S†",
    Kind.T: "T",
    Kind.TDG: "T†",
    Kind.SX: "√X",
    Kind.SXDG: "√X†",
    Kind.P: "P",
    Kind.RX: "Rx",
    Kind.RY: "Ry",
    Kind.RZ: "Rz",
    Kind.U: "U",
    Kind.RESET: "0",
    Kind.MEASURE: "M",
    Kind.GPHASE: "phase",
}
"""The letter in the box of a kind that is drawn as a box."""


def label(op: Op) -> str:
    """The text in an operation's box, angles as fractions of pi where they are."""
    text = LABELS[op.kind]
    if not op.angles:
        return text
    return f"{text}({', '.join(angle_text(angle) for angle in op.angles)})"


def angle_text(angle: float) -> str:
    """`π/4`, `-3π/2`, `0`, or four significant digits."""
    turns = Fraction(angle / math.pi).limit_denominator(64)
    if not math.isclose(float(turns) * math.pi, angle, abs_tol=1e-10):
        return f"{angle:.4g}"
    if turns == 0:
        return "0"
    top = {1: "π", -1: "-π"}.get(turns.numerator, f"{turns.numerator}π")
    return top if turns.denominator == 1 else f"{top}/{turns.denominator}"


def read_bits(circuit: Circuit, op: Op) -> tuple[int, ...]:
    """The classical bits that the operation's `if` reads, ascending."""
    if op.condition < 0:
        return ()
    guards = circuit.conditions[op.condition]
    return tuple(sorted({literal >> 1 for guard in guards for literal in guard.bits}))


def pack(circuit: Circuit, *, gap: int = 0) -> list[Column]:
    """Put each operation into the first column in which its lines, and `gap` more on both sides, are free.

    An operation never moves before another that touches one of its lines. One that writes or reads a bit also
    takes the lane of the bits, below the last line, and with it everything on the way there. Operations
    without lines (a constant phase) get a column of their own.
    """
    free = [0] * (circuit.qubits + 1 + gap)
    columns: list[list[Op]] = []
    barrier = 0
    for op in circuit:
        lines = op.qubits
        if lines:
            last = circuit.qubits if op.kind is Kind.MEASURE or op.condition >= 0 else max(lines)
            span = range(min(lines), last + 1 + gap)
            place = max(barrier, *(free[line] for line in span))
            for line in span:
                free[line] = place + 1
        else:
            place = barrier = len(columns)
            barrier += 1
        while len(columns) <= place:
            columns.append([])
        columns[place].append(op)
    return [Column(tuple(operations)) for operations in columns]


def wrap(columns: list[Column], width_of: Callable[[Column], int], room: int) -> list[list[Column]]:
    """Break the columns into rows that are at most `room` wide (at least one column a row)."""
    rows: list[list[Column]] = [[]]
    used = 0
    for column in columns:
        width = width_of(column)
        if rows[-1] and used + width > room:
            rows.append([])
            used = 0
        rows[-1].append(column)
        used += width
    return rows
