"""Clauses factored by selection: both polarities of a variable share one AND.

With v in some clauses, not v in others, and the rest: f = (v ? build(others without v) : build(some without
v)) AND build(rest). Each clause comes with the order in which its variables are selected (see `orders`);
units, subsumed clauses and clauses common to both branches are simplified on the way.
"""

from __future__ import annotations

from collections.abc import Generator, Mapping, Sequence
from typing import TypeAlias

from revsynth.logic.clauses.orders import Ordered
from revsynth.logic.clauses.simplify import propagate, without_subsumed
from revsynth.logic.network import FALSE, Literal
from revsynth.logic.network_builder import NetworkBuilder

Step: TypeAlias = Generator[list[Ordered], Literal, Literal]


def factor(builder: NetworkBuilder, orders: Sequence[Ordered], literals: Mapping[int, Literal]) -> Literal:
    """The literal of the conjunction of the clauses; `literals` holds that of each variable.

    Works with its own stack: long clauses nest deeply.
    """
    stack = [_build(builder, list(orders), literals)]
    value: Literal | None = None
    while stack:
        try:
            wanted = next(stack[-1]) if value is None else stack[-1].send(value)
        except StopIteration as end:
            stack.pop()
            value = end.value
        else:
            stack.append(_build(builder, wanted, literals))
            value = None
    return FALSE if value is None else value


def _build(builder: NetworkBuilder, clauses: list[Ordered], literals: Mapping[int, Literal]) -> Step:
    """One conjunction: yields the smaller ones that it needs, and returns its literal."""
    terms: list[Literal] = []
    while clauses:
        reduced = propagate(list({frozenset(clause): clause for clause in reversed(clauses)}.values())[::-1])
        if not reduced.consistent:
            return FALSE
        terms += [literal_of(unit, literals) for unit in reduced.units]
        groups: dict[int, tuple[list[Ordered], list[Ordered]]] = {}
        for first, *others in without_subsumed(reduced.clauses):
            groups.setdefault(abs(first), ([], []))[first < 0].append(tuple(others))
        clauses = []
        for variable, (with_true, with_false) in groups.items():
            shared = {frozenset(clause) for clause in with_true} & set(map(frozenset, with_false))
            clauses += [clause for clause in with_true if frozenset(clause) in shared]
            zero = yield [clause for clause in with_true if frozenset(clause) not in shared]
            one = yield [clause for clause in with_false if frozenset(clause) not in shared]
            terms.append(builder.mux(literals[variable], one, zero))
    return builder.all_of(terms)


def literal_of(entry: int, literals: Mapping[int, Literal]) -> Literal:
    """The network's literal of a clause's literal."""
    return literals[entry] if entry > 0 else literals[-entry] ^ 1
