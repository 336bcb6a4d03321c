"""The circuit as an SVG picture: words as labelled bands, scratch shaded, long circuits wrapped.

Dots wait for 1, rings for 0; a cross in a circle is NOT; a controlled Z is dots alone, because it has no
distinguished target (common practice). Bit 0 of a word is the first line of its band.
"""

from __future__ import annotations

import math
from collections.abc import Iterator
from html import escape

from revsynth.circuit.model import Circuit, Kind, Op, Register
from revsynth.errors import UsageError
from revsynth.report.columns import Column, label, pack, read_bits, wrap

MOST_DRAWN = 50_000
"""Operations in a picture at most: some 20 megabytes, which browsers still open."""

PITCH = 26  # from line to line
BAND_GAP = 10  # between the bands of two registers
STEP = 30  # the least width of a column
ROW_GAP = 42  # between wrapped rows
PAD = 18
INK = "#1d2733"
FAINT = "#8793a1"
WIRE = "#5b6876"
TINTS = ("#edf3f8", "#f6f1e7")
SCRATCH = "#ececee"
FONT = "DejaVu Sans, Helvetica, Arial, sans-serif"

_FILLS = {
    Kind.T: "#ffd9b8",
    Kind.TDG: "#ffd9b8",
    Kind.H: "#d3e6cf",
    Kind.MEASURE: "#ffffff",
}


def draw_svg(circuit: Circuit, *, title: str = "", width: int = 1240) -> str:
    """The picture as SVG text, about `width` units wide; deterministic, with no outside references.

    Raises UsageError beyond MOST_DRAWN operations.
    """
    if len(circuit) > MOST_DRAWN:
        raise UsageError(
            f"{len(circuit):,} operations are too many for a picture, {MOST_DRAWN:,} at most: "
            "draw the cascade or Toffoli gates, or in the terminal"
        )
    return _Picture(circuit, title, width).draw()


