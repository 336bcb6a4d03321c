"""Which gates define which variables, without a circle, so that few variables stay free."""

from __future__ import annotations

from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass
from random import Random

from revsynth.logic.clauses.gates import Gate
from revsynth.logic.clauses.linear_forms import Form, Forms

MOST_VISITS = 20_000_000
"""Definitions that are looked through for circles; beyond, variables stay free."""
ATTEMPTS = 8
ATTEMPT_VISITS = 2_000_000
"""No further attempt is made after so many."""


@dataclass(frozen=True)
class Definitions:
    """chosen: the gate of each defined variable, each behind those that it reads; free: the others,
    ascending.
    """

    chosen: dict[int, Gate]
    free: tuple[int, ...]


def choose_definitions(gates: Sequence[Gate], variables: Iterable[int]) -> Definitions:
    """Give gates to variables that they define. Several orders are tried; the fewest free variables win.

    Every choice is sound: operands never depend on the variable itself, and a gate defines one variable.
    Sums that define none are linear equations between what is free and what is not linear, and are solved
    for free variables by elimination.
    """
    every = sorted(variables)
    budget = [MOST_VISITS]
    best: dict[int, Gate] = {}
    for attempt in range(ATTEMPTS):
        chosen = _choose(gates, attempt, budget)
        if len(chosen) > len(best):
            best = chosen
        if attempt and budget[0] < MOST_VISITS - ATTEMPT_VISITS:
            break
    best = _in_order(best)
    used = {id(gate) for gate in best.values()}
    unused = [gate for gate in gates if gate.kind == "sum" and id(gate) not in used]
    _eliminate(best, unused, budget)
    return Definitions(_in_order(best), tuple(variable for variable in every if variable not in best))


def _eliminate(chosen: dict[int, Gate], sums: Sequence[Gate], budget: list[int]) -> None:
    """Add a definition for each sum that can be solved for a free variable."""
    system = Forms(chosen, sums)
    rows: list[tuple[Form, Form]] = []
    for gate in sums:
        form = system.of_sum(gate)
        for pivot, row in rows:
            if form & pivot:
                form ^= row
        within = system.within(form)
        for variable in within:
            others = [other for other in within if other != variable]
            if variable not in chosen and not _depends(others, variable, chosen, budget):
                chosen[variable] = Gate("sum", tuple(within), (variable,), inverted=not form & 1)
                rows.append((1 << system.place[variable], form))
                break


def _choose(gates: Sequence[Gate], attempt: int, budget: list[int]) -> dict[int, Gate]:
    """Gates of few possible outputs first; of several possible ones that which fewest other gates define.

    attempt: 0 takes the highest variable at a tie, 1 the lowest, others any, and gates in any order.
    """
    makers: dict[int, int] = {}
    for gate in gates:
        for output in gate.outputs:
            makers[output] = makers.get(output, 0) + 1
    chosen: dict[int, Gate] = {}
    random = Random(attempt).random
    rank = {output: (-output, output)[attempt] if attempt < 2 else random() for output in makers}
    numbers = [number if attempt < 2 else random() for number in range(len(gates))]
    for _, _, place in sorted((len(gate.outputs), numbers[i], i) for i, gate in enumerate(gates)):
        gate = gates[place]
        for output in sorted(gate.outputs, key=lambda output: (makers[output], rank[output])):
            if output not in chosen and not _depends(gate.operands(output), output, chosen, budget):
                chosen[output] = gate
                break
    return chosen


def _depends(operands: Sequence[int], output: int, chosen: Mapping[int, Gate], budget: list[int]) -> bool:
    """Whether a variable is among what operands are defined by; True where that takes too long to tell."""
    seen = set(operands)
    stack = list(operands)
    while stack:
        variable = stack.pop()
        gate = chosen.get(variable)
        if gate is None:
            continue
        budget[0] -= len(gate.variables)
        if budget[0] < 0:
            return True
        for other in gate.variables:
            if other == output:
                return True
            if other not in seen:
                seen.add(other)
                stack.append(other)
    return output in seen


def _in_order(chosen: Mapping[int, Gate]) -> dict[int, Gate]:
    """The definitions, each behind those that it reads."""
    done: dict[int, Gate] = {}
    for first in chosen:
        stack = [(first, iter(chosen[first].operands(first)))]
        while stack and first not in done:
            variable, rest = stack[-1]
            needed = next((other for other in rest if other in chosen and other not in done), None)
            if needed is None:
                done[variable] = chosen[variable]
                stack.pop()
            else:
                stack.append((needed, iter(chosen[needed].operands(needed))))
    return done
