"""Doubly-controlled gates in Clifford+T: exact, up to a relative phase, and in halves that meet.

Sources: seven T for the exact gate, Amy, Maslov, Mosca, Roetteler, "A meet-in-the-middle algorithm for fast
synthesis of depth-optimal quantum circuits", IEEE TCAD 32(6), 2013; four T up to a relative phase, Maslov,
"Advantages of using relative-phase Toffoli gates", Phys. Rev. A 93, 2016.
"""

from __future__ import annotations

from revsynth.lowering.draft import Draft, Tip


def exact_z(draft: Draft, a: int, b: int, c: int) -> None:
    """Z on three qubits, which are alike: 7 T, 6 CX.

    4abc = a + b + c - (a^b) - (a^c) - (b^c) + (a^b^c), one T for each term.
    """
    draft.cx(b, c)
    draft.t(c, inverse=True)
    draft.cx(a, c)
    draft.t(c)
    draft.cx(b, c)
    draft.t(c, inverse=True)
    draft.cx(a, c)
    draft.t(c)
    draft.t(b)
    draft.cx(a, b)
    draft.t(b, inverse=True)
    draft.cx(a, b)
    draft.t(a)


def exact_not(draft: Draft, a: int, b: int, target: int) -> None:
    """NOT with two controls: 7 T, 6 CX."""
    draft.h(target)
    exact_z(draft, a, b, target)
    draft.h(target)


def relative_not(draft: Draft, a: int, b: int, target: int) -> None:
    """NOT with two controls, times Z on the target where a = 1, b = 0, i or -i where both are 1: 4 T, 3 CX.

    It is its own inverse and permutes basis states up to phases.
    """
    open_half(draft, b, target)
    draft.cx(a, target)
    close_half(draft, b, target)


def open_half(draft: Draft, b: int, target: int) -> None:
    """The part of `relative_not` before the CNOT from a; it touches only b and the target."""
    draft.h(target)
    draft.t(target)
    draft.cx(b, target)
    draft.t(target, inverse=True)


def close_half(draft: Draft, b: int, target: int) -> None:
    """The part of `relative_not` after the CNOT from a: the inverse of `open_half`."""
    draft.t(target)
    draft.cx(b, target)
    draft.t(target, inverse=True)
    draft.h(target)


def difference(draft: Draft, tip: Tip, line: int, b: int, target: int, inverse: bool) -> None:
    """Half of a doubly-controlled tip that is used twice while `line` is changed in between: 4 T each.

    Done once with `line` = u and once, inverse, with `line` = u ^ d, b and the target's part being the same,
    the two together are the exact tip with the controls d and b: the terms of 4 u b t without u cancel.
    """
    if tip is not Tip.Z:
        draft.h(target)
    for control in (target, b, target, b):
        draft.t(line, inverse=inverse)
        draft.cx(control, line)
        inverse = not inverse
    if tip is not Tip.Z:
        draft.h(target)
