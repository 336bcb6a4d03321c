"""What each output format can say: the gate name for a kind under so many positive controls."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import TypeAlias

import numpy as np
from numpy.typing import NDArray

from revsynth.circuit.model import TARGETS, Circuit, Condition, Kind
from revsynth.options import Format

GateNames: TypeAlias = Mapping[tuple[Kind, int], str]

NAMES_3: GateNames = {
    (Kind.X, 0): "x",
    (Kind.X, 1): "cx",
    (Kind.X, 2): "ccx",
    (Kind.Y, 0): "y",
    (Kind.Y, 1): "cy",
    (Kind.Z, 0): "z",
    (Kind.Z, 1): "cz",
    (Kind.H, 0): "h",
    (Kind.H, 1): "ch",
    (Kind.S, 0): "s",
    (Kind.SDG, 0): "sdg",
    (Kind.T, 0): "t",
    (Kind.TDG, 0): "tdg",
    (Kind.SX, 0): "sx",
    (Kind.SXDG, 0): "inv @ sx",
    (Kind.P, 0): "p",
    (Kind.P, 1): "cp",
    (Kind.RX, 0): "rx",
    (Kind.RX, 1): "crx",
    (Kind.RY, 0): "ry",
    (Kind.RY, 1): "cry",
    (Kind.RZ, 0): "rz",
    (Kind.RZ, 1): "crz",
    (Kind.U, 0): "U",
    (Kind.U, 1): "cu",
    (Kind.SWAP, 0): "swap",
    (Kind.SWAP, 1): "cswap",
    (Kind.GPHASE, 0): "gphase",
    (Kind.MEASURE, 0): "measure",
    (Kind.RESET, 0): "reset",
}
"""OpenQASM 3 with stdgates.inc; whatever is not here is written with modifiers."""

NAMES_2: GateNames = {
    (Kind.X, 0): "x",
    (Kind.X, 1): "cx",
    (Kind.X, 2): "ccx",
    (Kind.Y, 0): "y",
    (Kind.Y, 1): "cy",
    (Kind.Z, 0): "z",
    (Kind.Z, 1): "cz",
    (Kind.H, 0): "h",
    (Kind.H, 1): "ch",
    (Kind.S, 0): "s",
    (Kind.SDG, 0): "sdg",
    (Kind.T, 0): "t",
    (Kind.TDG, 0): "tdg",
    (Kind.P, 0): "u1",
    (Kind.P, 1): "cu1",
    (Kind.RX, 0): "rx",
    (Kind.RY, 0): "ry",
    (Kind.RZ, 1): "crz",
    (Kind.U, 0): "u3",
    (Kind.MEASURE, 0): "measure",
    (Kind.RESET, 0): "reset",
}
"""OpenQASM 2 with qelib1.inc as published (arXiv 1707.03429, figure 2); its rz is diag(1, exp(ia))."""

_PLAINEST = ("h", "x", "z", "s", "sdg", "t", "tdg", "cx", "cz")
NAMES_PLAIN: GateNames = {entry: name for entry, name in NAMES_2.items() if name in _PLAINEST}
"""What the plainest reader of OpenQASM 2 takes."""

NAMES: dict[Format, GateNames] = {"openqasm3": NAMES_3, "openqasm2": NAMES_2, "plain": NAMES_PLAIN}


def misfit(circuit: Circuit, format: Format) -> str | None:
    """What is wrong with the first operation that the format has no words for; None where all fit."""
    if format == "openqasm3" or not len(circuit):
        return None
    bad = _misfits(circuit, format)
    if not bad.any():
        return None
    index = int(np.argmax(bad))
    start, end = circuit.offset[index : index + 2].tolist()
    kind = Kind(int(circuit.kind[index]))
    controls = circuit.operand[start : end - TARGETS[kind]].tolist()
    return complaint(index, kind, controls, format)


def complaint(index: int, kind: Kind, controls: Sequence[int], format: Format) -> str:
    """Why a format cannot hold an operation, given its control literals."""
    where = f"operation {index + 1}"
    if any(control & 1 for control in controls):
        return f"{where} has a negative control, which format '{format}' cannot say: use format 'openqasm3'"
    if (kind, len(controls)) in NAMES[format]:
        return f"{where} has a condition that format '{format}' cannot say: use format 'openqasm3'"
    count = len(controls)
    held = f" with {count} control{'' if count == 1 else 's'}" if count else ""
    return f"{where} is {kind.name}{held}, which format '{format}' has no gate for: use format 'openqasm3'"


def _misfits(circuit: Circuit, format: Format) -> NDArray[np.bool_]:
    targets = np.array([TARGETS[kind] for kind in Kind], dtype=np.int64)
    controls = np.diff(circuit.offset) - targets[circuit.kind]
    width = int(controls.max()) + 1
    allowed = np.zeros((len(Kind), width), dtype=bool)
    for kind, count in NAMES[format]:
        if count < width:
            allowed[kind, count] = True
    bad: NDArray[np.bool_] = ~allowed[circuit.kind, controls]
    owner = np.repeat(np.arange(len(circuit)), np.diff(circuit.offset))
    position = np.arange(len(circuit.operand)) - circuit.offset[owner]
    bad[owner[(position < controls[owner]) & (circuit.operand & 1 == 1)]] = True
    conditional = circuit.condition >= 0
    if conditional.any():
        sayable = [
            format == "openqasm2" and whole_register(circuit, condition) is not None
            for condition in circuit.conditions
        ]
        bad |= conditional & ~np.array([*sayable, True], dtype=bool)[circuit.condition]
    return bad


def whole_register(circuit: Circuit, condition: Condition) -> tuple[str, int] | None:
    """The bit register and the value that a condition compares it with, where it does just that."""
    if len(condition) != 1 or not condition[0].expected:
        return None
    bits = condition[0].bits
    for register in circuit.bit_registers:
        if [entry >> 1 for entry in bits] == list(register.members):
            return register.name, sum(1 << index for index, entry in enumerate(bits) if not entry & 1)
    return None
