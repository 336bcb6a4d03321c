"""What any circuit for a function takes at least, each bound with its reason.

ANDs: C. P. Schnorr, "The multiplicative complexity of Boolean functions", AAECC-6, 1988 (degree - 1);
M. S. Turan, R. Peralta, LightSec 2014 (all functions of up to five inputs, by affine class).
T gates: M. Beverland, E. Campbell, M. Howard, V. Kliuchnikov, "Lower bounds on the non-Clifford resources for
quantum computations", Quantum Science and Technology 5, 2020 (stabilizer nullity).

The nullity of a state is its qubits less the independent Pauli operators that fix it. Clifford gates and
Pauli measurements never raise it and a T state has 1, so no circuit, measured or not, has fewer T gates than
the nullity that it brings about. A phase oracle brings the uniform superposition to a state that X^a Z^b
fixes, up to sign, where f(x + a) + f(x) is affine. Anything that computes f brings half of n entangled pairs
to the sum over x of |x>|f(x)>, fixed by X^a X^c where f(x + a) + f(x) = c and by Z^b Z^d where d.f(x) + b.x
is constant; garbage kept beside it, measured in the X basis, leaves no more than these.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

from revsynth.logic.fillings import fewest_ands, unfillable
from revsynth.logic.flat_directions import MOST_INPUTS, flat_directions
from revsynth.logic.function import Function
from revsynth.logic.normal_form import algebraic_normal_form, degree
from revsynth.logic.structure import independent_nonlinear
from revsynth.options import Oracle, Uncompute

_SOURCE = "stabilizer nullity (Beverland, Campbell, Howard, Kliuchnikov 2020)"
MOST_CELLS = 1 << 20
"""Output bits times table rows; larger functions are given no bound on T."""


@dataclass(frozen=True)
class Bound:
    """At least `t` T gates and `ands` ANDs, and why; None where nothing is known."""

    t: int | None
    why: str
    ands: int | None
    ands_why: str

    def to_json(self) -> dict[str, Any] | None:
        """The JSON key `lower_bound`: `t` and `why`, with `ands` and `ands_why` where they are known."""
        if self.t is None:
            return None
        found: dict[str, Any] = {"t": self.t, "why": self.why}
        return found if self.ands is None else found | {"ands": self.ands, "ands_why": self.ands_why}


def lower_bound(function: Function, oracle: Oracle, uncompute: Uncompute) -> Bound | None:
    """What every Clifford+T circuit for the function takes at least; None where nothing is known.

    The bound on T holds with measurements too, so that `uncompute` changes nothing today.
    """
    ands, ands_why = and_bound(function)
    t, why = t_bound(function, oracle)
    return None if t is None and ands is None else Bound(t, why, ands, ands_why)


def and_bound(function: Function) -> tuple[int | None, str]:
    """The fewest ANDs over AND, XOR and NOT, or less; exact for one output bit of up to five inputs."""
    if unfillable(function) is None:
        free = "" if function.is_complete else ", over all ways to fill in what is free"
        return fewest_ands(function).ands, f"exact, by affine class{free} (Turan, Peralta 2014)"
    if not function.is_complete:
        return None, ""
    forms = algebraic_normal_form(function.values, function.inputs)
    highest = degree(forms, function.inputs)
    rank = independent_nonlinear(forms, function.inputs)
    if rank >= max(highest - 1, 2):
        return rank, f"{rank} output bits are independent modulo affine functions: an AND for each"
    return max(highest - 1, 0), f"degree {highest}: at least degree - 1 (Schnorr 1988)"


def t_bound(function: Function, oracle: Oracle) -> tuple[int | None, str]:
    """The fewest T gates by nullity; (None, "") for free values or more than 16 inputs."""
    n, m = function.inputs, function.outputs
    if not function.is_complete or n > MOST_INPUTS or m << n > MOST_CELLS:
        return None, ""
    if oracle == "phase":
        if m != 1:
            return None, ""
        moved = n - flat_directions(function.values, n, 1)
        return moved, f"{moved} of {n} input directions have a derivative that is not affine: {_SOURCE}"
    moved = n - flat_directions(function.values, n, 0)
    rank = independent_nonlinear(algebraic_normal_form(function.values, n), n)
    return moved + rank, (
        f"{moved} of {n} input directions change the outputs by more than a constant, "
        f"and {rank} output bits are independent modulo affine functions: {_SOURCE}"
    )
