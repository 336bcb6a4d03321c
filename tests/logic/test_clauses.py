"""Clauses simplified, ordered, factored, and searched for gates: against assignments one by one."""

from __future__ import annotations

from itertools import product
from random import Random

import pytest
from hypothesis import given
from hypothesis import strategies as st

from revsynth.logic.clauses.definitions import choose_definitions
from revsynth.logic.clauses.factoring import factor
from revsynth.logic.clauses.gates import Gate, cofactors, find_gates, window_table
from revsynth.logic.clauses.orders import LONGEST, annealed_orders, greedy_orders, one_sided
from revsynth.logic.clauses.simplify import (
    Clause,
    conjunction,
    normal,
    propagate,
    strengthened,
    without_subsumed,
)
from revsynth.logic.network import Network, evaluate
from revsynth.logic.network_builder import NetworkBuilder
from tests.planted import planted

Clauses = list[tuple[int, ...]]
VARIABLES = 6


@st.composite
def clause_lists(draw: st.DrawFn, most: int = 14) -> Clauses:
    """Clauses over six variables: any length from 0, repeated literals and complements too."""
    entry = st.integers(1, VARIABLES).flatmap(lambda v: st.sampled_from((v, -v)))
    usual = st.lists(entry, min_size=1, max_size=4)
    return [
        tuple(draw(st.one_of(usual, usual, usual, st.lists(entry, max_size=8))))
        for _ in range(draw(st.integers(0, most)))
    ]


def holds(clauses: Clauses | list[Clause], sums: Clauses | tuple[()], bits: tuple[int, ...]) -> bool:
    """By definition; variable i is bits[i - 1]."""
    true = {place + 1 if bit else -place - 1 for place, bit in enumerate(bits)}
    return all(true & set(clause) for clause in clauses) and all(
        sum(entry in true for entry in entries) % 2 for entries in sums
    )


def models(
    clauses: Clauses | list[Clause], sums: Clauses | tuple[()] = (), variables: int = VARIABLES
) -> list[bool]:
    return [holds(clauses, sums, bits) for bits in product((0, 1), repeat=variables)]


@given(clause_lists())
def test_simplifying_keeps_the_models(clauses: Clauses) -> None:
    wanted = models(clauses)
    short = normal(clauses)
    assert models(short) == wanted
    assert models(without_subsumed(short)) == wanted
    step = propagate(short)
    assert (
        models([*step.clauses, *((unit,) for unit in step.units)]) if step.consistent else [False] * 64
    ) == wanted
    if step.consistent:
        assert models([*strengthened(step.clauses), *((unit,) for unit in step.units)]) == wanted
        assert all(len(clause) > 1 for clause in step.clauses)


@given(clause_lists(8), clause_lists(3))
def test_a_conjunction_keeps_the_models(clauses: Clauses, sums: Clauses) -> None:
    found = conjunction(clauses, sums)
    wanted = models(clauses, sums)
    if not found.consistent:
        assert not any(wanted)
        return
    again: Clauses = [(unit,) for unit in found.units] + found.clauses
    linear = [
        (*variables, *(() if value else (variables[0], -variables[0]))) for variables, value in found.sums
    ]
    assert models(again, linear) == wanted
    touched = {abs(unit) for unit in found.units}
    assert len(touched) == len(found.units)
    assert not any(touched & set(map(abs, clause)) for clause in found.clauses)
    assert not any(touched & set(variables) or len(variables) < 2 for variables, _ in found.sums)


def test_units_go_a_long_way_in_linear_time() -> None:
    chain = [(-i, i + 1) for i in range(1, 50_000)]
    assert propagate([*chain, (1,)]).units == tuple(range(1, 50_001))
    assert not propagate([*chain, (1,), (-50_000,)]).consistent


def network(orders: Clauses | list[Clause], variables: int = VARIABLES) -> Network:
    builder = NetworkBuilder(variables)
    return builder.build([factor(builder, orders, {v: 2 * v for v in range(1, variables + 1)})])


@given(clause_lists(20), st.integers(0, 1000))
def test_every_order_gives_the_same_function(clauses: Clauses, seed: int) -> None:
    short = normal(clauses)
    wanted = models(short)
    greedy = greedy_orders(short)
    rng = Random(seed)
    any_order = [tuple(rng.sample(clause, len(clause))) for clause in short]
    for orders in (
        greedy,
        annealed_orders(greedy, 200, seed),
        any_order,
        annealed_orders(any_order, 50, seed),
    ):
        assert [tuple(sorted(order)) for order in orders] == short
        found = network(orders)
        assert [bool(evaluate(found, bits)[0]) for bits in product((0, 1), repeat=VARIABLES)] == wanted


