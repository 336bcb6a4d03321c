"""A conjunction of clauses as one literal of a network: flat, factored, or with its windows as whole
functions.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence

from revsynth.logic.affine_classes import and_count, circuit
from revsynth.logic.clauses.factoring import factor, literal_of
from revsynth.logic.clauses.gates import Gate
from revsynth.logic.clauses.orders import annealed_orders, greedy_orders, one_sided
from revsynth.logic.clauses.simplify import Clause, Conjunction
from revsynth.logic.network import FALSE, Literal
from revsynth.logic.network_builder import NetworkBuilder

Literals = Mapping[int, Literal]
"""By variable, from 1 on."""
Runs = Sequence[int]
"""Steps of each run of annealing; the best of all counts. Runs of fewer steps than clauses are left out."""
MOVES_A_CLAUSE = 1000
"""Steps of annealing for each clause at most: few clauses have no more orders to try."""
WORTH = 1.25
"""ANDs that a factored clause costs, about: a window must cost less for each clause that it covers."""


def flat(builder: NetworkBuilder, found: Conjunction, literals: Literals) -> Literal:
    """Each clause an OR, and the AND of them all."""
    if not found.consistent:
        return FALSE
    ors = [builder.any_of(literal_of(entry, literals) for entry in clause) for clause in found.clauses]
    return builder.all_of([*ors, *_others(builder, found, literals)])


def factored(
    builder: NetworkBuilder, found: Conjunction, literals: Literals, runs: Runs, seed: int
) -> Literal:
    """The clauses factored by selection, annealed in `runs` (none: greedily)."""
    if not found.consistent:
        return FALSE
    return builder.all_of(
        [_factored(builder, found.clauses, literals, runs, seed), *_others(builder, found, literals)]
    )


def windowed(
    builder: NetworkBuilder,
    found: Conjunction,
    gates: Sequence[Gate],
    literals: Literals,
    runs: Runs,
    seed: int,
) -> Literal:
    """Windows that are cheaper as one function, by an exact circuit, than as clauses; the others factored."""
    if not found.consistent:
        return FALSE
    covered: set[int] = set()
    terms = _others(builder, found, literals)
    windows = [gate for gate in gates if gate.kind == "window"]
    prices = [1 + and_count(len(gate.variables), gate.table) for gate in windows]
    order = sorted(range(len(windows)), key=lambda i: (prices[i] / len(windows[i].clauses), i))
    for place in order:
        gate = windows[place]
        fresh = [number for number in gate.clauses if number not in covered]
        if prices[place] < WORTH * len(fresh):
            covered.update(fresh)
            inputs = [literals[variable] for variable in gate.variables]
            terms += builder.copy(circuit(len(gate.variables), gate.table), inputs)
    rest = [clause for number, clause in enumerate(found.clauses) if number not in covered]
    terms.append(_factored(builder, rest, literals, runs, seed))
    return builder.all_of(terms)


def _factored(
    builder: NetworkBuilder, clauses: Sequence[Clause], literals: Literals, runs: Runs, seed: int
) -> Literal:
    greedy = greedy_orders(clauses)
    long_enough = [min(moves, MOVES_A_CLAUSE * len(clauses)) for moves in runs if moves > len(clauses)]
    if not long_enough:
        return factor(builder, greedy, literals)
    tried = [annealed_orders(greedy, moves, seed + place) for place, moves in enumerate(long_enough)]
    return factor(builder, min(tried, key=one_sided), literals)


def _others(builder: NetworkBuilder, found: Conjunction, literals: Literals) -> list[Literal]:
    """Units and sums."""
    terms = [literal_of(unit, literals) for unit in found.units]
    for variables, value in found.sums:
        terms.append(builder.parity(literals[variable] for variable in variables) ^ 1 ^ value)
    return terms
