"""Which gates are Clifford, which are T gates, and which are neither.

A gate is Clifford where it takes Pauli matrices to Pauli matrices; a gate with one control is Clifford where
what it controls is a Pauli matrix times a power of i; with two controls, where that is a mere sign (a
controlled Z on the controls); with more, where it does nothing at all.
"""

from __future__ import annotations

import cmath
import math
from enum import IntEnum

from revsynth.circuit.model import TARGETS, Kind

TOLERANCE = 1e-9


class Class(IntEnum):
    """What an operation counts as; CLIFFORD takes in all that costs nothing here, measurements too."""

    CLIFFORD = 0
    CX = 1
    CZ = 2
    TOFFOLI = 3
    T = 4
    ROTATION = 5
    OTHER = 6


def classify(kind: Kind, operands: int, angles: tuple[float, ...]) -> Class:
    """The class of a gate with that many operands, controls and targets together; angles in radians.

    A controlled `gphase` is a phase gate on its last control, and a phase of pi is a Z.
    """
    controls = operands - TARGETS[kind]
    if kind in (Kind.MEASURE, Kind.RESET) or operands == 0:
        return Class.CLIFFORD
    if kind is Kind.SWAP:
        return Class.CLIFFORD if controls == 0 else Class.OTHER
    if kind is Kind.GPHASE:
        kind, controls = Kind.P, controls - 1
    if kind is Kind.P and _is_multiple(angles[0] - math.pi, 2 * math.pi):
        kind = Kind.Z
    if kind in (Kind.X, Kind.Z) and controls <= 2:
        singly = Class.CX if kind is Kind.X else Class.CZ
        return (Class.CLIFFORD, singly, Class.TOFFOLI)[controls]
    if controls == 0:
        return _one_qubit(kind, angles)
    if controls == 1 and kind is Kind.Y:
        return Class.CLIFFORD
    if kind in _TURNS:
        return _controlled_matrix(kind, angles, controls)
    return Class.OTHER


_TURNS = (Kind.P, Kind.RX, Kind.RY, Kind.RZ, Kind.U)


def _one_qubit(kind: Kind, angles: tuple[float, ...]) -> Class:
    if kind in (Kind.T, Kind.TDG):
        return Class.T
    if kind not in _TURNS:
        return Class.CLIFFORD
    if all(_is_multiple(angle, math.pi / 2) for angle in angles):
        return Class.CLIFFORD
    if kind in (Kind.P, Kind.RZ):
        return Class.T if _is_multiple(angles[0], math.pi / 4) else Class.ROTATION
    if kind is Kind.U and _u_is_clifford(*angles):
        return Class.CLIFFORD
    return Class.ROTATION


def _u_is_clifford(theta: float, phi: float, lam: float) -> bool:
    """U is RZ(phi) RY(theta) RZ(lam) up to a phase: where RY is I or Y, phi + lam or phi - lam counts."""
    if _is_multiple(theta, 2 * math.pi):
        return _is_multiple(phi + lam, math.pi / 2)
    return _is_multiple(theta - math.pi, 2 * math.pi) and _is_multiple(phi - lam, math.pi / 2)


def _controlled_matrix(kind: Kind, angles: tuple[float, ...], controls: int) -> Class:
    """A turn with controls: by its matrix [[a, b], [c, d]]."""
    a, b, c, d = _matrix(kind, angles)
    if abs(b) < TOLERANCE and abs(c) < TOLERANCE:
        first, second = a, d
    elif abs(a) < TOLERANCE and abs(d) < TOLERANCE:
        first, second = b, c
    else:
        return Class.OTHER
    if controls > 1:
        signs = (1, -1) if controls == 2 else (1,)
        same = any(abs(a - sign) < TOLERANCE and abs(d - sign) < TOLERANCE for sign in signs)
        return Class.CLIFFORD if same else Class.OTHER
    powers = all(abs(entry**4 - 1) < TOLERANCE for entry in (first, second))
    return Class.CLIFFORD if powers and abs((first / second) ** 2 - 1) < TOLERANCE else Class.OTHER


def _matrix(kind: Kind, angles: tuple[float, ...]) -> tuple[complex, complex, complex, complex]:
    """The matrix as in `circuit.model.Kind`, row by row."""
    angle = angles[0]
    cos, sin = math.cos(angle / 2), math.sin(angle / 2)
    if kind is Kind.P:
        return 1, 0, 0, cmath.exp(1j * angle)
    if kind is Kind.RZ:
        return cmath.exp(-0.5j * angle), 0, 0, cmath.exp(0.5j * angle)
    if kind is Kind.RX:
        return cos, -1j * sin, -1j * sin, cos
    if kind is Kind.RY:
        return cos, -sin, sin, cos
    _, phi, lam = angles
    both = cmath.exp(1j * (phi + lam))
    return cos, -cmath.exp(1j * lam) * sin, cmath.exp(1j * phi) * sin, both * cos


def _is_multiple(angle: float, unit: float) -> bool:
    """Whether an angle is a whole multiple of a unit, to 1e-9 radians."""
    return abs(angle - round(angle / unit) * unit) < TOLERANCE
