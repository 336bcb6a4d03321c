"""A circuit taken apart into the few elementary steps that verification simulates.

Every unitary kind of the circuit model, with any controls, is a product of NOTs with controls, phases on the
inputs where all literals of a set hold (these have no distinguished target, common practice) and plain
Hadamards: Y = iXZ; SX = H S H; RX(a) = H RZ(a) H; RY(a) = S H RZ(a) H S^-1; U(t, p, l) = P(p) RY(t) P(l);
controlled H = (controlled RY(pi/2)) (controlled Z); RZ(a) = exp(-ia/2) P(a). In a conjugation A B A^-1 only B
needs the controls. Literals are those of the circuit model: 2 * qubit, + 1 where it waits for 0.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Sequence
from typing import Final, NamedTuple

from revsynth.circuit.model import Circuit, Kind, Op

FLIP: Final = 0
"""NOT on `target` where all literals hold."""
TURN: Final = 1
"""The phase omega**amount, omega = exp(i pi/4), where all literals hold."""
ANGLE: Final = 2
"""The phase exp(i angle), no multiple of pi/4, where all literals hold."""
HADAMARD: Final = 3
"""H on `target`."""
MEASURE: Final = 4
"""`target` is measured in the Z basis into `bit`."""
RESET: Final = 5
"""`target` is measured, the outcome is lost, and it is set to 0."""

ANGLE_TOLERANCE = 1e-11
"""An angle this close to a multiple of pi/4, in radians, is that multiple."""


class Step(NamedTuple):
    """One elementary step. `condition` indexes the circuit's conditions, `source` its operations."""

    act: int
    literals: tuple[int, ...]
    target: int
    amount: int
    angle: float
    condition: int
    bit: int
    source: int


def elementary(circuit: Circuit) -> list[Step]:
    """The steps of a circuit in order; a step that does nothing is left out."""
    writer = _Writer()
    for index, op in enumerate(circuit):
        writer.begin(op.condition, index)
        _WRITE[op.kind](writer, op)
    return writer.steps


def is_classical(steps: Sequence[Step]) -> bool:
    """Only NOTs with controls and signs, nothing measured, nothing under a condition."""
    return all(
        step.condition < 0 and (step.act == FLIP or (step.act == TURN and step.amount == 4)) for step in steps
    )


def has_angles(steps: Sequence[Step]) -> bool:
    """Whether a phase that is no multiple of pi/4 depends on the state."""
    return any(step.act == ANGLE and step.literals for step in steps)


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