class _Picture:
    def __init__(self, circuit: Circuit, title: str, width: int) -> None:
        self.circuit = circuit
        self.title = title
        self.parts: list[str] = []
        self.margin = PAD + 34 + round(7.6 * max([len(r.name) for r in circuit.registers], default=0))
        room = max(width - self.margin - 2 * PAD, 4 * STEP)
        self.rows = wrap(pack(circuit), _column_width, room)
        used = max(sum(map(_column_width, row)) for row in self.rows)
        self.width = self.margin + max(used, 4 * STEP) + 2 * PAD
        self.y_of = list(_line_heights(circuit))
        self.height_of_row = (self.y_of[-1] if self.y_of else 0) + PITCH // 2
        self.bit_lane = PITCH if circuit.bits else 0

    def draw(self) -> str:
        top = PAD + (30 if self.title else 0)
        if self.title:
            self._text(PAD, PAD + 14, self.title, size=15, weight="bold", anchor="start")
        step = 1
        for index, row in enumerate(self.rows):
            self._row(row, top + 16, step, last=index == len(self.rows) - 1)
            step += len(row)
            top += 16 + self.height_of_row + self.bit_lane + ROW_GAP
        height = top - ROW_GAP + 10 + self._legend(top - ROW_GAP + 26)
        name = escape(self.title or f"Circuit of {len(self.circuit)} operations", quote=True)
        head = (
            f'<svg xmlns="http://www.w3.org/2000/svg" width="{self.width}" height="{height}" '
            f'viewBox="0 0 {self.width} {height}" role="img" aria-label="{name}" font-family="{FONT}">'
        )
        paper = f'<rect width="{self.width}" height="{height}" fill="#ffffff"/>'
        return "\n".join([head, paper, *self.parts, "</svg>", ""])

    def _row(self, row: list[Column], top: int, step: int, *, last: bool) -> None:
        right = self.margin + max(sum(map(_column_width, row)), 2 * STEP) + PAD // 2
        for index, register in enumerate(r for r in self.circuit.registers if r.size):
            self._band(register, top, right, index)
        if self.bit_lane:
            y = top + self.height_of_row + self.bit_lane // 2
            self._text(self.margin - 14, y + 4, "bits", size=11, fill=FAINT, anchor="end")
        x = self.margin
        for column in row:
            width = _column_width(column)
            if step == 1 or step % 5 == 0:
                self._text(x + width / 2, top - 6, str(step), size=9, fill=FAINT)
            for op in column.operations:
                self._operation(op, x + width / 2, top)
            x += width
            step += 1
        if not last:
            middle = top + self.height_of_row / 2
            self._text(right + 9, middle, "…", size=14, fill=FAINT)

    def _band(self, register: Register, top: int, right: int, index: int) -> None:
        y0 = top + self.y_of[register.start] - PITCH // 2
        height = register.size * PITCH
        scratch = register.name in ("work", "keep")
        tint = SCRATCH if scratch else TINTS[index % 2]
        x0 = self.margin - 30
        self.parts.append(
            f'<rect x="{x0}" y="{y0}" width="{right - x0}" height="{height}" rx="5" fill="{tint}"/>'
        )
        self._text(x0 - 8, y0 + height / 2 + 4, register.name, size=13, weight="bold", anchor="end")
        for bit in range(register.size):
            y = top + self.y_of[register.start + bit]
            if register.size > 1:
                self._text(self.margin - 16, y + 4, str(bit), size=10, fill=FAINT)
            dash = ' stroke-dasharray="5 3"' if scratch else ""
            self.parts.append(
                f'<line x1="{self.margin - 6}" y1="{y}" x2="{right - 4}" y2="{y}" stroke="{WIRE}"{dash}/>'
            )

    def _operation(self, op: Op, x: float, top: int) -> None:
        if not op.qubits:
            self._box(x, top + self.y_of[0] - PITCH if self.y_of else top, label(op), "#ffffff", False)
            return
        ys = [top + self.y_of[qubit] for qubit in op.qubits]
        bits = read_bits(self.circuit, op)
        if min(ys) != max(ys):
            self._link(x, min(ys), max(ys), dashed=bool(bits))
        for control in op.controls:
            self._dot(x, top + self.y_of[control >> 1], hollow=bool(control & 1))
        for target in op.targets:
            self._target(op, x, top + self.y_of[target], bool(bits))
        if op.kind is Kind.MEASURE or bits:
            self._bit_tag(op, bits, x, max(ys), top)

    def _target(self, op: Op, x: float, y: float, conditional: bool) -> None:
        if op.kind is Kind.X:
            dash = ' stroke-dasharray="3 2"' if conditional else ""
            self.parts.append(
                f'<circle cx="{x:g}" cy="{y:g}" r="8" fill="#ffffff" stroke="{INK}" '
                f'stroke-width="1.4"{dash}/>'
                f'<path d="M{x - 8:g} {y:g}h16M{x:g} {y - 8:g}v16" stroke="{INK}" stroke-width="1.4"/>'
            )
        elif op.kind is Kind.SWAP:
            self.parts.append(
                f'<path d="M{x - 5:g} {y - 5:g}l10 10m0 -10l-10 10" stroke="{INK}" stroke-width="1.8"/>'
            )
        elif op.kind is Kind.Z and op.controls:
            self._dot(x, y, hollow=False)
        else:
            self._box(x, y, label(op), _FILLS.get(op.kind, "#e3e0f2"), conditional)

    def _bit_tag(self, op: Op, bits: tuple[int, ...], x: float, y: float, top: int) -> None:
        lane = top + self.height_of_row + self.bit_lane / 2
        arrow = op.kind is Kind.MEASURE
        start = y + (10 if op.kind is not Kind.X else 8)
        self.parts.append(
            f'<line x1="{x:g}" y1="{start:g}" x2="{x:g}" y2="{lane - 8:g}" stroke="{FAINT}" '
            f'stroke-width="1" stroke-dasharray="1.5 2.5"/>'
        )
        text = str(op.bit) if arrow else ",".join(map(str, bits))
        fill = INK if arrow else "#ffffff"
        self._pill(x, lane, fill)
        self._text(x, lane + 3.5, text, size=9, fill="#ffffff" if arrow else INK)

    def _pill(self, x: float, y: float, fill: str) -> None:
        self.parts.append(
            f'<rect x="{x - 9:g}" y="{y - 8:g}" width="18" height="16" rx="8" fill="{fill}" stroke="{INK}"/>'
        )

    def _link(self, x: float, y0: float, y1: float, *, dashed: bool) -> None:
        dash = ' stroke-dasharray="4 2.5"' if dashed else ""
        self.parts.append(
            f'<line x1="{x:g}" y1="{y0:g}" x2="{x:g}" y2="{y1:g}" stroke="{INK}" stroke-width="1.4"{dash}/>'
        )

    def _dot(self, x: float, y: float, *, hollow: bool) -> None:
        fill = "#ffffff" if hollow else INK
        self.parts.append(
            f'<circle cx="{x:g}" cy="{y:g}" r="4.2" fill="{fill}" stroke="{INK}" stroke-width="1.5"/>'
        )

    def _box(self, x: float, y: float, text: str, fill: str, conditional: bool) -> None:
        width = _box_width(text)
        dash = ' stroke-dasharray="3 2"' if conditional else ""
        self.parts.append(
            f'<rect x="{x - width / 2:g}" y="{y - 10:g}" width="{width:g}" height="20" rx="3" '
            f'fill="{fill}" stroke="{INK}"{dash}/>'
        )
        self._text(x, y + 4.3, text, size=12)

    def _text(
        self,
        x: float,
        y: float,
        text: str,
        *,
        size: float,
        fill: str = INK,
        anchor: str = "middle",
        weight: str = "normal",
    ) -> None:
        bold = ' font-weight="bold"' if weight == "bold" else ""
        self.parts.append(
            f'<text x="{x:g}" y="{y:g}" font-size="{size:g}" fill="{fill}" text-anchor="{anchor}"{bold}>'
            f"{escape(text)}</text>"
        )

    def _legend(self, y: int) -> int:
        """One line that explains the symbols in use; returns the height it took."""
        entries = list(_legend_entries(self.circuit))
        x: float = PAD
        row = y
        for symbol, text in entries:
            width = 26 + 6.3 * len(text)
            if x > PAD and x + width > self.width - PAD:
                x, row = PAD, row + 22
            self._symbol(symbol, x + 9, row)
            self._text(x + 22, row + 4, text, size=11, fill=FAINT, anchor="start")
            x += width + 12
        return row - y + 34 if entries else 12

    def _symbol(self, symbol: str, x: float, y: float) -> None:
        if symbol in ("dot", "ring"):
            self._dot(x, y, hollow=symbol == "ring")
        elif symbol == "not":
            self._target(Op(Kind.X, (), (0,)), x, y, False)
        elif symbol == "cz":
            self._link(x, y - 6, y + 6, dashed=False)
            self._dot(x, y - 6, hollow=False)
            self._dot(x, y + 6, hollow=False)
        elif symbol == "scratch":
            self.parts.append(
                f'<rect x="{x - 9:g}" y="{y - 8:g}" width="18" height="16" rx="4" fill="{SCRATCH}"/>'
                f'<line x1="{x - 9:g}" y1="{y:g}" x2="{x + 9:g}" y2="{y:g}" stroke="{WIRE}" '
                f'stroke-dasharray="5 3"/>'
            )
        else:
            fill = INK if symbol == "wrote" else "#ffffff"
            self._pill(x, y, fill)


