"""Boolean formulas over classical bits in conjunctive form, both of the formula and of its negation.

Literals are those of the circuit model: 2 * bit, + 1 where the bit waits for 0. A clause holds where one of
its literals does; a set of clauses holds where all of them do.
"""

from __future__ import annotations

from collections.abc import Sequence
from typing import NamedTuple, TypeAlias

from revsynth.circuit.model import Condition, Guard

Clause: TypeAlias = frozenset[int]
Clauses: TypeAlias = frozenset[Clause]

MAX_CLAUSES = 1024
MAX_LITERALS = 4096


class Formula(NamedTuple):
    """The clauses of a formula and of its negation; None where they would be more than MAX_CLAUSES."""

    holds: Clauses | None
    fails: Clauses | None


ALWAYS = Formula(frozenset(), frozenset((frozenset(),)))
NEVER = Formula(ALWAYS.fails, ALWAYS.holds)


def literal(bit: int) -> Formula:
    """The bit is 1."""
    return Formula(frozenset((frozenset((2 * bit,)),)), frozenset((frozenset((2 * bit + 1,)),)))


def negation(formula: Formula) -> Formula:
    """Not the formula."""
    return Formula(formula.fails, formula.holds)


def conjunction(parts: Sequence[Formula]) -> Formula:
    """All of the parts."""
    return Formula(_union([part.holds for part in parts]), _product([part.fails for part in parts]))


def disjunction(parts: Sequence[Formula]) -> Formula:
    """One of the parts at least."""
    return negation(conjunction([negation(part) for part in parts]))


def equal(left: Formula, right: Formula) -> Formula:
    """Both or neither."""
    if left in (ALWAYS, NEVER):
        left, right = right, left
    if right == ALWAYS:
        return left
    if right == NEVER:
        return negation(left)
    return conjunction((disjunction((left, negation(right))), disjunction((negation(left), right))))


def _union(sets: Sequence[Clauses | None]) -> Clauses | None:
    found: set[Clause] = set()
    for clauses in sets:
        if clauses is None:
            return None
        found |= clauses
        if len(found) > 8 * MAX_CLAUSES:
            return None
    return frozenset(found)


def _product(sets: Sequence[Clauses | None]) -> Clauses | None:
    """The clauses of a disjunction: one clause of each side joined, tautologies left out."""
    single: set[int] = set()
    others: list[Clauses] = []
    for clauses in sets:
        if clauses is None:
            return None
        if len(clauses) == 1:
            single |= next(iter(clauses))
            if len(single) > MAX_LITERALS:
                return None
        else:
            others.append(clauses)
    found: Clauses = frozenset((frozenset(single),)) if not _tautology(single) else frozenset()
    for clauses in others:
        if len(found) * len(clauses) > MAX_CLAUSES:
            return None
        joined = (one | other for one in found for other in clauses)
        found = frozenset(clause for clause in joined if not _tautology(clause))
    return found


def _tautology(clause: frozenset[int] | set[int]) -> bool:
    return any(entry ^ 1 in clause for entry in clause if not entry & 1)


def condition_of(clauses: Clauses) -> Condition | None:
    """The condition in the one form that the reader gives; None where it never holds."""
    return canonical(
        tuple(Guard(tuple(sorted(entry ^ 1 for entry in clause)), expected=False) for clause in clauses)
    )


def canonical(condition: Condition) -> Condition | None:
    """The same condition in the one form that the reader gives; None where a guard can never hold.

    First one guard with all bits that must have a value, sorted; then the guards that only exclude a
    combination, sorted. Two conditions that differ by order or grouping alone get the same form.
    """
    required: set[int] = set()
    excluded: set[tuple[int, ...]] = set()
    for guard in condition:
        bits = set(guard.bits)
        if guard.expected:
            required |= bits
        elif not bits:
            return None
        elif len(bits) == 1:
            required.add(next(iter(bits)) ^ 1)
        elif not _tautology(bits):
            excluded.add(tuple(sorted(bits)))
    if _tautology(required):
        return None
    first = (Guard(tuple(sorted(required))),) if required else ()
    return (*first, *(Guard(bits, expected=False) for bits in sorted(excluded)))
