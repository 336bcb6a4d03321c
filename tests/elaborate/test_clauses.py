"""Networks of CNFs, over all variables and over the free ones: brute force, and recorded figures."""

from __future__ import annotations

from itertools import product
from random import Random

import pytest
from hypothesis import given
from hypothesis import strategies as st

from revsynth.elaborate.clauses import clause_networks, free_inputs
from revsynth.logic.network import evaluate
from revsynth.logic.network_simulation import tabulate
from revsynth.logic.truth_table import count_ones, unpack
from revsynth.spec.clause_columns import clauses_column
from revsynth.spec.model import Clauses
from tests.planted import planted


def gate_clauses(rng: Random, variables: int, size: int) -> Clauses:
    """Clauses of random gates and some of no gate, with a clause lost here and there."""
    clauses: list[tuple[int, ...]] = []
    sums: list[tuple[int, ...]] = []
    for _ in range(size):
        a, b, c, d = (rng.choice((v, -v)) for v in rng.sample(range(1, variables + 1), 4))
        kind = rng.randrange(8)
        if kind == 0:
            clauses += [(d, -a, -b), (-d, a), (-d, b)]
        elif kind == 1:
            clauses += [(d, a, b), (d, -a, -b), (-d, a, -b), (-d, -a, b)]
        elif kind == 2:
            clauses += [(-d, -a, b), (d, -a, -b), (-d, a, c), (d, a, -c)]
        elif kind == 3:
            clauses += [(-d, a, b), (-d, a, c), (-d, b, c), (d, -a, -b), (d, -a, -c), (d, -b, -c)]
        elif kind == 4:
            clauses += [(a, -b), (-a, b)]
        elif kind == 5:
            sums.append((a, b, c)[: rng.randint(1, 3)])
        elif kind == 6:
            wide = [v for v in range(1, variables + 1) if v != abs(a)]
            clauses += [(a, *wide), *((-a, -v) for v in wide)]
        else:
            clauses.append((a, b, c)[: rng.randint(1, 3)])
    kept = [clause for clause in clauses if rng.random() > 0.05]
    return Clauses(variables, tuple(kept), tuple(sums))


@given(st.integers(4, 8), st.integers(0, 6), st.integers(0, 2**32))
def test_every_form_is_the_cnf(variables: int, size: int, seed: int) -> None:
    clauses = gate_clauses(Random(seed), variables, size)
    wanted = clauses_column(clauses).tolist()
    networks = clause_networks(clauses, "low", seed)
    assert {"flat", "factored"} <= {name for name, _ in networks} <= {"flat", "factored", "windows"}
    for name, network in networks:
        assert network.inputs == variables
        assert tabulate(network)[0].tolist() == wanted, name
    assert [network.ands for _, network in networks] == sorted(network.ands for _, network in networks)


@given(st.integers(4, 8), st.integers(0, 6), st.integers(0, 2**32))
def test_free_inputs_have_as_many_models_and_the_same_ones(variables: int, size: int, seed: int) -> None:
    clauses = gate_clauses(Random(seed), variables, size)
    found = free_inputs(clauses, "low", seed)
    network = found.function.values
    assert network.inputs == len(found.variables) >= 1
    assert sorted(set(found.variables)) == list(found.variables)
    column = unpack(clauses_column(clauses), variables)
    models = [x for x in range(1 << variables) if column[x]]
    projected = sorted(
        sum((x >> (variable - 1) & 1) << place for place, variable in enumerate(found.variables))
        for x in models
    )
    marked = [x for x in range(1 << network.inputs) if unpack(tabulate(network)[0], network.inputs)[x]]
    assert projected == marked  # no two models agree on the free variables
    for x in models:
        bits = [x >> (variable - 1) & 1 for variable in found.variables]
        assert evaluate(found.extension, bits) == [x >> place & 1 for place in range(variables)]
    for x in range(1 << network.inputs):
        bits = [x >> place & 1 for place in range(network.inputs)]
        extended = sum(bit << place for place, bit in enumerate(evaluate(found.extension, bits)))
        assert column[extended] == evaluate(network, bits)[0]
        assert [extended >> (variable - 1) & 1 for variable in found.variables] == bits


