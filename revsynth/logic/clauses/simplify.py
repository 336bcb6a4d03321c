"""Clauses made smaller without changing what they mean: units, duplicates, subsumption, strengthening.

The last two as in Eén, Biere, "Effective preprocessing in SAT through variable and clause elimination", SAT
2005 (from memory). Nothing here eliminates a variable: the models stay the same.
"""

from __future__ import annotations

from collections import deque
from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from typing import TypeAlias

Clause: TypeAlias = tuple[int, ...]
"""Different literals in ascending order, no variable twice; the empty clause is never true."""

MOST_VISITS = 4_000_000
"""Clauses that subsumption looks at; beyond, the rest stays as it is."""


def normal(clauses: Iterable[Sequence[int]]) -> list[Clause]:
    """Clauses without repeated literals, always true ones, and repeated clauses; in the order given."""
    found: dict[Clause, None] = {}
    for literals in clauses:
        chosen = set(literals)
        if not any(-literal in chosen for literal in chosen):
            found[tuple(sorted(chosen))] = None
    return list(found)


@dataclass(frozen=True)
class Propagated:
    """`units` are literals that must be true; `clauses` have two literals or more, none of a unit's variable.

    consistent: False where the clauses contradict each other (then the rest says nothing).
    """

    units: tuple[int, ...]
    clauses: list[Clause]
    consistent: bool = True


def propagate(clauses: Sequence[Clause]) -> Propagated:
    """Put the literals of unit clauses into all others until there are no more; linear in time."""
    true: dict[int, None] = {}
    queue: list[int] = []
    if not _collect((clause for clause in clauses if len(clause) < 2), true, queue):
        return Propagated((), [], consistent=False)
    if not queue:
        return Propagated((), list(clauses))
    occurs: dict[int, list[int]] = {}
    open_literals = [len(clause) for clause in clauses]
    for place, clause in enumerate(clauses):
        for literal in clause:
            occurs.setdefault(literal, []).append(place)
    satisfied = [False] * len(clauses)
    for literal in queue:
        for place in occurs.get(literal, ()):
            satisfied[place] = True
        for place in occurs.get(-literal, ()):
            open_literals[place] -= 1
            if open_literals[place] < 2 and not satisfied[place]:
                left = tuple(other for other in clauses[place] if -other not in true)
                if not _collect((left,), true, queue):
                    return Propagated((), [], consistent=False)
    rest: dict[Clause, None] = {}
    for place, clause in enumerate(clauses):
        if not any(literal in true for literal in clause):
            kept = open_literals[place] == len(clause)
            rest[clause if kept else tuple(lit for lit in clause if -lit not in true)] = None
    return Propagated(tuple(true), list(rest))


def _collect(short: Iterable[Clause], true: dict[int, None], queue: list[int]) -> bool:
    """Take over units; False at an empty clause or where two units contradict each other."""
    for clause in short:
        if not clause or -clause[0] in true:
            return False
        if clause[0] not in true:
            true[clause[0]] = None
            queue.append(clause[0])
    return True


def without_subsumed(clauses: Sequence[Clause]) -> list[Clause]:
    """The clauses that hold no other clause, in their order; each is tried against those of its rarest
    literal.
    """
    if len({len(clause) for clause in clauses}) < 2:
        return list(clauses)
    occurs: dict[int, list[int]] = {}
    sets = [frozenset(clause) for clause in clauses]
    for place, clause in enumerate(clauses):
        for literal in clause:
            occurs.setdefault(literal, []).append(place)
    gone = [False] * len(clauses)
    visits = 0
    for place in sorted(range(len(clauses)), key=lambda place: len(clauses[place])):
        if gone[place] or not clauses[place]:
            continue
        near = min((occurs[literal] for literal in clauses[place]), key=len)
        visits += len(near)
        if visits > MOST_VISITS:
            break
        for other in near:
            if other != place and not gone[other] and sets[place] <= sets[other]:
                gone[other] = True
    return [clause for place, clause in enumerate(clauses) if not gone[place]]


def strengthened(clauses: Sequence[Clause]) -> list[Clause]:
    """Drop clauses that others imply, and literals that another clause makes superfluous, until nothing
    changes.

    With (v or c) and (not v or d), c part of d, the second says no more than d. The models stay the same,
    and so does the order of the clauses.
    """
    return _Strengthening(clauses).run()


