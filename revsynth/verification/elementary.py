"""A circuit taken apart into the few elementary steps that verification simulates.

Every unitary kind of the circuit model, with any controls, is a product of NOTs with controls, phases on the
inputs where all literals of a set hold (these have no distinguished target, common practice) and plain
Hadamards: Y = iXZ; SX = H S H; RX(a) = H RZ(a) H; RY(a) = S H RZ(a) H S^-1; U(t, p, l) = P(p) RY(t) P(l);
controlled H = (controlled RY(pi/2)) (controlled Z); RZ(a) = exp(-ia/2) P(a). In a conjugation A B A^-1 only B
needs the controls. Literals are those of the circuit model: 2 * qubit, + 1 where it waits for 0.
"""

from __future__ import annotations

import math
from collections.abc import Callable

import numpy as np
from numpy.typing import NDArray

from revsynth.circuit.model import TARGETS, Circuit, Kind, Op
from revsynth.verification.steps import (
    ANGLE,
    FLIP,
    HADAMARD,
    MEASURE,
    RESET,
    TURN,
    Step,
    Steps,
    starts,
)

__all__ = [
    "ANGLE",
    "FLIP",
    "HADAMARD",
    "MEASURE",
    "RESET",
    "TURN",
    "Step",
    "Steps",
    "elementary",
    "has_angles",
    "is_classical",
]

ANGLE_TOLERANCE = 1e-11
"""An angle this close to a multiple of pi/4, in radians, is that multiple."""


def elementary(circuit: Circuit) -> Steps:
    """The steps of a circuit in order; a step that does nothing is left out.

    Operations that are one step are taken over from the circuit's arrays at once, the others one by one.
    """
    kind = circuit.kind
    plain = (_ACT[kind] != _SEVERAL) & ((kind != Kind.H) | (np.diff(circuit.offset) == 1))
    steps = _taken_over(circuit, np.flatnonzero(plain))
    rest = np.flatnonzero(~plain).tolist()
    if not rest:
        return steps
    writer = _Writer()
    for index in rest:
        op = _operation(circuit, index)
        writer.begin(op.condition, index)
        _WRITE[op.kind](writer, op)
    both = steps.followed_by(Steps.of(writer.steps))
    return both.take(np.argsort(both.source, kind="stable"))


def is_classical(steps: Steps) -> bool:
    """Only NOTs with controls and signs, nothing measured, nothing under a condition."""
    sign = (steps.act == TURN) & (steps.amount == 4)
    return bool((((steps.act == FLIP) | sign) & (steps.condition < 0)).all())


def has_angles(steps: Steps) -> bool:
    """Whether a phase that is no multiple of pi/4 depends on the state."""
    return bool(((steps.act == ANGLE) & (np.diff(steps.offset) > 0)).any())


def _taken_over(circuit: Circuit, chosen: NDArray[np.int64]) -> Steps:
    """Operations of kinds that are one step: NOTs, the diagonal ones, H without controls, measurements.

    A diagonal one has its target as one more literal and no target.
    """
    width = np.diff(circuit.offset)[chosen]
    offset = starts(width)
    within = np.arange(offset[-1], dtype=np.int64) - np.repeat(offset[:-1], width)
    operand = circuit.operand[np.repeat(circuit.offset[:-1][chosen], width) + within]
    act = _ACT[circuit.kind[chosen]]
    turning = act == TURN
    last = offset[1:] - 1
    target = np.where(turning, np.int32(-1), operand[last])
    operand[last[turning]] *= 2
    is_literal = np.ones(len(operand), dtype=bool)
    is_literal[last[~turning]] = False
    return Steps(
        act=act,
        target=target,
        amount=_AMOUNT[circuit.kind[chosen]],
        angle=np.zeros(len(chosen), dtype=np.float64),
        condition=circuit.condition[chosen],
        bit=circuit.bit[chosen],
        source=chosen.astype(np.int32),
        offset=starts(width - ~turning),
        literal=operand[is_literal],
    )


def _operation(circuit: Circuit, index: int) -> Op:
    kind = Kind(int(circuit.kind[index]))
    start, end = int(circuit.offset[index]), int(circuit.offset[index + 1])
    operand = circuit.operand[start:end].tolist()
    split = len(operand) - TARGETS[kind]
    return Op(
        kind,
        tuple(operand[:split]),
        tuple(operand[split:]),
        circuit.angles.get(index, ()),
        int(circuit.condition[index]),
        int(circuit.bit[index]),
    )


