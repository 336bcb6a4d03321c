"""Variables that equal another one, or its complement, put in one another's place."""

from __future__ import annotations

from dataclasses import dataclass

from revsynth.logic.clauses.gates import find_gates
from revsynth.logic.clauses.simplify import Conjunction, conjunction

CONTRADICTION = Conjunction((), [], [], consistent=False)


@dataclass(frozen=True)
class Merged:
    """A conjunction over fewer variables; `equals` gives the literal that each of the others is, in its
    place.

    Units stay in the conjunction. The literals are of variables that have not been replaced.
    """

    found: Conjunction
    equals: dict[int, int]


def merge_equal(found: Conjunction) -> Merged:
    """Replace variables by equal literals until no window and no sum of two tells of more.

    The lowest variable of a class stays. The models are those of the conjunction returned, extended by
    `equals`.
    """
    parent: dict[int, int] = {}
    while found.consistent:
        news = [gate for gate in find_gates(found) if gate.kind == "sum" and len(gate.variables) <= 2]
        units = list(found.units)
        for gate in news:
            if len(gate.variables) == 1:
                units.append(-gate.variables[0] if gate.inverted else gate.variables[0])
                continue
            one, other = (_root(parent, variable) for variable in gate.variables)
            other = other if gate.inverted else -other
            if one == -other:
                return Merged(CONTRADICTION, {})
            if one != other:
                low, high = sorted((one, other), key=abs)
                parent[abs(high)] = low if high > 0 else -low
        if not news:
            break
        found = _replaced(found, parent, units)
    if not found.consistent:
        return Merged(CONTRADICTION, {})
    return Merged(found, {variable: _root(parent, variable) for variable in sorted(parent)})


def _root(parent: dict[int, int], literal: int) -> int:
    """The literal that a literal equals and that is not replaced itself; paths are halved on the way."""
    while abs(literal) in parent:
        above = parent[abs(literal)]
        if abs(above) in parent:
            top = parent[abs(above)]
            above = parent[abs(literal)] = top if above > 0 else -top
        literal = above if literal > 0 else -above
    return literal


def _replaced(found: Conjunction, parent: dict[int, int], units: list[int]) -> Conjunction:
    clauses = [tuple(_root(parent, entry) for entry in clause) for clause in found.clauses]
    fixed = [(_root(parent, unit),) for unit in units]
    sums = []
    for (first, *others), value in found.sums:
        signed = [first if value else -first, *others]
        sums.append([_root(parent, entry) for entry in signed])
    return conjunction([*clauses, *fixed], sums, keep=True)
