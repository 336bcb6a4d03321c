"""Putting templates onto qubits, many at a time: pieces to flat gate arrays."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from revsynth.errors import BudgetError
from revsynth.lowering.draft import Template

MOST_GATES = 150_000_000
"""More gates than this do not fit into memory with some ease (about 35 bytes each)."""


@dataclass
class Gates:
    """Gates laid out as in `circuit.model.Circuit`, composite kinds allowed, and how many bits they set."""

    kind: NDArray[np.uint8]
    offset: NDArray[np.int64]
    operand: NDArray[np.int32]
    condition: NDArray[np.int32]
    bit: NDArray[np.int32]
    bits: int

    def __len__(self) -> int:
        return len(self.kind)

    def qubit(self) -> NDArray[np.int32]:
        """The qubit of every operand: all but a gate's last are control literals that wait for 1."""
        control = np.ones(len(self.operand), dtype=np.int32)
        control[self.offset[1:] - 1] = 0
        return self.operand >> control


def assemble(
    templates: Sequence[Template],
    template: NDArray[np.int32],
    start: NDArray[np.int64],
    qubits: NDArray[np.int32],
) -> Gates:
    """Piece i is `templates[template[i]]` with local qubit j on `qubits[start[i] + j]`.

    Raises BudgetError for more than `MOST_GATES` gates.
    """
    sizes = np.array([(len(t), len(t.local), t.bits) for t in templates], dtype=np.int64).reshape(-1, 3)
    ends = np.cumsum(sizes[template], axis=0)
    total = ends[-1] if len(ends) else np.zeros(3, dtype=np.int64)
    if total[0] > MOST_GATES:
        raise BudgetError(f"the circuit would have {total[0]:,} gates, {MOST_GATES:,} are allowed")
    begin = ends - sizes[template]
    kind = np.empty(total[0], dtype=np.uint8)
    count = np.empty(total[0], dtype=np.int64)
    operand = np.empty(total[1], dtype=np.int32)
    condition = np.full(total[0], -1, dtype=np.int32)
    bit = np.full(total[0], -1, dtype=np.int32)
    order = np.argsort(template, kind="stable")
    cuts = np.searchsorted(template[order], np.arange(len(templates) + 1))
    for number, shape in enumerate(templates):
        rows = order[cuts[number] : cuts[number + 1]]
        gate = begin[rows, 0, None] + np.arange(len(shape))
        kind[gate] = shape.kind
        count[gate] = shape.count
        place = begin[rows, 1, None] + np.arange(len(shape.local))
        operand[place] = qubits[start[rows, None] + shape.local] * shape.scale
        if shape.bits:
            first = begin[rows, 2, None].astype(np.int32)
            bit[gate] = np.where(shape.bit >= 0, first + shape.bit, -1)
            condition[gate] = np.where(shape.condition >= 0, first + shape.condition, -1)
    offset = np.zeros(len(kind) + 1, dtype=np.int64)
    np.cumsum(count, out=offset[1:])
    return Gates(kind, offset, operand, condition, bit, int(total[2]))
