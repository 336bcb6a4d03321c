"""Transformation-based synthesis and embedding against published tables, standards and facts of the trade.

Line 0 is the least significant bit of every list.
"""

from __future__ import annotations

import itertools

import numpy as np
import pytest

from revsynth.cascade.price import cascade_t
from revsynth.cascade.simulate import permutation
from revsynth.synthesis.interface import Block, Task
from revsynth.synthesis.rows import transform_many
from revsynth.synthesis.transform import TRANSFORM
from tests.slow_simulator import run_cascade
from tests.synthesis.checks import check_block, from_table

PRESENT = [int(digit, 16) for digit in "C56B90AD3EF84712"]
"""ISO/IEC 29192-2."""
FULL_ADDER_BLOCK = [0, 7, 6, 9, 4, 11, 10, 13, 8, 15, 14, 1, 12, 3, 2, 5]
HIDDEN_WEIGHTED_BIT = [0, 2, 4, 12, 8, 5, 9, 11, 1, 6, 10, 13, 3, 14, 7, 15]

OPTIMUM_OF_FOUR_LINES = [
    ("hidden weighted bit", HIDDEN_WEIGHTED_BIT, 11),
    ("x + 1", [(x + 1) % 16 for x in range(16)], 4),
    ("3 x", [3 * x % 16 for x in range(16)], 6),
    ("5 x", [5 * x % 16 for x in range(16)], 3),
    ("a permutation of size 12", [15, 1, 12, 3, 5, 6, 8, 7, 0, 10, 13, 9, 2, 4, 14, 11], 12),
    ("a permutation of size 10", [1, 2, 4, 8, 0, 3, 5, 6, 7, 9, 10, 11, 12, 13, 14, 15], 10),
    ("full adder block", FULL_ADDER_BLOCK, 4),
    ("PRESENT S-box", PRESENT, 11),
]
"""Fewest gates with positive controls: Golubitsky, Maslov, IEEE Trans. Computers 61(9), 2012."""


def aes_s_box() -> list[int]:
    """FIPS 197, section 5.1.1: inversion in GF(2^8) modulo x^8 + x^4 + x^3 + x + 1, then an affine map."""

    def product(a: int, b: int) -> int:
        total = 0
        for bit in range(8):
            if (b >> bit) & 1:
                total ^= a << bit
        for bit in reversed(range(8, 15)):
            if (total >> bit) & 1:
                total ^= 0x11B << (bit - 8)
        return total

    box = []
    for x in range(256):
        inverse = next((y for y in range(256) if product(x, y) == 1), 0)
        rotations = (inverse * 0x101 >> (8 - turn) & 0xFF for turn in range(5))
        value = 0x63
        for rotation in rotations:
            value ^= rotation
        box.append(value)
    return box


def inverse_of(table: list[int]) -> list[int]:
    return np.argsort(table).tolist()


def in_place(table: list[int], **options: object) -> list[Block]:
    lines = len(table).bit_length() - 1
    task = Task(from_table(lines, lines, table), "inplace", **options)  # type: ignore[arg-type]
    blocks = TRANSFORM.synthesise(task)
    for block in blocks:
        check_block(task, block)
    return blocks


@pytest.fixture(scope="module")
def fewest_gates_on_three_lines() -> dict[tuple[int, ...], int]:
    """Breadth-first search over NOT, CNOT and Toffoli with positive controls."""
    gates = [
        tuple(x ^ (((x & care) == care) << target) for x in range(8))
        for target in range(3)
        for care in range(8)
        if not (care >> target) & 1
    ]
    assert len(gates) == 12
    size = {tuple(range(8)): 0}
    layer = [tuple(range(8))]
    while layer:
        following = []
        for table in layer:
            for gate in gates:
                after = tuple(gate[y] for y in table)
                if after not in size:
                    size[after] = size[table] + 1
                    following.append(after)
        layer = following
    return size


def test_no_three_line_cascade_beats_the_optimum(
    fewest_gates_on_three_lines: dict[tuple[int, ...], int],
) -> None:
    """Shende, Prasad, Markov, Hayes, IEEE TCAD 22(6), 2003: the sizes of all 40,320 functions."""
    size = fewest_gates_on_three_lines
    counts = np.bincount(list(size.values()))
    assert counts.tolist() == [1, 12, 102, 625, 2780, 8921, 17049, 10253, 577]
    tables = list(itertools.permutations(range(8)))
    optimum = np.array([size[table] for table in tables])
    found = transform_many(np.array(tables)).sizes()
    assert np.all(found >= optimum)
    assert np.count_nonzero(found == optimum) > 40_320 // 4


@pytest.mark.parametrize(("name", "table", "optimum"), OPTIMUM_OF_FOUR_LINES)
def test_known_functions_of_four_lines(name: str, table: list[int], optimum: int) -> None:
    blocks = in_place(table, controls="positive", aim="gates", effort="high")
    found = min(len(block.cascade) for block in blocks)
    assert optimum <= found <= 2 * optimum, f"{name}: {found} gates, optimum {optimum}"


