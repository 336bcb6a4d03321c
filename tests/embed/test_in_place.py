"""Embedding in place: fewest lines, and line placement."""

from __future__ import annotations

import itertools

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from revsynth.embed.in_place import embed, fewest_lines, placements
from revsynth.embed.multiplicity import bounded_multiplicity, output_multiplicity
from revsynth.embed.out_of_place import embed_fresh, embed_xor
from revsynth.embed.target import complete
from revsynth.logic.function import Function
from revsynth.logic.truth_table import pack
from tests.synthesis.checks import from_table


def weight(bits: int) -> Function:
    """The number of ones of `bits` bits, on as many output bits as it needs."""
    return from_table(bits, bits.bit_length(), np.bitwise_count(np.arange(1 << bits)).astype(np.int64))


def table_of(inputs: int, outputs: int, rule: object) -> Function:
    return from_table(inputs, outputs, [rule(x) for x in range(1 << inputs)])  # type: ignore[operator]


@pytest.mark.parametrize(
    ("function", "lines", "why"),
    [
        (weight(3), 4, "full adder: sum and carry, 3 of 8 inputs share a value (Maslov, Dueck 2004)"),
        (weight(4), 6, "6 inputs of weight 2: 3 outputs and 3 garbage lines"),
        (weight(5), 7, "weight of 5 bits on 7 lines (common practice)"),
        (weight(6), 8, "20 inputs of weight 3: 3 + 5"),
        (table_of(2, 1, lambda x: int(x == 3)), 3, "AND needs a third line: Toffoli (common practice)"),
        (table_of(2, 1, lambda x: (x ^ (x >> 1)) & 1), 2, "XOR is balanced: no further line"),
        (table_of(3, 1, lambda x: int(x.bit_count() >= 2)), 3, "majority of 3 is balanced"),
        (table_of(4, 4, lambda x: (x & 3) * (x >> 2)), 7, "0 is a product of 2 x 2 bits 7 times: 4 + 3"),
        (table_of(4, 4, lambda x: (7 * x) % 16), 4, "a permutation"),
        (table_of(3, 2, lambda x: 0), 5, "a constant repeats 8 times: 2 + 3"),
        (table_of(1, 5, lambda x: 31 * x), 5, "more outputs than inputs"),
    ],
)
def test_fewest_lines(function: Function, lines: int, why: str) -> None:
    assert fewest_lines(function) == lines, why


def test_free_inputs_do_not_count() -> None:
    """Ten decimal digits to 7 segments: all values differ, so 7 lines do (BCD to 7-segment)."""
    segments = [0x3F, 0x06, 0x5B, 0x4F, 0x66, 0x6D, 0x7D, 0x07, 0x7F, 0x6F]
    assert fewest_lines(from_table(4, 7, segments + [None] * 6)) == 7
    assert fewest_lines(from_table(2, 1, [None] * 4)) == 2


@given(st.integers(1, 3), st.integers(1, 2), st.data())
def test_half_free_values_are_spread_best(inputs: int, outputs: int, data: st.DataObject) -> None:
    """Against trying all completions."""
    size, full = 1 << inputs, (1 << outputs) - 1
    values = data.draw(st.lists(st.integers(0, full), min_size=size, max_size=size))
    care = data.draw(st.lists(st.integers(0, full), min_size=size, max_size=size))
    choices = [
        [y for y in range(full + 1) if y & mask == value & mask]
        for value, mask in zip(values, care, strict=True)
        if mask
    ]
    best = min(
        (max(tuple(one.count(y) for y in range(full + 1))) for one in itertools.product(*choices)),
        default=1,
    )
    assert output_multiplicity(from_table(inputs, outputs, values, care=care)) == max(best, 1)


@pytest.mark.parametrize("outputs", [63, 64, 65, 100])
def test_outputs_wider_than_a_machine_word_are_told_apart(outputs: int) -> None:
    """Four inputs share a value or not, some of them partly or wholly free."""
    one, top = 1, 1 << (outputs - 1)
    full = (1 << outputs) - 1
    assert bounded_multiplicity(wide(outputs, [0, one, top, one], [full] * 4)) == (2, True)
    assert bounded_multiplicity(wide(outputs, [0, one, top, top + one], [full] * 4)) == (1, True)
    assert bounded_multiplicity(wide(outputs, [0, 0, 0, 0], [0, full, full, 0])) == (2, True)
    assert bounded_multiplicity(wide(outputs, [0, 0, 0, 0], [0, 0, 0, 0])) == (1, True)
    assert bounded_multiplicity(wide(outputs, [0, one, top, 0], [full, full, full, top])) == (1, True)
    assert bounded_multiplicity(wide(outputs, [0, one, one, 0], [full, full, full, full - one])) == (2, True)


