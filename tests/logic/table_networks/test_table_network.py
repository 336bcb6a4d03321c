"""Networks from bare tables: right on every input, and AND counts that may fall but never rise."""

from __future__ import annotations

import random
from collections.abc import Sequence

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from revsynth.logic.affine_classes import and_count
from revsynth.logic.function import Function
from revsynth.logic.network import Network, evaluate
from revsynth.logic.tables import table_network
from revsynth.logic.tables.small_chains import small_chain
from revsynth.logic.truth_table import pack, pack_values
from revsynth.options import Effort


def function_of(
    values: Sequence[int], inputs: int, outputs: int, care: Sequence[int] | None = None
) -> Function:
    """values[x]: f(x); care[x]: which of its bits are fixed."""
    fixed = np.array(care if care is not None else [(1 << outputs) - 1] * len(values))
    columns = pack_values(np.array(values) & fixed, outputs)
    return Function(
        inputs, outputs, columns, pack_values(fixed, outputs), pack((fixed != 0).astype(np.uint8))
    )


def values_of(network: Network) -> list[int]:
    n = network.inputs
    rows = (evaluate(network, [x >> i & 1 for i in range(n)]) for x in range(1 << n))
    return [sum(bit << j for j, bit in enumerate(row)) for row in rows]


def shuffled(inputs: int, seed: int) -> list[int]:
    values = list(range(1 << inputs))
    random.Random(seed).shuffle(values)
    return values


def best(function: Function, effort: Effort = "normal", seed: int = 0) -> int:
    return table_network(function, effort=effort, seed=seed)[0][1].ands


@st.composite
def functions(draw: st.DrawFn) -> tuple[list[int], list[int], int, int]:
    inputs, outputs = draw(st.integers(1, 6)), draw(st.integers(1, 4))
    entry = st.lists(st.integers(0, (1 << outputs) - 1), min_size=1 << inputs, max_size=1 << inputs)
    care = draw(st.one_of(entry, st.just([(1 << outputs) - 1] * (1 << inputs))))
    return draw(entry), care, inputs, outputs


@given(functions())
def test_every_network_agrees_with_its_table_wherever_it_is_fixed(case) -> None:  # type: ignore[no-untyped-def]
    values, care, inputs, outputs = case
    for _, network in table_network(function_of(values, inputs, outputs, care), effort="low"):
        assert [v & c for v, c in zip(values_of(network), care, strict=True)] == [
            v & c for v, c in zip(values, care, strict=True)
        ]


@pytest.mark.parametrize("inputs", [6, 7, 8])
def test_compiled_searches_give_right_networks(inputs: int) -> None:
    rng = random.Random(inputs)
    one = [rng.randrange(2) for _ in range(1 << inputs)]
    for _, network in table_network(function_of(one, inputs, 1)):
        assert values_of(network) == one
    many = shuffled(inputs, 3)
    for _, network in table_network(function_of(many, inputs, inputs)):
        assert values_of(network) == many


def test_the_same_call_gives_the_same_networks() -> None:
    function = function_of(shuffled(6, 8), 6, 6)
    for effort in ("low", "normal"):
        first, again = (table_network(function, effort=effort, seed=4) for _ in range(2))
        assert first == again


def test_inputs_that_do_not_matter_are_left_out() -> None:
    values = [(x >> 1 & x >> 6 ^ x >> 4) & 1 for x in range(256)]
    name, network = table_network(function_of(values, 8, 1))[0]
    assert (name, network.ands, network.xors) == ("affine class", 1, 1)
    assert values_of(network) == values


def test_constant_and_affine_outputs_need_no_and() -> None:
    values = [(x.bit_count() & 1) | 2 | (~x >> 3 & 1) << 2 for x in range(64)]
    assert best(function_of(values, 6, 3)) == 0
    assert best(function_of([1] * 8, 3, 1)) == 0


def test_free_values_are_chosen_for_few_ands() -> None:
    """A weight-3 code word is marked, those of weight 1 are not; the rest is free: x0 x1 will do."""
    care = [int(x in (0b0111, 0b0001, 0b0010, 0b0100)) for x in range(16)]
    values = [int(x == 0b0111) for x in range(16)]
    function = function_of(values, 4, 1, care)
    assert best(function) <= 1
    digits = [x if x < 10 else 0 for x in range(16)]
    both = [d * d % 16 for d in digits]
    fixed = [15 if x < 10 else 0 for x in range(16)]
    assert best(function_of(both, 4, 4, fixed)) <= best(function_of(both, 4, 4))