class _Writer:
    """Collects steps under one condition and source at a time."""

    def __init__(self) -> None:
        self.steps: list[Step] = []
        self._condition = -1
        self._source = -1

    def begin(self, condition: int, source: int) -> None:
        self._condition = condition
        self._source = source

    def flip(self, target: int, controls: tuple[int, ...] = ()) -> None:
        self.steps.append(Step(FLIP, controls, target, 0, 0.0, self._condition, -1, self._source))

    def turn(self, literals: tuple[int, ...], amount: int) -> None:
        self.steps.append(Step(TURN, literals, -1, amount & 7, 0.0, self._condition, -1, self._source))

    def phase(self, literals: tuple[int, ...], radians: float) -> None:
        eighths = round(radians / (math.pi / 4))
        if abs(radians - eighths * math.pi / 4) < ANGLE_TOLERANCE:
            if eighths & 7:
                self.turn(literals, eighths)
        else:
            self.steps.append(Step(ANGLE, literals, -1, 0, radians, self._condition, -1, self._source))

    def hadamard(self, target: int) -> None:
        self.steps.append(Step(HADAMARD, (), target, 0, 0.0, self._condition, -1, self._source))

    def outside(self, act: int, target: int, bit: int) -> None:
        self.steps.append(Step(act, (), target, 0, 0.0, self._condition, bit, self._source))

    def rz(self, target: int, controls: tuple[int, ...], radians: float) -> None:
        self.phase(controls, -radians / 2)
        self.phase((*controls, 2 * target), radians)

    def ry(self, target: int, controls: tuple[int, ...], radians: float) -> None:
        """By quarter turns where it is some: RY(pi/2) = X H, RY(pi) = X Z, RY(2 pi) = -1."""
        quarters = round(radians / (math.pi / 2))
        exact = abs(radians - quarters * math.pi / 2) < ANGLE_TOLERANCE
        if not exact or (quarters & 1 and controls):
            self.turn((2 * target,), 6)
            self.hadamard(target)
            self.rz(target, controls, radians)
            self.hadamard(target)
            self.turn((2 * target,), 2)
            return
        if quarters & 1:
            self.hadamard(target)
            self.flip(target)
        if quarters & 2:
            self.turn((*controls, 2 * target), 4)
            self.flip(target, controls)
        if quarters & 4:
            self.turn(controls, 4)


def _diagonal(amount: int) -> Callable[[_Writer, Op], None]:
    def write(writer: _Writer, op: Op) -> None:
        writer.turn((*op.controls, 2 * op.targets[0]), amount)

    return write


def _root_of_not(amount: int) -> Callable[[_Writer, Op], None]:
    def write(writer: _Writer, op: Op) -> None:
        writer.hadamard(op.targets[0])
        writer.turn((*op.controls, 2 * op.targets[0]), amount)
        writer.hadamard(op.targets[0])

    return write


def _y(writer: _Writer, op: Op) -> None:
    target = op.targets[0]
    writer.turn((*op.controls, 2 * target), 4)
    writer.flip(target, op.controls)
    writer.turn(op.controls, 2)


def _h(writer: _Writer, op: Op) -> None:
    target = op.targets[0]
    if op.controls:
        writer.turn((*op.controls, 2 * target), 4)
        writer.ry(target, op.controls, math.pi / 2)
    else:
        writer.hadamard(target)


def _rx(writer: _Writer, op: Op) -> None:
    writer.hadamard(op.targets[0])
    writer.rz(op.targets[0], op.controls, op.angles[0])
    writer.hadamard(op.targets[0])


def _u(writer: _Writer, op: Op) -> None:
    theta, phi, lam = op.angles
    target = op.targets[0]
    writer.phase((*op.controls, 2 * target), lam)
    writer.ry(target, op.controls, theta)
    writer.phase((*op.controls, 2 * target), phi)


def _swap(writer: _Writer, op: Op) -> None:
    one, other = op.targets
    writer.flip(one, (2 * other,))
    writer.flip(other, (*op.controls, 2 * one))
    writer.flip(one, (2 * other,))


_WRITE: dict[Kind, Callable[[_Writer, Op], None]] = {
    Kind.X: lambda writer, op: writer.flip(op.targets[0], op.controls),
    Kind.Y: _y,
    Kind.Z: _diagonal(4),
    Kind.H: _h,
    Kind.S: _diagonal(2),
    Kind.SDG: _diagonal(6),
    Kind.T: _diagonal(1),
    Kind.TDG: _diagonal(7),
    Kind.SX: _root_of_not(2),
    Kind.SXDG: _root_of_not(6),
    Kind.P: lambda writer, op: writer.phase((*op.controls, 2 * op.targets[0]), op.angles[0]),
    Kind.RX: _rx,
    Kind.RY: lambda writer, op: writer.ry(op.targets[0], op.controls, op.angles[0]),
    Kind.RZ: lambda writer, op: writer.rz(op.targets[0], op.controls, op.angles[0]),
    Kind.U: _u,
    Kind.SWAP: _swap,
    Kind.GPHASE: lambda writer, op: writer.phase(op.controls, op.angles[0]),
    Kind.MEASURE: lambda writer, op: writer.outside(MEASURE, op.targets[0], op.bit),
    Kind.RESET: lambda writer, op: writer.outside(RESET, op.targets[0], -1),
}

_SEVERAL = 255
_AMOUNTS = {Kind.Z: 4, Kind.S: 2, Kind.SDG: 6, Kind.T: 1, Kind.TDG: 7}
_ACT = np.full(len(Kind), _SEVERAL, dtype=np.uint8)
"""By kind: the act of the one step that it is."""
_ACT[[Kind.X, Kind.H, Kind.MEASURE, Kind.RESET]] = FLIP, HADAMARD, MEASURE, RESET
_ACT[list(_AMOUNTS)] = TURN
_AMOUNT = np.zeros(len(Kind), dtype=np.uint8)
_AMOUNT[list(_AMOUNTS)] = list(_AMOUNTS.values())