def test_the_hidden_weighted_bit_table_is_the_rotation_by_weight() -> None:
    rotated = []
    for x in range(16):
        turn = x.bit_count() % 4
        rotated.append(((x << turn) | (x >> (4 - turn))) & 15)
    assert rotated == HIDDEN_WEIGHTED_BIT


@pytest.mark.parametrize("table", [PRESENT, inverse_of(PRESENT)], ids=["PRESENT", "PRESENT inverse"])
@pytest.mark.parametrize("controls", ["mixed", "positive"])
def test_present(table: list[int], controls: str) -> None:
    assert sorted(table) == list(range(16))
    blocks = in_place(table, controls=controls, uncompute="measured")
    assert cascade_t(blocks[0].cascade, "measured") <= 57


def test_aes() -> None:
    """The S-box of FIPS 197 forwards, and its cascade reversed is the inverse S-box."""
    table = aes_s_box()
    assert table[:4] == [0x63, 0x7C, 0x77, 0x7B]
    assert table[0x53] == 0xED  # the worked example of FIPS 197, section 5.1.1
    for block in in_place(table, effort="low"):
        backwards = block.cascade.inverse()
        assert [run_cascade(backwards, y)[0] for y in table] == list(range(256))


@pytest.mark.parametrize("lines", range(1, 9))
def test_an_increment_takes_one_gate_a_line(lines: int) -> None:
    """The carry chain, highest line first (common practice)."""
    size = 1 << lines
    lists = transform_many(np.array([[(x + 1) % size for x in range(size)]]), directions="one")
    assert [len(gate.controls) for gate in lists.cascade(0)] == list(reversed(range(lines)))


def test_not_cnot_and_toffoli_are_found_as_themselves() -> None:
    """NOT, CNOT and Toffoli give NOT, XOR and AND (common practice)."""
    for target in range(3):
        for care in range(8):
            if not (care >> target) & 1:
                table = [x ^ (((x & care) == care) << target) for x in range(8)]
                (gate,) = transform_many(np.array([table])).cascade(0)
                assert gate.target == target
                assert gate.controls == tuple(2 * line for line in range(3) if (care >> line) & 1)


@pytest.mark.parametrize(
    ("name", "inputs", "outputs", "rule", "lines", "gates", "t"),
    [
        ("full adder", 3, 2, int.bit_count, 4, 5, 4),
        ("weight of 4 bits", 4, 3, int.bit_count, 6, 8, 16),
        ("weight of 5 bits", 5, 3, int.bit_count, 7, 12, 20),
        ("negation of 4 bits", 4, 4, lambda x: -x % 16, 4, 5, 12),
        ("2 x 2 product", 4, 4, lambda x: (x & 3) * (x >> 2), 7, 12, 28),
        ("multiple of 5 below 16", 4, 1, lambda x: int(x % 5 == 0), 5, 3, 4),
        ("multiple of 5 below 32", 5, 1, lambda x: int(x % 5 == 0), 6, 6, 24),
        ("majority of 5", 5, 1, lambda x: int(x.bit_count() > 2), 5, 8, 20),
        ("majority of 7", 7, 1, lambda x: int(x.bit_count() > 3), 7, 27, 176),
    ],
)
@pytest.mark.quality
def test_embedded_functions(
    name: str, inputs: int, outputs: int, rule: object, lines: int, gates: int, t: int
) -> None:
    """Recorded figures of normal effort, 4 T an AND; they may fall, never rise."""
    function = from_table(inputs, outputs, [rule(x) for x in range(1 << inputs)])  # type: ignore[operator]
    task = Task(function, "embedded", uncompute="measured")
    block = TRANSFORM.synthesise(task)[0]
    check_block(task, block)
    found = (block.inputs, len(block.cascade), cascade_t(block.cascade, "measured"))
    assert found[0] == lines
    assert found[1] <= gates, f"{name}: {found}"
    assert found[2] <= t, f"{name}: {found}"


@pytest.mark.quality
def test_a_search_over_relabellings_saves_a_quarter_of_the_t_gates_of_four_lines() -> None:
    """Lines renamed and inverted: 40 random permutations against the single run of `transform_many`."""
    tables = [np.random.default_rng(seed).permutation(16) for seed in range(40)]
    single = transform_many(np.array(tables)).prices("measured").mean()
    searched = []
    for table in tables:
        task = Task(from_table(4, 4, table), "inplace", uncompute="measured")
        block = TRANSFORM.synthesise(task)[0]
        assert np.array_equal(permutation(block.cascade), table)
        searched.append(cascade_t(block.cascade, "measured"))
    assert np.mean(searched) <= 0.75 * single
