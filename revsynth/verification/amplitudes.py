"""Amplitudes of many basis states: exactly in Z[omega], omega = exp(i pi/4), or as complex numbers.

Exact amplitudes are rows (a, b, c, d) of int64 for (a + b omega + c omega**2 + d omega**3) / sqrt(2)**halves
with one `halves` for all rows; Clifford+T never leaves these (Giles, Selinger, Phys. Rev. A 87, 2013). Both
classes offer the same operations.
"""

from __future__ import annotations

import math
from typing import Any, TypeAlias

import numpy as np
from numpy.typing import NDArray

from revsynth.verification.outcome import OutgrownError

Rows: TypeAlias = NDArray[Any]
"""Shape (rows, 4) int64 for Exact, (rows,) complex128 for Floating."""

LARGEST = 1 << 30
"""No coefficient may be larger, so that squares and products stay inside 64 bits."""

TOLERANCE = 1e-9
"""How far a complex amplitude may be from what it should be."""

_OMEGA = np.exp(1j * math.pi / 4)


class Exact:
    """Amplitudes in Z[omega]."""

    name = "exact integers"

    @staticmethod
    def ones(rows: int) -> Rows:
        """The amplitude 1, `rows` times."""
        amplitudes = np.zeros((rows, 4), dtype=np.int64)
        amplitudes[:, 0] = 1
        return amplitudes

    @staticmethod
    def turned(amplitudes: Rows, amount: int) -> Rows:
        """Times omega**amount."""
        turned = np.roll(amplitudes, amount & 3, axis=1)
        turned[:, : amount & 3] *= -1
        return -turned if amount & 4 else turned

    @staticmethod
    def rotated(amplitudes: Rows, angle: float) -> Rows:
        """Times exp(i angle): not possible here."""
        raise AssertionError(f"a phase of {angle} is no power of omega")

    @staticmethod
    def halved(amplitudes: Rows, halves: int) -> tuple[Rows, int]:
        """Divide by sqrt(2): count it, then cancel what all rows have in common.

        x / sqrt(2) = x (omega - omega**3) / 2 is in the ring where a, c have the same parity, and b, d.
        Raises OutgrownError where a coefficient outgrows its limit.
        """
        halves += 1
        while halves > 0:
            a, b, c, d = amplitudes.T
            if ((a ^ c) & 1).any() or ((b ^ d) & 1).any():
                break
            amplitudes = np.stack(((b - d) >> 1, (a + c) >> 1, (b + d) >> 1, (c - a) >> 1), axis=1)
            halves -= 1
        if amplitudes.size and int(np.abs(amplitudes).max()) > LARGEST:
            raise OutgrownError("amplitudes outgrow exact 64-bit arithmetic")
        return amplitudes, halves

    @staticmethod
    def nonzero(amplitudes: Rows) -> NDArray[np.bool_]:
        """Which rows are not 0."""
        return np.asarray(amplitudes.any(axis=1), dtype=np.bool_)

    visible = nonzero
    """Which rows of a final state count."""

    @staticmethod
    def weights(amplitudes: Rows, lane: NDArray[np.int64], lanes: int) -> NDArray[Any]:
        """The sum of |amplitude|**2 a lane, as (u, v) for u + v sqrt(2): shape (lanes, 2), int64."""
        largest = int(np.abs(amplitudes).max()) if amplitudes.size else 0
        most = int(np.bincount(lane, minlength=1).max()) if lane.size else 0
        if 4 * largest * largest * most >= 1 << 62:
            raise OutgrownError("amplitudes outgrow exact 64-bit arithmetic")
        a, b, c, d = amplitudes.T
        found = np.zeros((lanes, 2), dtype=np.int64)
        np.add.at(found[:, 0], lane, a * a + b * b + c * c + d * d)
        np.add.at(found[:, 1], lane, a * b + b * c + c * d - d * a)
        return found

    @staticmethod
    def differs(some: NDArray[Any], other: NDArray[Any]) -> NDArray[np.bool_]:
        """Which rows of weights differ from one other weight."""
        return np.asarray((some != other).any(axis=1), dtype=np.bool_)

    @staticmethod
    def kept(amplitudes: Rows, weight: NDArray[Any]) -> Rows | None:
        """The amplitudes of an outcome with that weight (shape (2,)) in every lane, None for weight 0."""
        return amplitudes if weight.any() else None

    @staticmethod
    def proportional(some: Rows, others: Rows) -> bool:
        """Whether `others` is one constant times `some`."""
        return bool((_times(some, others[:1]) == _times(others, some[:1])).all())

    @staticmethod
    def eighths(amplitudes: Rows, reference: Rows) -> NDArray[np.int64]:
        """k where a row is omega**k times the reference row (shape (1, 4)), -1 where there is no such k."""
        found = np.full(len(amplitudes), -1, dtype=np.int64)
        for amount in range(8):
            found[(amplitudes == Exact.turned(reference, amount)).all(axis=1)] = amount
        return found

    @staticmethod
    def complex(amplitudes: Rows) -> NDArray[np.complex128]:
        """As complex numbers, up to the common factor."""
        powers = np.array([_OMEGA**power for power in range(4)])
        return np.asarray(amplitudes @ powers, dtype=np.complex128)


