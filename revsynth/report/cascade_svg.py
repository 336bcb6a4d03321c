"""A cascade as a picture: its gates as a circuit on one register of lines, drawn like any other."""

from __future__ import annotations

import math

from revsynth.cascade.model import PHASE, Cascade
from revsynth.circuit.model import Circuit, CircuitBuilder, Kind
from revsynth.report.circuit_svg import MOST_DRAWN, draw_svg


def draw_cascade(cascade: Cascade, *, title: str = "") -> str:
    """The picture as SVG text; phase gates are dots and rings without a target."""
    return draw_svg(as_circuit(cascade), title=title)


def notebook_picture(cascade: Cascade) -> str | None:
    """The picture, or None where it would be too large to show."""
    return draw_cascade(cascade) if len(cascade) <= MOST_DRAWN else None


def as_circuit(cascade: Cascade) -> Circuit:
    """NOTs with controls, and a controlled constant phase of -1 for each phase gate; line 0 first."""
    builder = CircuitBuilder()
    if cascade.lines:
        builder.add_register("line", cascade.lines)
    for gate in cascade:
        if gate.target == PHASE:
            builder.add(Kind.GPHASE, (), gate.controls, (math.pi,))
        else:
            builder.x(gate.target, gate.controls)
    return builder.build()
