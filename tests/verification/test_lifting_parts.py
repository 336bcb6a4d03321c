"""The parts of lifting: parities and their proofs, graphs, leftover phases, the algebra of products."""

from __future__ import annotations

from collections.abc import Sequence
from itertools import combinations, product

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from revsynth.verification.lifting.graph import Graph
from revsynth.verification.lifting.kernels import compiled_fill, fill
from revsynth.verification.lifting.linear_proofs import GuessError
from revsynth.verification.lifting.local import Slope
from revsynth.verification.lifting.parities import FALSE, TRUE, Parities
from revsynth.verification.lifting.quadratic import rank, solve
from revsynth.verification.lifting.residue import counted, sign_of, simplified

ALL = np.uint64(0xFFFFFFFFFFFFFFFF)


def table_words(variables: int) -> np.ndarray:
    """Up to six variables in one word each, variable 0 alternating fastest."""
    return np.array(
        [sum(1 << case for case in range(64) if case >> v & 1) for v in range(variables)], dtype=np.uint64
    )[:, np.newaxis]


def tables(parities: Parities, variables: list[int], literals: list[int]) -> list[int]:
    """64 cases of each literal as an integer."""
    graph = Graph.below(parities, variables, literals)
    return [int(row[0]) for row in graph.simulate(table_words(len(variables)))]


@st.composite
def built(draw: st.DrawFn) -> tuple[Parities, list[int], list[int], list[int]]:
    """Parities of five variables, variables, literals, and the tables that they should have."""
    parities = Parities(draw(st.integers(0, 3)))
    variables = [parities.free() for _ in range(5)]
    literals = [FALSE, TRUE, *variables]
    wanted = [0, int(ALL), *(int(row[0]) for row in table_words(5))]
    for _ in range(draw(st.integers(1, 25))):
        a, b = draw(st.integers(0, len(literals) - 1)), draw(st.integers(0, len(literals) - 1))
        flip = draw(st.integers(0, 1))
        operand, table = literals[b] ^ flip, wanted[b] ^ (int(ALL) if flip else 0)
        if draw(st.booleans()):
            literals.append(parities.and_(literals[a], operand))
            wanted.append(wanted[a] & table)
        else:
            literals.append(parities.xor(literals[a], operand))
            wanted.append(wanted[a] ^ table)
    return parities, variables, literals, wanted


@given(built())
def test_literals_have_the_tables_of_what_they_were_made_from(case: tuple) -> None:
    parities, variables, literals, wanted = case
    parities.proofs.finish()
    assert tables(parities, variables, literals) == wanted


@given(built())
def test_xors_of_the_same_atoms_are_one_node(case: tuple) -> None:
    parities, _, literals, _ = case
    for a, b, c in combinations(literals[-6:], 3):
        assert parities.xor(parities.xor(a, b), c) == parities.xor(a, parities.xor(c, b))
    assert parities.parity([*literals, *literals]) == FALSE


def test_the_two_ways_of_a_product_meet() -> None:
    parities = Parities()
    a, b, v = (parities.free() for _ in range(3))
    both = parities.and_(a, b)
    assert parities.and_(a, parities.xor(a, b)) == parities.xor(a, both)
    assert parities.and_(a ^ 1, b ^ 1) ^ 1 == parities.parity([a, b, both])
    assert parities.and_(both, a) == both
    assert parities.and_(both, parities.xor(a, b)) == FALSE
    assert parities.and_(a, parities.xor(v, both)) == parities.xor(parities.and_(a, v), both)


def test_a_false_claim_is_noticed_at_once_or_at_the_end() -> None:
    parities = Parities()
    variables = [parities.free() >> 1 for _ in range(1500)]
    with pytest.raises(GuessError):
        parities.proofs.claim_zero(variables[:2])
    one = two = FALSE
    for variable in variables:
        one = parities.xor(one, 2 * variable)
    for variable in reversed(variables):
        two = parities.xor(two, 2 * variable)
    assert one == two
    assert parities.proofs.waiting
    parities.proofs.finish()
    assert not parities.proofs.waiting
    parities.proofs.waiting.append((one >> 1, variables[0]))
    with pytest.raises(GuessError):
        parities.proofs.finish()


def test_a_wrong_signature_is_noticed() -> None:
    parities = Parities()
    a, b, c = (parities.free() for _ in range(3))
    parities._node_of[parities._signature[a >> 1] ^ parities._signature[b >> 1]] = c >> 1
    with pytest.raises(GuessError):
        parities.xor(a, b)


@given(built(), st.data())
def test_phases_that_are_shown_to_be_signs_are(case: tuple, data: st.DataObject) -> None:
    parities, variables, literals, _ = case
    phases = {
        node: data.draw(st.integers(1, 7))
        for node in sorted(
            {literal >> 1 for literal in data.draw(st.lists(st.sampled_from(literals), max_size=6))}
        )
        if node
    }
    sums = sum_of(parities, variables, phases)
    signs = sign_of(parities, phases)
    if signs is not None:
        assert sums == sum_of(parities, variables, {}, signs)
    low, middle, high = counted(parities, phases)
    counts = [tables(parities, variables, [bit])[0] for bit in (low, middle, high)]
    assert sums == [sum((count >> c & 1) << bit for bit, count in enumerate(counts)) for c in range(64)]
    signs, left = simplified(parities, phases)
    assert sums == sum_of(parities, variables, left, signs)