def wide(outputs: int, values: list[int], cares: list[int]) -> Function:
    """A function of two inputs, whatever the width of its outputs."""
    columns = [
        [np.array([value >> bit & 1 for value in rows]) for bit in range(outputs)] for rows in (values, cares)
    ]
    packed = [np.stack([pack(column.astype(np.uint8)) for column in side]) for side in columns]
    return Function(2, outputs, packed[0] & packed[1], packed[1], pack(np.ones(4, dtype=np.uint8)))


def test_beyond_the_exact_spread_an_upper_bound_is_given() -> None:
    free = [sum(1 << bit for bit in five) for five in itertools.combinations(range(12), 5)]
    care = [0xFFF & ~mask for mask in free] + [0] * (1024 - len(free))
    assert bounded_multiplicity(from_table(10, 12, [0] * 1024, care=care)) == (len(free), False)
    care = care[:200] + [0xFFF] * 400 + [0] * 424
    function = from_table(10, 12, [0] * 200 + [7] * 400 + [0] * 424, care=care)
    assert bounded_multiplicity(function) == (400, True)
    assert output_multiplicity(from_table(4, 20, [0] * 16, care=[1] * 16)) == 1


@given(st.integers(1, 4), st.integers(1, 3), st.data())
def test_every_placement_gives_a_target_with_a_completion(
    inputs: int, outputs: int, data: st.DataObject
) -> None:
    size, full = 1 << inputs, (1 << outputs) - 1
    values = data.draw(st.lists(st.integers(0, full), min_size=size, max_size=size))
    care = data.draw(st.lists(st.integers(0, full), min_size=size, max_size=size))
    function = from_table(inputs, outputs, values, care=care)
    lines = fewest_lines(function)
    seen = []
    for before, after in placements(function, lines, 6, seed=1):
        seen.append((before, after))
        target = embed(function, lines, before, after)
        table = complete(target)
        assert table is not None
        for x in range(size):
            state = sum(((x >> bit) & 1) << line for bit, line in enumerate(before))
            word = sum(((int(table[state]) >> line) & 1) << bit for bit, line in enumerate(after))
            assert word & care[x] == values[x] & care[x]
    assert len(set(seen)) == len(seen)
    assert seen == list(placements(function, lines, 6, seed=1))


def test_no_embedding_exists_on_fewer_lines() -> None:
    """The bound is tight: with one line less no placement can be completed."""
    function = weight(3)
    target = embed(function, 4, (0, 1, 2), (0, 1))
    assert complete(target) is not None
    for after in itertools.permutations(range(3), 2):
        assert complete(embed(function, 3, (0, 1, 2), after)) is None


def test_placements_that_do_not_fit_are_refused() -> None:
    with pytest.raises(ValueError, match="before: 3 different lines below 4 wanted"):
        embed(weight(3), 4, (0, 1, 1), (0, 1))
    with pytest.raises(ValueError, match="after: 2 different lines below 4 wanted"):
        embed(weight(3), 4, (0, 1, 2), (0, 4))
    with pytest.raises(ValueError, match="21 lines are too many"):
        embed(weight(3), 21, (0, 1, 2), (0, 1))


@given(st.integers(1, 3), st.integers(1, 3), st.data())
def test_out_of_place_targets(inputs: int, outputs: int, data: st.DataObject) -> None:
    size, full = 1 << inputs, (1 << outputs) - 1
    values = data.draw(st.lists(st.integers(0, full), min_size=size, max_size=size))
    care = data.draw(st.lists(st.integers(0, full), min_size=size, max_size=size))
    function = from_table(inputs, outputs, values, care=care)
    xor, fresh = embed_xor(function), embed_fresh(function)
    assert xor.is_complete
    for x in range(size):
        for y in range(full + 1):
            assert xor.image[x | (y << inputs)] == x | ((y ^ (values[x] & care[x])) << inputs)
            fixed = (care[x] << inputs) | (size - 1) if y == 0 else 0
            assert fresh.fixed[x | (y << inputs)] == fixed
    assert fresh.accepts(xor.image)


def test_out_of_place_targets_too_wide_for_a_table_are_refused() -> None:
    function = from_table(2, 19, [0] * 4)
    for make in (embed_xor, embed_fresh):
        with pytest.raises(ValueError, match="21 lines are too many"):
            make(function)
