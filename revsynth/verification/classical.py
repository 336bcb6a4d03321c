"""Classical circuits on all inputs at once: NOTs with controls, and signs.

A *column* is a Python integer: bit i is the value that one qubit has in lane i, and a lane is one input.
Measured on columns of 2**10 to 2**16 lanes, Python's integers are as fast as numpy arrays or faster (0.2
against 0.4 microseconds an operation at 2**16) and share what does not change, so no array library is needed.
"""

from __future__ import annotations

from collections.abc import Sequence
from typing import TypeAlias

from revsynth.verification.steps import FLIP, Step

Column: TypeAlias = int
"""Bit i is the value in lane i."""

SIGN = -1

Gate: TypeAlias = tuple[int, tuple[int, ...], tuple[int, ...]]
"""(target or SIGN, positive controls, negative controls)."""


def compile_gates(steps: Sequence[Step]) -> list[Gate]:
    """Gates of a circuit for which `is_classical` holds."""
    return [
        (
            step.target if step.act == FLIP else SIGN,
            tuple(literal >> 1 for literal in step.literals if not literal & 1),
            tuple(literal >> 1 for literal in step.literals if literal & 1),
        )
        for step in steps
    ]


def run_classical(
    gates: Sequence[Gate], start: Sequence[Column], ones: Column
) -> tuple[list[Column], Column]:
    """The columns of all qubits afterwards, and the column of signs (1 where the phase is -1).

    start: one column a qubit; ones: the column that is 1 in every lane.
    """
    columns = list(start)
    sign = 0
    for target, positive, negative in gates:
        if positive:
            product = columns[positive[0]]
            for qubit in positive[1:]:
                product &= columns[qubit]
        else:
            product = ones
        for qubit in negative:
            product ^= product & columns[qubit]
        if target >= 0:
            columns[target] ^= product
        else:
            sign ^= product
    return columns, sign
