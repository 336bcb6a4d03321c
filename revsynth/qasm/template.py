"""Gates as templates: operations on the gate's own qubits 0, 1, ..., and what modifiers make of them.

Source of the modifiers' meaning: the OpenQASM 3 standard, "Quantum gate modifiers".
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from typing import NamedTuple, TypeAlias

from revsynth.circuit.model import Kind


class Piece(NamedTuple):
    """One operation of a template; control literals and targets count the gate's qubits from 0."""

    kind: Kind
    controls: tuple[int, ...]
    targets: tuple[int, ...]
    angles: tuple[float, ...] = ()


Template: TypeAlias = tuple[Piece, ...]
"""The operations of a gate, first one first."""

_TWINS = {
    Kind.S: Kind.SDG,
    Kind.SDG: Kind.S,
    Kind.T: Kind.TDG,
    Kind.TDG: Kind.T,
    Kind.SX: Kind.SXDG,
    Kind.SXDG: Kind.SX,
}
_OWN_INVERSE = (Kind.X, Kind.Y, Kind.Z, Kind.H, Kind.SWAP)
_TURNS = (Kind.P, Kind.RX, Kind.RY, Kind.RZ, Kind.GPHASE)
_ROOTS: dict[Kind, tuple[Kind, float]] = {
    Kind.Z: (Kind.P, math.pi),
    Kind.S: (Kind.P, math.pi / 2),
    Kind.SDG: (Kind.P, -math.pi / 2),
    Kind.T: (Kind.P, math.pi / 4),
    Kind.TDG: (Kind.P, -math.pi / 4),
    Kind.X: (Kind.RX, math.pi),
    Kind.SX: (Kind.RX, math.pi / 2),
    Kind.SXDG: (Kind.RX, -math.pi / 2),
    Kind.Y: (Kind.RY, math.pi),
}
"""Kinds as turns: the kind is that turn (for RX and RY, times exp(i angle / 2))."""
_NAMED: dict[tuple[Kind, float], Kind] = {
    (Kind.P, 1.0): Kind.Z,
    (Kind.P, 0.5): Kind.S,
    (Kind.P, -0.5): Kind.SDG,
    (Kind.P, 0.25): Kind.T,
    (Kind.P, -0.25): Kind.TDG,
    (Kind.RX, 1.0): Kind.X,
    (Kind.RX, 0.5): Kind.SX,
    (Kind.RX, -0.5): Kind.SXDG,
    (Kind.RY, 1.0): Kind.Y,
}
"""Turns by these parts of pi have a kind of their own."""


def place(template: Template, qubits: Sequence[int]) -> Template:
    """The template with its qubit i on `qubits[i]`."""
    return tuple(
        Piece(
            piece.kind,
            tuple(2 * qubits[control >> 1] | (control & 1) for control in piece.controls),
            tuple(qubits[target] for target in piece.targets),
            piece.angles,
        )
        for piece in template
    )


def controlled(template: Template, literals: Sequence[int], width: int) -> Template:
    """Controls before all others: qubits 0 ... k-1 with the polarities of `literals` (0: fires at 1).

    Args:
        literals: one 0 (positive) or 1 (negative) for each of the k controls.
        width: qubits of the template without them.
    """
    count = len(literals)
    moved = place(template, range(count, count + width))
    added = tuple(2 * index + polarity for index, polarity in enumerate(literals))
    return tuple(piece._replace(controls=added + piece.controls) for piece in moved)


def inverse(template: Template) -> Template:
    """The inverse of every operation, in reverse order."""
    return tuple(_inverse_piece(piece) for piece in reversed(template))


def _inverse_piece(piece: Piece) -> Piece:
    if piece.kind in _OWN_INVERSE:
        return piece
    if piece.kind in _TWINS:
        return piece._replace(kind=_TWINS[piece.kind])
    if piece.kind in _TURNS:
        return piece._replace(angles=(-piece.angles[0],))
    theta, phi, lam = piece.angles
    return piece._replace(angles=(-theta, -lam, -phi))


def whole_power(template: Template, exponent: int) -> Template | None:
    """The template `exponent` times in a row, in short form where it is a single operation.

    None where it has to be repeated, |exponent| times (of the inverse where negative).
    """
    if exponent in (0, 1, -1):
        return ((), template, inverse(template))[exponent]
    if len(template) != 1:
        return None
    piece = template[0]
    if piece.kind in _OWN_INVERSE:
        return template if exponent % 2 else ()
    if piece.kind in _TURNS:
        return (piece._replace(angles=(piece.angles[0] * exponent,)),)
    if piece.kind in _ROOTS:
        return _turned(piece, exponent)
    return None


def broken_power(template: Template, exponent: float) -> Template | None:
    """The principal power for an exponent that is no integer; None where it has no such form here.

    Eigenvalues exp(ia) with a in (-pi, pi] become exp(ia * exponent), as the standard says for `pow`.
    """
    if not template:
        return ()
    if len(template) != 1:
        return None
    piece = template[0]
    if piece.kind in _ROOTS:
        return _turned(piece, exponent)
    if piece.kind in (Kind.P, Kind.GPHASE):
        principal = math.remainder(piece.angles[0], 2 * math.pi)
        if principal <= -math.pi:
            principal += 2 * math.pi
        return (piece._replace(angles=(principal * exponent,)),)
    if piece.kind in (Kind.RX, Kind.RY, Kind.RZ) and abs(piece.angles[0]) < 2 * math.pi:
        return (piece._replace(angles=(piece.angles[0] * exponent,)),)
    return None


def _turned(piece: Piece, exponent: float) -> Template:
    """A power of a kind that is a turn; by name where the result has one."""
    turn, angle = _ROOTS[piece.kind]
    parts = math.remainder(angle / math.pi * exponent, 2.0)
    if parts == -1.0:
        parts = 1.0
    if parts == 0:
        return ()
    if (turn, parts) in _NAMED:
        return (piece._replace(kind=_NAMED[turn, parts]),)
    turned = piece._replace(kind=turn, angles=(parts * math.pi,))
    if turn is Kind.P:
        return (turned,)
    return (turned, Piece(Kind.GPHASE, piece.controls, (), (parts * math.pi / 2,)))
