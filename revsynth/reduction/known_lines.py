"""Dropping what lines of known value make superfluous: gates that never act, controls that always hold."""

from __future__ import annotations

from collections.abc import Mapping

from revsynth.cascade.line_values import ONE, ZERO, LineValues
from revsynth.cascade.model import PHASE, Cascade, Gate, Line

LONGEST_CASCADE = 200_000
"""Longer cascades stay as they are: following values gate by gate would take longer than it saves."""


def drop_superfluous(cascade: Cascade, known: Mapping[Line, int]) -> Cascade:
    """The same action on every state in which the `known` lines start in the values given, no more gates.

    A control on a line that is known to be in the wanted value is dropped; a gate with a control that never
    holds, or with two that exclude each other, is dropped whole. Other states may be treated differently.
    """
    if not known or len(cascade) > LONGEST_CASCADE:
        return cascade
    values = LineValues.start(cascade.lines, dict(known))
    kept: list[Gate] = []
    for gate in cascade:
        controls = tuple(c for c in gate.controls if values.factor(c) != ONE)
        if values.product(controls) == ZERO:
            continue
        kept.append(Gate(gate.target, controls))
        if gate.target != PHASE:
            values.apply(controls, (gate.target,))
    return (
        cascade
        if len(kept) == len(cascade) and kept == list(cascade)
        else Cascade.from_gates(cascade.lines, kept)
    )
