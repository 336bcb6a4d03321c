"""Writing composite gates out in the gate set."""

from __future__ import annotations

import numpy as np

from revsynth.circuit.model import Kind
from revsynth.lowering.assemble import Gates, assemble
from revsynth.lowering.composites import expansion
from revsynth.lowering.constructions import Style, is_composite
from revsynth.lowering.draft import Draft, Template


def expand(gates: Gates, style: Style) -> Gates:
    """Every composite gate becomes its gates; the others stay. No given gate may have a condition or bit."""
    width = np.diff(gates.offset)
    codes, template = np.unique(gates.kind.astype(np.int64) * 4 + width, return_inverse=True)
    templates = [_template(int(code) // 4, int(code) % 4, style) for code in codes]
    if all(len(shape) == 1 for shape in templates):
        kind = np.array([shape.kind[0] for shape in templates], dtype=np.uint8)[template]
        return Gates(kind, gates.offset, gates.operand, gates.condition, gates.bit, gates.bits)
    return assemble(templates, template.astype(np.int32), gates.offset[:-1], gates.qubit())


def _template(kind: int, operands: int, style: Style) -> Template:
    if is_composite(kind, operands):
        return expansion(kind, style.gates, style.uncompute)
    draft = Draft()
    draft.put(Kind(kind), range(operands))
    return draft.template()