def _times(some: Rows, one: Rows) -> Rows:
    """The product in Z[omega] of rows with one row; coefficients below 2**30 stay below 2**62."""
    total = np.zeros_like(some)
    for power in range(4):
        total += Exact.turned(some, power) * one[0, power]
    return total


class Floating:
    """Amplitudes as complex numbers, to 1e-9, for rotations by other angles."""

    name = "complex numbers to 1e-9"

    @staticmethod
    def ones(rows: int) -> Rows:
        """The amplitude 1, `rows` times."""
        return np.ones(rows, dtype=np.complex128)

    @staticmethod
    def turned(amplitudes: Rows, amount: int) -> Rows:
        """Times omega**amount."""
        return np.asarray(amplitudes * _OMEGA**amount)

    @staticmethod
    def rotated(amplitudes: Rows, angle: float) -> Rows:
        """Times exp(i angle)."""
        return np.asarray(amplitudes * np.exp(1j * angle))

    @staticmethod
    def halved(amplitudes: Rows, halves: int) -> tuple[Rows, int]:
        """Divide by sqrt(2)."""
        return amplitudes * math.sqrt(0.5), halves

    @staticmethod
    def nonzero(amplitudes: Rows) -> NDArray[np.bool_]:
        """Which rows are not 0: those that rounding leaves behind are much smaller than the tolerance."""
        return np.abs(amplitudes) > TOLERANCE * 1e-3

    @staticmethod
    def visible(amplitudes: Rows) -> NDArray[np.bool_]:
        """Which rows of a final state count: those beyond the tolerance."""
        return np.abs(amplitudes) > TOLERANCE

    @staticmethod
    def weights(amplitudes: Rows, lane: NDArray[np.int64], lanes: int) -> NDArray[Any]:
        """The sum of |amplitude|**2 a lane, shape (lanes, 1)."""
        return np.bincount(lane, weights=np.abs(amplitudes) ** 2, minlength=lanes)[:, np.newaxis]

    @staticmethod
    def differs(some: NDArray[Any], other: NDArray[Any]) -> NDArray[np.bool_]:
        """Which rows of weights differ from one other weight, by their roots: amplitudes are compared.

        A chance of 4e-10 is an amplitude of 2e-5, far more than what is let pass in a state.
        """
        return np.asarray((np.abs(np.sqrt(some) - np.sqrt(other)) > TOLERANCE).any(axis=1), dtype=np.bool_)

    @staticmethod
    def kept(amplitudes: Rows, weight: NDArray[Any]) -> Rows | None:
        """The amplitudes of an outcome with that weight (shape (1,)) in every lane, None if it never occurs.

        They are scaled to weight 1; the caller has compared the weights of all lanes before.
        """
        return amplitudes / math.sqrt(weight[0]) if weight[0] > TOLERANCE**2 else None

    @staticmethod
    def proportional(some: Rows, others: Rows) -> bool:
        """Whether `others` is one constant times `some`, both of weight 1 a lane, by its largest row."""
        largest = int(np.argmax(np.abs(some)))
        return bool((np.abs(others - some * (others[largest] / some[largest])) < TOLERANCE).all())

    @staticmethod
    def eighths(amplitudes: Rows, reference: Rows) -> NDArray[np.int64]:
        """k where a row is omega**k times the reference row (shape (1,)), -1 where there is no such k."""
        ratio = amplitudes / reference[0]
        nearest = np.round(np.angle(ratio) / (math.pi / 4)).astype(np.int64)
        close = np.abs(ratio - _OMEGA**nearest) < TOLERANCE
        return np.where(close, nearest & 7, -1)

    @staticmethod
    def complex(amplitudes: Rows) -> NDArray[np.complex128]:
        """As complex numbers."""
        return amplitudes
