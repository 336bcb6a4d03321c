"""Rewriting a circuit exactly into what a format can hold, so that its file reads back gate for gate."""

from __future__ import annotations

import math
from collections.abc import Callable
from typing import TypeAlias

import numpy as np

from revsynth.circuit.model import Circuit, CircuitBuilder, Condition, Kind, Op, Register
from revsynth.errors import UsageError
from revsynth.options import Format
from revsynth.qasm.dialects import NAMES, complaint, misfit, whole_register
from revsynth.qasm.formula import canonical

Rewrite: TypeAlias = Callable[[Op, Format], "list[Op] | None"]

_EIGHTHS: dict[int, tuple[Kind, ...]] = {
    0: (),
    1: (Kind.T,),
    2: (Kind.S,),
    3: (Kind.S, Kind.T),
    4: (Kind.Z,),
    5: (Kind.Z, Kind.T),
    6: (Kind.SDG,),
    7: (Kind.TDG,),
}
"""Phases exp(i pi k/4) of |1>, from the gates of Clifford+T."""


def prepare(circuit: Circuit, format: Format) -> Circuit:
    """The circuit in gates that the format has, the same function with the same phase.

    For OpenQASM 2 and `plain`: CCZ becomes H CCX H, SWAP three CX, SX becomes H S H, controlled SWAP and
    rotations their textbook circuits, RZ(a) is X P(-a/2) X P(a/2) (`rz` there is diag(1, exp(ia))), and a
    global phase exp(ia) is X P(a) X P(a) on qubit 0, with Z for P(pi). Conditions get the form that the
    reader gives; operations that can never happen are left out. Registers stay as they are: `write` numbers
    the qubits of a `plain` file through them (`one_register` gives what reading such a file gives).

    Raises:
        UsageError: for what the format cannot say, with the first such operation.
    """
    circuit = _with_canonical_conditions(circuit)
    if misfit(circuit, format) is None:
        return circuit
    builder = _same_registers(circuit)
    for index, op in enumerate(circuit):
        condition = circuit.conditions[op.condition] if op.condition >= 0 else ()
        if condition and (format == "plain" or whole_register(circuit, condition) is None):
            raise UsageError(complaint(index, Kind.X, (), format))
        _add_rewritten(builder, op, condition, format, index)
    return builder.build()


def _same_registers(circuit: Circuit) -> CircuitBuilder:
    builder = CircuitBuilder()
    for register in circuit.registers:
        builder.add_register(register.name, register.size)
    for register in circuit.bit_registers:
        builder.add_bits(register.name, register.size)
    return builder


def one_register(circuit: Circuit) -> Circuit:
    """The same operations on one register `q`: what a `plain` file holds."""
    return Circuit(
        [Register("q", circuit.qubits, 0)],
        circuit.bit_registers,
        circuit.kind,
        circuit.offset,
        circuit.operand,
        circuit.condition,
        circuit.bit,
        circuit.angles,
        circuit.conditions,
    )


def _with_canonical_conditions(circuit: Circuit) -> Circuit:
    forms = [canonical(condition) for condition in circuit.conditions]
    if forms == list(circuit.conditions):
        return circuit
    used = np.array([form is not None for form in forms] + [True], dtype=bool)
    if used[circuit.condition].all():
        said = np.array([bool(form) for form in forms] + [False], dtype=bool)
        return Circuit(
            circuit.registers,
            circuit.bit_registers,
            circuit.kind,
            circuit.offset,
            circuit.operand,
            np.where(said[circuit.condition], circuit.condition, np.int32(-1)),
            circuit.bit,
            circuit.angles,
            [form or () for form in forms],
        )
    builder = _same_registers(circuit)
    for op in circuit:
        form = forms[op.condition] if op.condition >= 0 else ()
        if form is not None:
            builder.add(op.kind, op.targets, op.controls, op.angles, form, op.bit)
    return builder.build()


def _add_rewritten(builder: CircuitBuilder, op: Op, condition: Condition, format: Format, index: int) -> None:
    """Add what stands for operation number `index`.

    A work list rather than recursion; every rewriting leads to simpler kinds or fewer controls.
    """
    waiting = [op]
    while waiting:
        current = waiting.pop()
        negative = any(control & 1 for control in current.controls)
        if (current.kind, len(current.controls)) in NAMES[format] and not negative:
            builder.add(
                current.kind, current.targets, current.controls, current.angles, condition, current.bit
            )
            continue
        simpler = None if negative else _simpler(current, format)
        if simpler is None:
            raise UsageError(complaint(index, op.kind, op.controls, format))
        waiting.extend(reversed(simpler))


