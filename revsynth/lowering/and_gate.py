"""The AND of two qubits on a third one that starts in 0, and ways to erase it.

Sources: four T for a product written on a qubit in 0, erased by a measurement in the X basis and a controlled
Z where the outcome is 1, without T: Jones, "Low-overhead constructions for the fault-tolerant Toffoli gate",
Phys. Rev. A 87, 2013; Gidney, "Halving the cost of quantum addition", Quantum 2, 2018.
"""

from __future__ import annotations

from revsynth.lowering.draft import Draft
from revsynth.lowering.toffoli import relative_not


def write_and(draft: Draft, a: int, b: int, target: int) -> None:
    """Target 0 becomes a b, without any phase: 4 T, 3 CX.

    On a target in 0 the relative-phase NOT leaves the phase i where a b = 1, which S inverse takes away.
    """
    relative_not(draft, a, b, target)
    draft.s(target, inverse=True)


def unwrite_and(draft: Draft, a: int, b: int, target: int) -> None:
    """The inverse of `write_and`: a target that holds a b goes back to 0; 4 T, no measurement."""
    draft.s(target)
    relative_not(draft, a, b, target)


def measure_and_away(draft: Draft, a: int, b: int, target: int) -> None:
    """A target that holds a b goes back to 0 by measurement, without T.

    Measuring H's output leaves the phase (-1)^(outcome a b), which a controlled Z undoes where the outcome is
    1.
    """
    draft.h(target)
    outcome = draft.measure(target)
    draft.cz(a, b, condition=outcome)
    draft.x(target, condition=outcome)
