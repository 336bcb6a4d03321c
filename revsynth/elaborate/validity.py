"""Whether a wide spec is valid: that its checks never fail and its domain is not empty, by a SAT solver."""

from __future__ import annotations

from collections.abc import Sequence
from typing import TYPE_CHECKING

from revsynth.elaborate.model import Elaboration
from revsynth.errors import SpecError, UndecidedError
from revsynth.logic.equivalence import encode
from revsynth.logic.network import FALSE, TRUE, Network
from revsynth.spec.model import Spec

if TYPE_CHECKING:
    from revsynth.solver import Solver

CONFLICTS = 200_000
"""Conflicts that each question may take."""


def check_valid(spec: Spec, elaboration: Elaboration) -> None:
    """Raise the error of the first check that fails somewhere, naming an input, or for an empty domain.

    Raises UndecidedError where the solver cannot tell within its limit.
    """
    questions = [check for check in elaboration.checks if _constant(check.network) != FALSE]
    care = elaboration.function.care
    asks_domain = spec.domain is not None and care is not None
    if not questions and not asks_domain:
        return
    from revsynth.solver import Solver

    with Solver() as solver:
        inputs = [solver.variable() for _ in range(spec.input_bits)]
        for check in questions:
            answer = solver.solve([asked(solver, check.network, inputs)], CONFLICTS)
            if answer:
                raise check.error(sum(1 << i for i, one in enumerate(inputs) if solver.value(one)))
            if answer is None:
                raise UndecidedError(
                    f"{spec.source}: it could not be settled whether this ever happens: {check.message}"
                )
        if asks_domain and care is not None:
            answer = solver.solve([asked(solver, care, inputs)], CONFLICTS)
            if answer is False:
                raise SpecError(
                    "no input satisfies it: a domain needs at least one",
                    source=spec.source,
                    place="[domain] where",
                )


def asked(solver: Solver, network: Network, inputs: Sequence[int]) -> int:
    """The solver's literal of a network's first output over the variables `inputs`."""
    literal = int(network.outputs[0])
    variable = encode(solver, network, inputs)[literal >> 1]
    return -variable if literal & 1 else variable


def _constant(network: Network) -> int | None:
    literal = int(network.outputs[0])
    return literal if literal in (FALSE, TRUE) else None
