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
    kind: Any,
    offset: Any,
    qubit: Any,
    condition: Any,
    inverse: Any,
    eighths: Any,
    single: Any,
    last: Any,
    link: Any,
    keep: Any,
) -> None:
    """One pass over the gates, changing `kind` and `keep`; lists or arrays, plain or compiled.

    last: the latest gate left on each qubit; link: for every operand of a gate, the gate before it on that
    qubit.
    """
    for index in range(len(kind)):
        current = index
        while condition[current] < 0:
            begin = offset[current]
            width = offset[current + 1] - begin
            top = last[qubit[begin]]
            if top < 0 or condition[top] >= 0 or offset[top + 1] - offset[top] != width:
                break
            at = offset[top]
            turn, other = eighths[kind[current]], eighths[kind[top]]
            if width == 1 and turn > 0 and other > 0:
                total = (turn + other) % 8
                if total != 0 and single[total] == 255:
                    break
                keep[current] = 0
                last[qubit[begin]] = link[at]
                if total == 0:
                    keep[top] = 0
                    current = -1
                    break
                kind[top] = single[total]
                current = top
                continue
            if inverse[kind[current]] != kind[top]:
                break
            same = True
            for k in range(width):
                if qubit[begin + k] != qubit[at + k] or last[qubit[begin + k]] != top:
                    same = False
                    break
            if not same:
                break
            for k in range(width):
                last[qubit[at + k]] = link[at + k]
            keep[current] = 0
            keep[top] = 0
            current = -1
            break
        if current >= 0:
            for k in range(offset[current], offset[current + 1]):
                link[k] = last[qubit[k]]
                last[qubit[k]] = current
