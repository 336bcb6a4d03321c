"""Circuits with a single fault: a gate left out or inverted, operands exchanged, a polarity, a condition."""

from __future__ import annotations

import random
from collections.abc import Iterator
from dataclasses import dataclass

from revsynth.circuit.model import Circuit, Kind, Op
from tests.verification.textbook import with_steps

_INVERSE = {Kind.T: Kind.TDG, Kind.TDG: Kind.T, Kind.S: Kind.SDG, Kind.SDG: Kind.S}


@dataclass(frozen=True)
class Mutant:
    """A circuit with one fault in operation `index`."""

    circuit: Circuit
    index: int
    op: Op
    fault: str


def mutants(circuit: Circuit) -> Iterator[Mutant]:
    """All of them."""
    for index, op in enumerate(circuit):
        for fault, change in _changes(op):
            yield Mutant(with_steps(circuit, [(index, change)]), index, op, fault)


def some_mutants(circuit: Circuit, count: int, seed: int) -> Iterator[Mutant]:
    """So many of them, in different operations, the same ones for the same seed."""
    draw = random.Random(seed)
    operations = list(circuit)
    for index in sorted(draw.sample(range(len(operations)), min(count, len(operations)))):
        op = operations[index]
        fault, change = draw.choice(list(_changes(op)))
        yield Mutant(with_steps(circuit, [(index, change)]), index, op, fault)


def _changes(op: Op) -> Iterator[tuple[str, Op | None]]:
    yield "left out", None
    if op.kind in _INVERSE:
        yield "inverted", op._replace(kind=_INVERSE[op.kind])
    for place, control in enumerate(op.controls):
        others = [*op.controls]
        others[place] = control ^ 1
        yield f"polarity of control {place}", op._replace(controls=tuple(others))
        others[place] = 2 * op.targets[0] + (control & 1)
        yield (
            f"control {place} and target exchanged",
            op._replace(controls=tuple(others), targets=(control >> 1,)),
        )
    if op.condition >= 0:
        yield "condition dropped", op._replace(condition=-1)