class _Strengthening:
    """Each clause is held against those that share a literal with it, again when it has become shorter."""

    def __init__(self, clauses: Sequence[Clause]) -> None:
        self.sets: list[frozenset[int] | None] = [frozenset(clause) for clause in clauses]
        self.occurs: dict[int, dict[int, None]] = {}
        for number, clause in enumerate(clauses):
            for entry in clause:
                self.occurs.setdefault(entry, {})[number] = None
        self.queue = deque(sorted(range(len(clauses)), key=lambda number: len(clauses[number])))
        self.visits = 0

    def run(self) -> list[Clause]:
        while self.queue and self.visits < MOST_VISITS:
            number = self.queue.popleft()
            self.drop_longer(number)
            for entry in sorted(self.sets[number] or ()):
                self.shorten_others(number, entry)
        return [tuple(sorted(clause)) for clause in self.sets if clause is not None]

    def near(self, entries: Iterable[int]) -> list[int]:
        """The clauses that hold the literal that fewest hold, ascending."""
        lists: list[dict[int, None]] = [self.occurs.get(entry, {}) for entry in entries]
        shortest: dict[int, None] = min(lists, key=len)
        self.visits += len(shortest)
        return sorted(shortest)

    def drop_longer(self, number: int) -> None:
        clause = self.sets[number]
        if not clause:
            return
        for other in self.near(clause):
            held = self.sets[other]
            if other != number and held is not None and clause <= held:
                self.change(other, None)

    def shorten_others(self, number: int, entry: int) -> None:
        clause = self.sets[number]
        if clause is None or entry not in clause:
            return
        wanted = (clause - {entry}) | {-entry}
        for other in self.near(wanted):
            held = self.sets[other]
            if held is not None and wanted <= held:
                self.change(other, held - {-entry})
                self.queue.append(other)

    def change(self, number: int, clause: frozenset[int] | None) -> None:
        """Put a shorter clause, or none, in the place of one."""
        for entry in (self.sets[number] or frozenset()) - (clause or frozenset()):
            del self.occurs[entry][number]
        self.sets[number] = clause


@dataclass(frozen=True)
class Conjunction:
    """Clauses in short form: units, clauses of two literals or more, and sums.

    A sum (variables, value) is true where the exclusive sum of the variables, ascending, is `value`.
    """

    units: tuple[int, ...]
    clauses: list[Clause]
    sums: list[tuple[tuple[int, ...], int]]
    consistent: bool = True


def conjunction(
    clauses: Iterable[Sequence[int]], sums: Iterable[Sequence[int]], *, keep: bool = False
) -> Conjunction:
    """Clauses and XOR clauses in short form: the same models, over the same variables.

    keep: the clauses as given (but for units) stay beside the short ones, which hide gates.
    """
    given = original = normal(clauses)
    linear = [_sum_of(literals) for literals in sums]
    units: dict[int, None] = {}
    while True:
        single = [(v[0] if value else -v[0],) for v, value in linear if len(v) == 1]
        if any(not variables and value for variables, value in linear):
            return Conjunction((), [], [], consistent=False)
        linear = list(dict.fromkeys(entry for entry in linear if len(entry[0]) > 1))
        step = propagate([*given, *single])
        if not step.consistent:
            return Conjunction((), [], [], consistent=False)
        units.update(dict.fromkeys(step.units))
        shorter = strengthened(step.clauses)
        fixed = [_with_units(entry, units) for entry in linear]
        if fixed == linear and not any(len(clause) < 2 for clause in shorter):
            if keep:
                unit_clauses: list[Clause] = [(unit,) for unit in units]
                shorter = list(dict.fromkeys([*shorter, *propagate([*original, *unit_clauses]).clauses]))
            return Conjunction(tuple(units), shorter, linear)
        given, linear = shorter, fixed


def _sum_of(literals: Sequence[int]) -> tuple[tuple[int, ...], int]:
    """Variables that occur an odd number of times, and the value that makes an XOR clause true."""
    odd: set[int] = set()
    value = 1
    for literal in literals:
        odd ^= {abs(literal)}
        value ^= literal < 0
    return tuple(sorted(odd)), value


def _with_units(entry: tuple[tuple[int, ...], int], units: dict[int, None]) -> tuple[tuple[int, ...], int]:
    variables, value = entry
    value ^= sum(variable in units for variable in variables) & 1
    return tuple(v for v in variables if v not in units and -v not in units), value