@given(st.integers(0, 10_000))
def test_the_count_of_one_sided_choices_is_the_count_of_ands(seed: int) -> None:
    clauses, _ = planted(9, 18, seed)
    found = conjunction(clauses, ())
    if found.units:
        return
    orders = greedy_orders(found.clauses)
    bound = len(orders) - 1 + one_sided(orders)
    assert network(orders, 9).ands <= bound
    better = annealed_orders(orders, 2000, 0)
    assert one_sided(better) <= one_sided(orders)
    assert network(better, 9).ands <= len(orders) - 1 + one_sided(better)


def test_both_polarities_share_one_and() -> None:
    # v ? a : b as two clauses: one AND; with the third, redundant clause of a selection still one function
    assert network([(1, 2), (-1, 3)], 3).ands == 1
    # the tree by hand: 1 with both signs, below it 2 one-sided and 3 one-sided
    orders = [(1, 2, 4), (1, 2, 5), (-1, 3, 4)]
    assert one_sided(orders) == 2
    assert network(orders, 5).ands == 4


def test_long_clauses_do_not_recurse() -> None:
    long = tuple(range(1, 1501))
    other = (*range(1, 1500), -1501)
    found = network([long, other], 1501)
    assert found.ands == 1500
    assert annealed_orders([long, other], 10, 0) == [long, other]
    assert len(long) > LONGEST


@given(st.integers(1, 5), st.data())
def test_cofactors(variables: int, data: st.DataObject) -> None:
    table = data.draw(st.integers(0, (1 << (1 << variables)) - 1))
    place = data.draw(st.integers(0, variables - 1))
    zero, one = cofactors(table, place, variables)
    for point in range(1 << variables):
        rest = point & ((1 << place) - 1) | point >> (place + 1) << place
        assert (one if point >> place & 1 else zero) >> rest & 1 == table >> point & 1


def test_window_tables_are_the_clauses() -> None:
    clauses = [(2, -7), (-2, 9, 7)]
    table = window_table((2, 7, 9), clauses)
    for point in range(8):
        bits = [0] * 9
        bits[1], bits[6], bits[8] = (point >> i & 1 for i in range(3))
        assert table >> point & 1 == holds(clauses, [], tuple(bits))


GATES: dict[str, tuple[Clauses, set[int]]] = {
    "AND": ([(3, -1, -2), (-3, 1), (-3, 2)], {3}),
    "OR of four": ([(-5, 1, 2, 3, 4), (5, -1), (5, -2), (5, -3), (5, -4)], {5}),
    "XOR": ([(-1, -2, -3), (-1, 2, 3), (1, -2, 3), (1, 2, -3)], {1, 2, 3}),
    "selection": ([(-4, -1, 2), (4, -1, -2), (-4, 1, 3), (4, 1, -3)], {4}),
    "majority": ([(-4, 1, 2), (-4, 1, 3), (-4, 2, 3), (4, -1, -2), (4, -1, -3), (4, -2, -3)], {4}),
    "equality": ([(1, -2), (-1, 2)], {1, 2}),
    "AND of eight": ([(9, *range(-8, 0)), *((-9, v) for v in range(1, 9))], {9}),
    "NAND of seven": ([(-8, *range(-7, 0)), *((8, v) for v in range(1, 8))], {8}),
}  # fmt: skip


@pytest.mark.parametrize("name", GATES)
def test_gates_that_are_found(name: str) -> None:
    clauses, outputs = GATES[name]
    found = conjunction(clauses, ())
    gates = find_gates(found)
    assert {output for gate in gates for output in gate.outputs} == outputs
    variables = {abs(entry) for clause in clauses for entry in clause}
    definitions = choose_definitions(gates, variables)
    assert len(definitions.chosen) == 1
    assert len(definitions.free) == len(variables) - 1


def test_sums_define_and_no_circle_is_made() -> None:
    found = conjunction([], [(1, 2, 3), (3, 4, -5), (1, 2, 4, 5)])
    gates = find_gates(found)
    definitions = choose_definitions(gates, range(1, 6))
    seen = set(definitions.free)
    for variable, gate in definitions.chosen.items():
        assert seen.issuperset(gate.operands(variable))
        seen.add(variable)
    assert seen == set(range(1, 6))
    assert len(definitions.chosen) >= 2


def test_definitions_in_a_circle_leave_one_free() -> None:
    # three ANDs that read each other: 1 = 2 AND 4, 2 = 3 AND 4, 3 = 1 AND 4
    gates = [
        Gate("product", tuple(sorted((x, y, 4))), (x,), literals=(y, 4)) for x, y in ((1, 2), (2, 3), (3, 1))
    ]
    assert choose_definitions(gates, range(1, 5)).free in ((1, 4), (2, 4), (3, 4))