@given(st.integers(4, 9), st.integers(0, 7), st.integers(0, 2**32))
def test_linear_systems_are_solved(variables: int, size: int, seed: int) -> None:
    rng = Random(seed)
    sums = [tuple(rng.sample(range(1, variables + 1), rng.randint(2, 4))) for _ in range(size)]
    coded = [place for place in range(size) if rng.random() < 0.5]
    clauses = tuple(
        tuple(v if sign else -v for v, sign in zip(sums[place], signs, strict=True))
        for place in coded
        for signs in product((0, 1), repeat=len(sums[place]))
        if (len(sums[place]) - sum(signs)) % 2 == place % 2
    )
    cnf = Clauses(variables, clauses, tuple(entry for place, entry in enumerate(sums) if place not in coded))
    found = free_inputs(cnf, "low", seed)
    models = count_ones(clauses_column(cnf))
    assert count_ones(tabulate(found.function.values)[0]) == models
    if models:
        assert len(found.variables) == max(1, models.bit_length() - 1)
        assert found.function.values.ands == 0


def test_unused_variables_are_free() -> None:
    found = free_inputs(Clauses(6, ((1, -2), (-1, 2), (4,))))
    assert len(found.variables) == 4
    assert {3, 5, 6} < set(found.variables)


def test_where_all_is_fixed_one_variable_stays() -> None:
    for clauses, ones in ((((1,), (-2,)), 1), (((1,), (-1,)), 0)):
        found = free_inputs(Clauses(2, clauses))
        assert found.function.inputs >= 1
        assert count_ones(tabulate(found.function.values)[0]) == ones


def test_the_same_seed_gives_the_same_networks() -> None:
    clauses, _ = planted(12, 50, 3)
    one, two = (clause_networks(Clauses(12, clauses), "low", 7) for _ in range(2))
    assert one == two


@pytest.mark.quality
def test_planted_clauses_need_few_ands() -> None:
    # recorded; 133 ANDs at 20 variables and 332 at 50 were the figures to reach
    for variables, size, seed, most in (
        (20, 91, 1, 105),
        (20, 91, 2, 102),
        (20, 91, 3, 104),
        (50, 200, 1, 300),
        (50, 200, 2, 284),
    ):
        clauses, model = planted(variables, size, seed)
        networks = dict(clause_networks(Clauses(variables, clauses)))
        assert evaluate(networks["factored"], model) == [1]
        assert networks["factored"].ands <= most, (
            variables,
            seed,
            networks["factored"].ands,
            networks["flat"].ands,
        )


def adder_miter(bits: int) -> tuple[Clauses, int]:
    """The clauses of two ripple adders on the same words, one with majorities, and of equal sums (Tseitin).

    Returns them and how many variables are truly free: two words.
    """
    count = 0
    clauses: list[tuple[int, ...]] = []

    def fresh() -> int:
        nonlocal count
        count += 1
        return count

    def xor(a: int, b: int) -> int:
        d = fresh()
        clauses.extend([(-d, a, b), (-d, -a, -b), (d, -a, b), (d, a, -b)])
        return d

    def and_(a: int, b: int) -> int:
        d = fresh()
        clauses.extend([(d, -a, -b), (-d, a), (-d, b)])
        return d

    def majority(a: int, b: int, c: int) -> int:
        d = fresh()
        clauses.extend([(-d, a, b), (-d, a, c), (-d, b, c), (d, -a, -b), (d, -a, -c), (d, -b, -c)])
        return d

    left, right = [fresh() for _ in range(bits)], [fresh() for _ in range(bits)]
    one, other = and_(left[0], right[0]), and_(right[0], left[0])
    for a, b in zip(left[1:], right[1:], strict=True):
        half = xor(a, b)
        first, second = xor(half, one), xor(xor(b, other), a)
        clauses.extend([(first, -second), (-first, second)])
        one = -and_(-and_(a, b), -and_(half, one))
        other = majority(a, b, other)
    return Clauses(count, tuple(clauses)), 2 * bits


def test_a_circuit_is_found_again_in_its_clauses() -> None:
    clauses, inputs = adder_miter(8)
    found = free_inputs(clauses)
    assert len(found.variables) == inputs
    assert count_ones(tabulate(found.function.values)[0]) == 1 << inputs
    assert clauses.variables > 60


def test_brute_force_by_hand() -> None:
    # variable 1 is input 0: changes under bit reversal
    network = clause_networks(Clauses(3, ((1,), (-3, 2))))[0][1]
    assert [evaluate(network, bits)[0] for bits in product((0, 1), repeat=3)] == [0, 0, 0, 0, 1, 0, 1, 1]
