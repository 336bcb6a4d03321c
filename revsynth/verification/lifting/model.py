"""What lifting gives: the end of every qubit, the sign and what else is left, over one graph of nodes."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, field
from typing import NamedTuple

from revsynth.verification.lifting.graph import Graph
from revsynth.verification.lifting.parities import Literal, Parities

Paths = frozenset[int]
"""A set of path variables (measured ones are outcomes), standing for their XOR or their product."""

NO_PATHS: Paths = frozenset()


class NotClosedError(Exception):
    """The circuit could not be followed: nothing is known about it. `operation`: where, -1 for the end."""

    def __init__(self, why: str, operation: int = -1) -> None:
        super().__init__(why)
        self.operation = operation


class Value(NamedTuple):
    """A bit: a literal of the graph XOR some path variables."""

    literal: Literal
    paths: Paths = NO_PATHS


@dataclass(frozen=True)
class Lifted:
    """|start> goes to exp(i phase) (-1)^sign |values>, for every record of outcomes up to a constant phase.

    This holds exactly and for every start, if the literals of `revealed` and `steady` are constant over all.

    variables: free literals, the start's first (as `lift` was told), then those outcomes that are read by
    ANDs. values: by qubit; a path variable in one is the outcome of a measurement, uniformly random.
    steady: literals that must be constant, or else the phase is no sign; their value for the start 0 is in
    the constant phase.
    revealed: (operation, literal): a measurement or reset there has an outcome that depends on the literal.
    outcome_signs: (outcomes, literal): where all these outcomes are 1 there is a further sign, which must be
    constant. random: whether some outcome is uncertain; constant phases of single outcomes are unobservable.
    sixteenths, radians: the constant phase is sixteenths pi/8 + radians, beside the sign.
    """

    parities: Parities = field(repr=False)
    start_variables: int
    variables: tuple[Literal, ...]
    start: tuple[Literal, ...]
    values: tuple[Value, ...]
    sign: Literal
    sixteenths: int
    radians: float
    steady: tuple[Literal, ...]
    revealed: tuple[tuple[int, Literal], ...]
    outcome_signs: tuple[tuple[Paths, Literal], ...]
    random: bool = False

    def export(self, literals: Sequence[Literal]) -> Graph:
        """A graph of its own whose outputs are these literals and whose inputs are all `variables`."""
        return Graph.below(self.parities, self.variables, literals)