def _legend_entries(circuit: Circuit) -> Iterator[tuple[str, str]]:
    controls = [op for op in circuit if op.controls]
    targeted = [op for op in controls if op.kind is not Kind.Z and not _is_sign(op)]
    if any(not control & 1 for op in targeted for control in op.controls):
        yield "dot", "waits for 1"
    if any(control & 1 for op in controls for control in op.controls):
        yield "ring", "waits for 0"
    if any(op.kind is Kind.X for op in circuit):
        yield "not", "NOT"
    if any(op.kind is Kind.Z or _is_sign(op) for op in controls):
        yield "cz", "turns the sign where all hold"
    if any(register.name in ("work", "keep") for register in circuit.registers):
        yield "scratch", "scratch, starts in 0"
    if circuit.bits:
        yield "wrote", "bit measured"
        yield "read", "only if this bit is 1"


def _is_sign(op: Op) -> bool:
    """A controlled constant phase of -1, drawn like a controlled Z."""
    return op.kind is Kind.GPHASE and math.isclose(op.angles[0], math.pi)


def _line_heights(circuit: Circuit) -> Iterator[int]:
    y = PITCH // 2
    for register in circuit.registers:
        for _ in range(register.size):
            yield y
            y += PITCH
        if register.size:
            y += BAND_GAP


def _box_width(text: str) -> float:
    return max(20.0, 10 + 7.4 * len(text))


def _column_width(column: Column) -> int:
    boxes = [_box_width(label(op)) for op in column.operations if op.kind not in (Kind.X, Kind.SWAP)]
    return round(max([STEP - 10.0, *boxes])) + 10
