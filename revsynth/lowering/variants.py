"""Trying several ways to write a cascade, and keeping the cheapest as it comes out.

What a gate costs depends on what it shares with its neighbours, which no sum over gates foresees: so small
cascades are written with every number of scratch qubits that fits and both shapes of folding, middling ones
with both shapes, large ones once.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass, replace

import numpy as np

from revsynth.lowering.assemble import Gates, assemble
from revsynth.lowering.cancel import cancel_neighbours
from revsynth.lowering.constructions import Style, price_gates
from revsynth.lowering.plan import Step, arrange_steps, demands_of, plan
from revsynth.lowering.scratch import scratch_choices, sort_key

SMALL = 1_000
MIDDLING = 20_000
"""Limits in control literals, so that trying takes a fraction of a second."""


@dataclass(frozen=True)
class Written:
    """Composite gates, neighbours cancelled, on so much scratch; `minus`: the constant -1 is left over."""

    gates: Gates
    scratch: int
    minus: bool


def cheapest(steps: Sequence[Step], lines: int, max_qubits: int | None, style: Style) -> Written:
    """The cheapest variant for the aim, the first where they tie; raises BudgetError."""
    size = sum(len(step.controls) for step in steps)
    variants = list(_variants(steps, lines, max_qubits, style, size))
    if len(variants) == 1:
        return _write(steps, lines, *variants[0])
    best: Written | None = None
    best_key: tuple[int, ...] = ()
    for scratch, variant in variants:
        written = _write(steps, lines, scratch, variant)
        gates = written.gates
        price = price_gates(gates.kind, np.diff(gates.offset), gates.qubit(), variant)
        key = sort_key(price, scratch, variant)
        if best is None or key < best_key:
            best, best_key = written, key
    if best is None:
        raise AssertionError("there is always a variant")
    return best


def _variants(
    steps: Sequence[Step], lines: int, max_qubits: int | None, style: Style, size: int
) -> Iterator[tuple[int, Style]]:
    """(scratch, style with a shape) to try."""
    demands = demands_of(steps, lines)
    for shape in ("tree", "ladder") if style.aim == "depth" else ("ladder", "tree"):
        variant = replace(style, shape=shape)
        choices = scratch_choices(demands, lines, max_qubits, variant)
        if size <= SMALL and style.aim != "qubits":
            yield from ((scratch, variant) for _, scratch in choices)
        else:
            yield min(choices)[1], variant
        if size > MIDDLING:
            return


def _write(steps: Sequence[Step], lines: int, scratch: int, style: Style) -> Written:
    planned = plan(arrange_steps(steps, style.shape), lines, scratch, style)
    pieces = planned.pieces
    gates = assemble(
        pieces.templates,
        np.array(pieces.template, dtype=np.int32),
        np.array(pieces.start, dtype=np.int64),
        np.array(pieces.qubits, dtype=np.int32),
    )
    return Written(cancel_neighbours(gates, lines + scratch), scratch, planned.minus)
