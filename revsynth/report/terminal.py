"""The circuit as text: one line of characters a qubit, in Unicode or plain ASCII.

Bit 0 of a word is its first line. A row at the bottom shows the measured bits: `<3` where bit 3 is
written, `?3` where it decides.
"""

from __future__ import annotations

from dataclasses import dataclass

from revsynth.circuit.model import Circuit, Kind, Op
from revsynth.report.columns import Column, label, pack, read_bits, wrap


@dataclass(frozen=True)
class Glyphs:
    """The characters of a style."""

    wire: str
    link: str
    cross: str
    dot: str
    ring: str
    target: str
    swap: str
    left: str
    right: str


UNICODE = Glyphs("─", "│", "┼", "●", "○", "⊕", "×", "┤", "├")
ASCII = Glyphs("-", "|", "|", "*", "o", "+", "x", "[", "]")
_PLAIN = str.maketrans({"†": "'", "π": "pi", "√": "v"})


def draw_text(circuit: Circuit, *, width: int = 100, ascii_only: bool = False) -> str:
    """The drawing, wrapped to `width` columns; a blank line between wrapped rows."""
    glyphs = ASCII if ascii_only else UNICODE
    names = _line_names(circuit)
    margin = max([len(name) for name in names] + [4 if circuit.bits else 0], default=0) + 1
    rows = wrap(pack(circuit, gap=1), lambda column: _width(column, glyphs) + 1, max(width - margin - 1, 8))
    blocks = [_draw_row(circuit, row, names, margin, glyphs) for row in rows]
    return "\n\n".join(blocks)


def _line_names(circuit: Circuit) -> list[str]:
    return [
        register.name if register.size == 1 else f"{register.name}[{index}]"
        for register in circuit.registers
        for index in range(register.size)
    ]


def _text(op: Op, glyphs: Glyphs) -> str:
    """What stands on the target's line: a symbol, or a label in a box."""
    if op.kind is Kind.X:
        return glyphs.target
    if op.kind is Kind.SWAP:
        return glyphs.swap
    if op.kind is Kind.Z and op.controls:
        return glyphs.dot
    text = label(op)
    if glyphs is ASCII:
        text = text.translate(_PLAIN)
    return f"{glyphs.left}{text}{glyphs.right}"


def _width(column: Column, glyphs: Glyphs) -> int:
    return max([3, *(len(_text(op, glyphs)) for op in column.operations)])


def _draw_row(circuit: Circuit, row: list[Column], names: list[str], margin: int, glyphs: Glyphs) -> str:
    starts = {register.start for register in circuit.registers if register.size} - {0}
    lines = [f"{name:>{margin - 1}} " for name in names]
    gaps = dict.fromkeys(sorted(starts), " " * margin)
    bits = f"{'bits':>{margin - 1}} " if circuit.bits else ""
    for column in row:
        width = _width(column, glyphs)
        cells = _cells(column, len(names), width, glyphs)
        for line in range(len(names)):
            lines[line] += cells[line] + glyphs.wire
        for start in gaps:
            linked = any(_spans(op, start) for op in column.operations)
            gaps[start] += (glyphs.link if linked else " ").center(width) + " "
        if bits:
            bits += _bit_note(circuit, column)[:width].center(width) + " "
    drawn: list[str] = []
    for line, text in enumerate(lines):
        if line in gaps:
            drawn.append(gaps[line].rstrip())
        drawn.append(text.rstrip())
    if bits.strip() not in ("", "bits"):
        drawn.append(bits.rstrip())
    phases = [op for column in row for op in column.operations if not op.qubits]
    drawn.extend(f"{' ' * margin}constant {_plain(label(op), glyphs)}" for op in phases)
    return "\n".join(drawn)


def _plain(text: str, glyphs: Glyphs) -> str:
    return text.translate(_PLAIN) if glyphs is ASCII else text


def _spans(op: Op, start: int) -> bool:
    """Whether the operation's link passes the gap above line `start`."""
    return bool(op.qubits) and min(op.qubits) < start <= max(op.qubits)


def _cells(column: Column, count: int, width: int, glyphs: Glyphs) -> list[str]:
    cells = [glyphs.wire * width] * count
    for op in column.operations:
        if not op.qubits:
            continue
        for line in range(min(op.qubits), max(op.qubits) + 1):
            cells[line] = glyphs.cross.center(width, glyphs.wire)
        for control in op.controls:
            symbol = glyphs.ring if control & 1 else glyphs.dot
            cells[control >> 1] = symbol.center(width, glyphs.wire)
        for target in op.targets:
            cells[target] = _text(op, glyphs).center(width, glyphs.wire)
    return cells


def _bit_note(circuit: Circuit, column: Column) -> str:
    notes = []
    for op in column.operations:
        if op.kind is Kind.MEASURE:
            notes.append(f"<{op.bit}")
        notes.extend(f"?{bit}" for bit in read_bits(circuit, op))
    return "".join(dict.fromkeys(notes))
