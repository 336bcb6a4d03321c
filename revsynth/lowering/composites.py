"""What composite gates stand for in each gate set."""

from __future__ import annotations

from collections.abc import Callable
from functools import cache

from revsynth.circuit.model import Kind
from revsynth.lowering.and_gate import measure_and_away, unwrite_and, write_and
from revsynth.lowering.draft import Composite, Draft, Template, Tip
from revsynth.lowering.toffoli import (
    close_half,
    difference,
    exact_not,
    exact_z,
    open_half,
    relative_not,
)
from revsynth.options import GateSet, Uncompute

Writer = Callable[[Draft, int, int, int], None]


def _plain(kind: Kind) -> Writer:
    """One doubly-controlled gate, as the gate set `toffoli` has it."""
    return lambda draft, a, b, target: draft.put(kind, (a, b, target))


def _open(draft: Draft, a: int, b: int, target: int) -> None:
    open_half(draft, b, target)
    draft.cx(a, target)


def _close(draft: Draft, a: int, b: int, target: int) -> None:
    draft.cx(a, target)
    close_half(draft, b, target)


def _half(tip: Tip, inverse: bool) -> Writer:
    return lambda draft, line, b, target: difference(draft, tip, line, b, target, inverse)


DOUBLY_NOT = int(Kind.X)
DOUBLY_Z = int(Kind.Z)
"""Keys of the doubly-controlled X and Z in the tables below."""

_CLIFFORD_T: dict[int, Writer] = {
    DOUBLY_NOT: exact_not,
    DOUBLY_Z: exact_z,
    Composite.RELATIVE: relative_not,
    Composite.AND: write_and,
    Composite.ERASE: unwrite_and,
    Composite.OPEN: _open,
    Composite.CLOSE: _close,
    Composite.HALF_NOT: _half(Tip.NOT, inverse=False),
    Composite.HALF_NOT_BACK: _half(Tip.NOT, inverse=True),
    Composite.HALF_Z: _half(Tip.Z, inverse=False),
    Composite.HALF_Z_BACK: _half(Tip.Z, inverse=True),
}
_TOFFOLI: dict[int, Writer] = {
    DOUBLY_NOT: _plain(Kind.X),
    DOUBLY_Z: _plain(Kind.Z),
    Composite.RELATIVE: _plain(Kind.X),
    Composite.AND: _plain(Kind.X),
    Composite.ERASE: _plain(Kind.X),
    Composite.OPEN: _plain(Kind.X),
    Composite.CLOSE: _plain(Kind.X),
    Composite.HALF_NOT: _plain(Kind.X),
    Composite.HALF_NOT_BACK: _plain(Kind.X),
    Composite.HALF_Z: _plain(Kind.Z),
    Composite.HALF_Z_BACK: _plain(Kind.Z),
}


@cache
def expansion(kind: int, gates: GateSet, uncompute: Uncompute) -> Template:
    """The gates of a `Composite`, or of X or Z with two controls, on local qubits a, b, target."""
    table = _TOFFOLI if gates == "toffoli" else _CLIFFORD_T
    writer = measure_and_away if kind == Composite.ERASE and uncompute == "measured" else table[kind]
    draft = Draft()
    writer(draft, 0, 1, 2)
    return draft.template()
