"""Neighbours that cancel or merge: X X, CX CX, T with T inverse, T T = S, a product written and erased again.

Two gates are neighbours where nothing lies between them on any of their qubits. One pass finds all, nested
pairs included: what was taken away uncovers what lay before it.
"""

from __future__ import annotations

from functools import cache
from typing import Any

import numpy as np
from numpy.typing import NDArray

from revsynth.circuit.model import Kind
from revsynth.lowering.assemble import Gates
from revsynth.lowering.draft import Composite

COMPILED_FROM = 150_000
"""From this many gates on, compiling pays."""

_EIGHTHS = {Kind.T: 1, Kind.S: 2, Kind.Z: 4, Kind.SDG: 6, Kind.TDG: 7}
_INVERSES = {
    Kind.X: Kind.X,
    Kind.Z: Kind.Z,
    Kind.H: Kind.H,
    Composite.RELATIVE: Composite.RELATIVE,
    Composite.AND: Composite.ERASE,
    Composite.ERASE: Composite.AND,
    Composite.OPEN: Composite.CLOSE,
    Composite.CLOSE: Composite.OPEN,
    Composite.HALF_NOT: Composite.HALF_NOT_BACK,
    Composite.HALF_NOT_BACK: Composite.HALF_NOT,
    Composite.HALF_Z: Composite.HALF_Z_BACK,
    Composite.HALF_Z_BACK: Composite.HALF_Z,
}
NONE = 255


@cache
def _tables() -> tuple[NDArray[np.uint8], NDArray[np.uint8], NDArray[np.uint8]]:
    """Inverse kind (NONE: none), eighths of a turn (0: no phase gate), the kind of each number of eighths."""
    inverse = np.full(256, NONE, dtype=np.uint8)
    eighths = np.zeros(256, dtype=np.uint8)
    single = np.full(8, NONE, dtype=np.uint8)
    for kind, other in _INVERSES.items():
        inverse[kind] = other
    for phase, turn in _EIGHTHS.items():
        eighths[phase] = turn
        single[turn] = phase
    return inverse, eighths, single


def cancel_neighbours(gates: Gates, qubits: int) -> Gates:
    """The same operation with fewer gates or as many; measurements and conditioned gates stay."""
    link = np.zeros(len(gates.operand), dtype=np.int32)
    last = np.full(qubits, -1, dtype=np.int32)
    keep = np.ones(len(gates), dtype=np.uint8)
    kind = gates.kind.copy()
    arrays: tuple[Any, ...] = (
        kind,
        gates.offset,
        gates.qubit(),
        gates.condition,
        *_tables(),
        last,
        link,
        keep,
    )
    if len(gates) >= COMPILED_FROM:
        from revsynth.lowering.kernels import compiled_sweep

        compiled_sweep()(*arrays)
    else:
        lists = [values.tolist() for values in arrays]
        sweep(*lists)
        kind = np.array(lists[0], dtype=np.uint8)
        keep = np.array(lists[-1], dtype=np.uint8)
    return _kept(gates, kind, keep.astype(bool))


def _kept(gates: Gates, kind: NDArray[np.uint8], keep: NDArray[np.bool_]) -> Gates:
    if keep.all():
        return Gates(kind, gates.offset, gates.operand, gates.condition, gates.bit, gates.bits)
    count = np.diff(gates.offset)
    offset = np.zeros(int(keep.sum()) + 1, dtype=np.int64)
    np.cumsum(count[keep], out=offset[1:])
    return Gates(
        kind[keep],
        offset,
        gates.operand[np.repeat(keep, count)],
        gates.condition[keep],
        gates.bit[keep],
        gates.bits,
    )


def sweep(
    kind: Any, offset: Any, qubit: Any, condition: Any, inverse: Any, eighths: Any, single: Any,
    last: Any, link: Any, keep: Any,
) -> None:  # fmt: skip
    """One pass over the gates, changing `kind` and `keep`; lists or arrays, plain or compiled.

    last: the latest gate left on each qubit; link: for every operand of a gate, the gate before it on that
    qubit.
    """
    for index in range(len(kind)):
        begin = offset[index]
        width = offset[index + 1] - begin
        top = last[qubit[begin]]
        if condition[index] >= 0 or top < 0 or condition[top] >= 0 or offset[top + 1] - offset[top] != width:
            top = -1
        elif width == 1 and eighths[kind[index]] > 0:
            # A phase gate joins those that end the qubit: at most two, a Clifford gate and then a T.
            place = qubit[begin]
            turn = eighths[kind[index]]
            first = index
            while (
                top >= 0
                and condition[top] < 0
                and eighths[kind[top]] > 0
                and offset[top + 1] - offset[top] == 1
            ):
                turn += eighths[kind[top]]
                first = top
                last[place] = link[offset[top]]
                keep[top] = 0
                top = last[place]
            keep[index] = 0
            turn = turn % 8
            if turn == 0:
                continue
            rest = single[turn] == 255
            keep[first] = 1
            kind[first] = single[turn - 1] if rest else single[turn]
            link[offset[first]] = last[place]
            last[place] = first
            if rest:
                keep[index] = 1
                kind[index] = single[1]
                link[begin] = first
                last[place] = index
            continue
        elif inverse[kind[index]] != kind[top]:
            top = -1
        else:
            at = offset[top]
            for k in range(width):
                if qubit[begin + k] != qubit[at + k] or last[qubit[begin + k]] != top:
                    top = -1
                    break
        if top >= 0:
            at = offset[top]
            for k in range(width):
                last[qubit[at + k]] = link[at + k]
            keep[index] = 0
            keep[top] = 0
        else:
            for k in range(begin, begin + width):
                link[k] = last[qubit[k]]
                last[qubit[k]] = index
