"""The gate set `cascade`: gates with any number of positive and negative controls, one for one."""

from __future__ import annotations

import math

from revsynth.cascade.model import PHASE, Cascade, Gate
from revsynth.circuit.model import CircuitBuilder, Kind


def write_cascade(builder: CircuitBuilder, cascade: Cascade) -> None:
    """Append every gate; line i is qubit i.

    A phase gate becomes a controlled Z on its last line that waits for 1; where all its lines wait for 0, X
    goes around the last one. The phase gate without literals is the constant phase pi.
    """
    for gate in cascade:
        if gate.target == PHASE:
            _write_phase(builder, gate)
        else:
            builder.x(gate.target, gate.controls)


def _write_phase(builder: CircuitBuilder, gate: Gate) -> None:
    if not gate.controls:
        builder.add(Kind.GPHASE, (), angles=(math.pi,))
        return
    positive = [control for control in gate.controls if not control & 1]
    chosen = positive[-1] if positive else gate.controls[-1]
    others = tuple(control for control in gate.controls if control != chosen)
    if not positive:
        builder.x(chosen >> 1)
    builder.z(chosen >> 1, others)
    if not positive:
        builder.x(chosen >> 1)