def _simpler(op: Op, format: Format) -> list[Op] | None:
    """One step of rewriting an operation with positive controls; None where there is none."""
    rewrite = _REWRITES.get((op.kind, len(op.controls)))
    if rewrite is None and op.kind is Kind.GPHASE and op.controls:
        return [Op(Kind.P, op.controls[:-1], (op.controls[-1] >> 1,), op.angles)]
    return None if rewrite is None else rewrite(op, format)


def _around(outer: Kind, closing: Kind, op: Op, inner: Kind) -> list[Op]:
    """The kind `inner` in place of the operation's, between two gates on its target."""
    return [
        Op(outer, (), op.targets),
        op._replace(kind=inner),
        Op(closing, (), op.targets),
    ]


def _swap(op: Op, _: Format) -> list[Op]:
    a, b = op.targets
    toggle = Op(Kind.X, (2 * a,), (b,))
    return [toggle, Op(Kind.X, (*op.controls, 2 * b), (a,)), toggle]


def _phase(op: Op, _: Format) -> list[Op] | None:
    """P(a) from Clifford+T gates, where a is a multiple of pi/4."""
    eighths = op.angles[0] / (math.pi / 4)
    if eighths != round(eighths) or abs(eighths) > 1 << 30:
        return None
    return [Op(kind, (), op.targets) for kind in _EIGHTHS[round(eighths) % 8]]


def _controlled_turn(op: Op, angle: float) -> list[Op]:
    return [Op(Kind.P, op.controls, op.targets, (angle,))]


def _rz(op: Op, _: Format) -> list[Op]:
    half = op.angles[0] / 2
    flip = Op(Kind.X, (), op.targets)
    return [
        flip,
        Op(Kind.P, (), op.targets, (-half,)),
        flip,
        Op(Kind.P, (), op.targets, (half,)),
    ]


def _global_phase(op: Op, _: Format) -> list[Op]:
    flip = Op(Kind.X, (), (0,))
    angle = op.angles[0]
    eighths = angle / (math.pi / 4)
    if eighths == round(eighths) and abs(eighths) < 1 << 30:
        turn = [Op(kind, (), (0,)) for kind in _EIGHTHS[round(eighths) % 8]]
    else:
        turn = [Op(Kind.P, (), (0,), (angle,))]
    return [flip, *turn, flip, *turn] if turn else []


_REWRITES: dict[tuple[Kind, int], Rewrite] = {
    (Kind.Z, 2): lambda op, _: _around(Kind.H, Kind.H, op, Kind.X),
    (Kind.SX, 0): lambda op, _: _around(Kind.H, Kind.H, op, Kind.S),
    (Kind.SXDG, 0): lambda op, _: _around(Kind.H, Kind.H, op, Kind.SDG),
    (Kind.SX, 1): lambda op, _: _around(Kind.H, Kind.H, op, Kind.S),
    (Kind.SXDG, 1): lambda op, _: _around(Kind.H, Kind.H, op, Kind.SDG),
    (Kind.Y, 2): lambda op, _: _around(Kind.SDG, Kind.S, op, Kind.X),
    (Kind.Y, 0): lambda op, _: _around(Kind.SDG, Kind.S, op, Kind.X),
    (Kind.Y, 1): lambda op, _: _around(Kind.SDG, Kind.S, op, Kind.X),
    (Kind.S, 1): lambda op, _: _controlled_turn(op, math.pi / 2),
    (Kind.SDG, 1): lambda op, _: _controlled_turn(op, -math.pi / 2),
    (Kind.T, 1): lambda op, _: _controlled_turn(op, math.pi / 4),
    (Kind.TDG, 1): lambda op, _: _controlled_turn(op, -math.pi / 4),
    (Kind.RX, 1): lambda op, _: _around(Kind.H, Kind.H, op, Kind.RZ),
    (Kind.RY, 1): lambda op, _: _around(Kind.SDG, Kind.S, op, Kind.RX),
    (Kind.RZ, 0): _rz,
    (Kind.P, 0): _phase,
    (Kind.SWAP, 0): _swap,
    (Kind.SWAP, 1): _swap,
    (Kind.GPHASE, 0): _global_phase,
}
"""Exact rewritings by kind and number of positive controls, for kinds that a format has no gate for.

X, Y and turns: H Z H = X, S X S^-1 = Y and H RZ H = RX as matrices (common practice).
"""