def sum_of(
    parities: Parities, variables: list[int], phases: dict[int, int], signs: Sequence[int] = ()
) -> list[int]:
    """Eighths of a turn modulo 8, case by case."""
    nodes = tables(parities, variables, [2 * node for node in phases])
    halves = tables(parities, variables, list(signs))
    return [
        sum(c * (table >> case & 1) for c, table in zip(phases.values(), nodes, strict=True))
        + 4 * sum(table >> case & 1 for table in halves)
        & 7
        for case in range(64)
    ]


def test_seven_t_on_three_parities_are_a_sign() -> None:
    parities = Parities()
    a, b, c = (parities.free() for _ in range(3))
    phases = {}
    for size, eighths in ((1, 1), (2, 7), (3, 1)):
        for some in combinations((a, b, c), size):
            phases[parities.parity(some) >> 1] = eighths
    signs = sign_of(parities, phases)
    assert signs is not None
    assert parities.parity(signs) == parities.all_of([a, b, c])
    assert sign_of(parities, {a >> 1: 1}) is None


@given(built(), st.data())
def test_slopes_are_what_they_say(case: tuple, data: st.DataObject) -> None:
    """c (y ^ s) = c s + (c - 2 c s) y: the coefficient of y is the constant + 4 Q, the rest is c s."""
    parities, variables, literals, _ = case
    phases = {
        literal >> 1: data.draw(st.integers(1, 7))
        for literal in data.draw(st.lists(st.sampled_from(literals), min_size=1, max_size=7))
    }
    before = data.draw(st.sampled_from(literals))
    slope = Slope(parities, phases, before)
    if slope.quotient is None:
        return
    sums = sum_of(parities, variables, phases)
    quotient = tables(parities, variables, [slope.quotient])[0]
    total = sum(phases.values())
    for number in range(64):
        assert (total - 2 * sums[number] - slope.constant - 4 * (quotient >> number & 1)) % 8 == 0
    outer = data.draw(st.sampled_from([FALSE, *literals[-3:]])) ^ data.draw(st.integers(0, 1))
    rest = slope.rest(outer)
    if rest is not None:
        rows = tables(parities, variables, [literal for literal, _ in rest[0]])
        outers, befores = tables(parities, variables, [outer, before])
        for number in range(64):
            left = sum(c * (row >> number & 1) for (_, c), row in zip(rest[0], rows, strict=True))
            if rest[1]:
                left += 4 * (outers >> number & (befores ^ quotient) >> number & 1)
            assert (left - sums[number]) % 8 == 0


def test_relative_phases_leave_twice_their_product() -> None:
    assert solve(((0, 1), (1, 7), (3, 1), (2, 7)), 2) is not None
    assert solve(((0, 1),), 0).constant == 1
    assert solve(((1, 1),), 1) is None
    assert rank((0b110, 0b101, 0b011)) == 2


@given(built(), st.integers(1, 70))
def test_graphs_simulate_alike_in_both_ways(case: tuple, words: int) -> None:
    parities, variables, literals, _ = case
    graph = Graph.below(parities, variables, literals)
    generator = np.random.default_rng(words)
    inputs = generator.integers(0, 1 << 64, size=(len(variables), words), dtype=np.uint64)
    inputs[0, 0] = ALL
    values = np.zeros((graph.nodes, words), dtype=np.uint64)
    values[1 : 1 + graph.inputs] = inputs
    other = values.copy()
    compiled_fill()(graph.is_xor, graph.left, graph.right, graph.inputs + 1, values)
    fill(graph.is_xor, graph.left, graph.right, graph.inputs + 1, other)
    assert (values == other).all()
    flips = np.where((graph.outputs & 1).astype(bool), ALL, np.uint64(0))
    assert (graph.simulate(inputs) == values[graph.outputs >> 1] ^ flips[:, np.newaxis]).all()


@given(built())
def test_clauses_hold_for_what_the_graph_computes_and_for_nothing_else(case: tuple) -> None:
    parities, variables, literals, _ = case
    graph = Graph.below(parities, variables, literals[-3:])
    nodes = graph.simulate_nodes(table_words(5), np.arange(graph.nodes))[:, 0]
    for number in (0, 11, 31):
        true = [int(row) >> number & 1 for row in nodes]
        assert all(any(true[abs(v) - 1] == (v > 0) for v in clause) for clause in graph.clauses())
        for gate in range(1 + graph.inputs, graph.nodes):
            wrong = [*true]
            wrong[gate] ^= 1
            assert not all(any(wrong[abs(v) - 1] == (v > 0) for v in clause) for clause in graph.clauses())
        for place in range(len(graph.outputs)):
            variable = graph.variable(place)
            assert (
                true[abs(variable) - 1] ^ (variable < 0)
                == int(graph.simulate(table_words(5))[place, 0]) >> number & 1
            )


def test_graphs_refuse_wrong_inputs() -> None:
    parities = Parities()
    a, b = parities.free(), parities.free()
    both = parities.and_(a, b)
    graph = Graph.below(parities, [a, b], [both ^ 1])
    assert graph.support() == [0, 1]
    assert (graph.nodes, len(graph), graph.ands) == (4, 1, 1)
    with pytest.raises(ValueError, match=r"uint64 of shape \(2, words\)"):
        graph.simulate(np.zeros((3, 1), dtype=np.uint64))
    with pytest.raises(ValueError, match="free variable that is no input"):
        Graph.below(parities, [a], [both])


def test_every_pair_of_polarities_has_its_product() -> None:
    parities = Parities()
    a, b = parities.free(), parities.free()
    for flip, other in product((0, 1), repeat=2):
        table = tables(parities, [a, b], [parities.and_(a ^ flip, b ^ other)])[0]
        assert table & 15 == sum(
            1 << case for case in range(4) if (case & 1) != flip and (case >> 1) != other
        )