def test_published_layers() -> None:
    """PRESENT (ISO/IEC 29192-2), chi of Keccak (FIPS 202) and the S-box of Ascon (NIST SP 800-232, its
    formulas): 4, 5 and 5 ANDs are the known counts."""
    present = [0xC, 5, 6, 0xB, 9, 0, 0xA, 0xD, 3, 0xE, 0xF, 8, 4, 7, 1, 2]
    assert best(function_of(present, 4, 4), "low") == 4

    def chi_bit(x: list[int], i: int) -> int:
        return x[i] ^ (x[(i + 1) % 5] ^ 1) & x[(i + 2) % 5]

    def chi(number: int) -> int:
        x = [number >> i & 1 for i in range(5)]
        return sum(chi_bit(x, i) << i for i in range(5))

    def ascon(number: int) -> int:
        x = [number >> i & 1 for i in range(5)]
        x[0], x[4], x[2] = x[0] ^ x[4], x[4] ^ x[3], x[2] ^ x[1]
        y = [chi_bit(x, i) for i in range(5)]
        y[1], y[0], y[3], y[2] = y[1] ^ y[0], y[0] ^ y[4], y[3] ^ y[2], y[2] ^ 1
        return sum(bit << i for i, bit in enumerate(y))

    assert best(function_of([chi(x) for x in range(32)], 5, 5), "low") == 5
    assert best(function_of([ascon(x) for x in range(32)], 5, 5), "low") == 5


def test_more_independent_outputs_than_products_are_refused_at_once() -> None:
    """A decoder of five inputs has 26 outputs beyond sums of inputs; their 2^26 sums are never listed."""
    decoder = [1 << x for x in range(32)]
    assert small_chain(decoder, 5, 300) is None
    assert best(function_of([1 << x for x in range(32)], 5, 32), "low") == 26


def test_single_outputs_up_to_five_inputs_are_exact() -> None:
    rng = random.Random(11)
    for inputs in (3, 4, 5):
        values = [rng.randrange(2) for _ in range(1 << inputs)]
        expected = and_count(inputs, sum(v << x for x, v in enumerate(values)))
        assert best(function_of(values, inputs, 1), "low") == expected


def test_a_product_of_small_words_is_found_by_its_structure() -> None:
    values = [(x & 3) * (x >> 2) for x in range(16)]
    assert best(function_of(values, 4, 4), "low") <= 6  # schoolbook, 2 n^2 - n (common practice)


@pytest.mark.quality
@pytest.mark.parametrize(
    ("inputs", "effort", "most"),
    [(6, "low", 7), (7, "low", 14), (8, "low", 23), (6, "normal", 6), (7, "normal", 12), (8, "normal", 20)],
)
def test_random_functions(inputs: int, effort: Effort, most: int) -> None:
    for seed in range(3):
        rng = random.Random(100 * inputs + seed)
        assert best(function_of([rng.randrange(2) for _ in range(1 << inputs)], inputs, 1), effort) <= most


@pytest.mark.quality
@pytest.mark.parametrize(("inputs", "most"), [(5, 13), (6, 21), (7, 36), (8, 61)])
def test_random_permutations(inputs: int, most: int) -> None:
    for seed in range(2):
        assert best(function_of(shuffled(inputs, seed), inputs, inputs)) <= most


def test_too_many_inputs() -> None:
    function = function_of([0] * 2048, 11, 1)
    with pytest.raises(ValueError, match="up to 10 inputs, not 11"):
        table_network(function)


@pytest.mark.slow
@pytest.mark.quality
@pytest.mark.parametrize(("inputs", "most"), [(6, 6), (7, 10), (8, 18)])
def test_random_functions_at_high_effort(inputs: int, most: int) -> None:
    rng = random.Random(100 * inputs)
    values = [rng.randrange(2) for _ in range(1 << inputs)]
    assert best(function_of(values, inputs, 1), "high") <= most


@pytest.mark.slow
@pytest.mark.quality
@pytest.mark.parametrize(("inputs", "most"), [(6, 18), (7, 35), (8, 60)])
def test_random_permutations_at_high_effort(inputs: int, most: int) -> None:
    assert best(function_of(shuffled(inputs, 0), inputs, inputs), "high") <= most
