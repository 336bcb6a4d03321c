"""Power maps recognised from their tables, and the inverse in GF(2^8) with 32 ANDs."""

from __future__ import annotations

import random

import numpy as np
import pytest

from revsynth.logic.function import Function
from revsynth.logic.tables import table_network
from revsynth.logic.tables.binary_fields import field, polynomial_product, tower_product
from revsynth.logic.tables.power_maps import PowerMap, exponents, linear_image, recognise
from revsynth.logic.tables.tower_inversion import inversion_chain, power_map_chain
from revsynth.logic.truth_table import ALL_ONES, pack_values


def standard_s_box() -> list[int]:
    """From its definition in FIPS 197, section 5.1.1: inverse modulo x^8 + x^4 + x^3 + x + 1, then affine."""
    box = []
    for x in range(256):
        y = next((y for y in range(256) if polynomial_product(x, y, 0x11B, 8) == 1), 0)
        turned = [y >> k | (y << (8 - k) & 0xFF) for k in range(8)]
        box.append(y ^ turned[4] ^ turned[5] ^ turned[6] ^ turned[7] ^ 0x63)
    return box


def inverse_of(table: list[int]) -> list[int]:
    result = [0] * len(table)
    for x, y in enumerate(table):
        result[y] = x
    return result


def random_copy(bits: int, exponent: int, seed: int) -> PowerMap:
    rng = random.Random(seed)

    def matrix() -> tuple[int, ...]:
        while True:
            columns = tuple(rng.randrange(1, 1 << bits) for _ in range(bits))
            if len({linear_image(columns, x) for x in range(1 << bits)}) == 1 << bits:
                return columns

    return PowerMap(bits, exponent, matrix(), rng.randrange(1 << bits), matrix(), rng.randrange(1 << bits))


def test_the_standard_s_box_is_the_published_one() -> None:
    box = standard_s_box()
    assert box[:4] == [0x63, 0x7C, 0x77, 0x7B]  # FIPS 197, figure 7
    assert box[0x53] == 0xED  # the example of FIPS 197, section 5.1.1


@pytest.mark.parametrize("table", [standard_s_box(), inverse_of(standard_s_box())])
def test_the_s_box_and_its_inverse_have_32_ands(table: list[int]) -> None:
    """32 is the best known: Boyar, Peralta, SEC 2012."""
    found = recognise(table, 8)
    assert found is not None
    assert found.exponent == 127
    chain = power_map_chain(found)
    assert chain is not None
    assert len(chain.products) == 32
    assert chain.tables() == [sum((table[x] >> j & 1) << x for x in range(256)) for j in range(8)]
    columns = pack_values(np.array(table), 8)
    every = np.full_like(columns, ALL_ONES)
    name, network = table_network(Function(8, 8, columns, every, every[0]), effort="low")[0]
    assert name == "power map x^127"
    assert network.ands == 32
    assert network.xors < 200


@pytest.mark.parametrize("seed", range(4))
def test_affine_copies_of_the_inverse(seed: int) -> None:
    table = random_copy(8, 127, seed).table()
    found = recognise(table, 8)
    assert found is not None
    assert found.table() == table
    chain = power_map_chain(found)
    assert chain is not None
    assert len(chain.products) == 32


@pytest.mark.parametrize(("bits", "exponent"), [(n, d) for n in (4, 5, 6) for d in exponents(n)])
def test_affine_copies_of_other_power_maps(bits: int, exponent: int) -> None:
    table = random_copy(bits, exponent, 10 * bits + exponent).table()
    found = recognise(table, bits)
    assert found is not None
    assert found.table() == table


def test_what_is_no_power_map_is_not_taken_for_one() -> None:
    box = standard_s_box()
    box[3], box[77] = box[77], box[3]
    assert recognise(box, 8) is None
    shuffled = list(range(64))
    random.Random(5).shuffle(shuffled)
    assert recognise(shuffled, 6) is None
    assert recognise([0] * 16, 4) is None
    assert recognise(list(range(256)), 8) is None


def test_fields_are_fields() -> None:
    for bits in range(2, 9):
        here = field(bits)
        assert sorted(here.exponentials) == list(range(1, 1 << bits))
        for x in (1, 2, 3, (1 << bits) - 1):
            assert here.times(x, here.power(x, (1 << bits) - 2)) == 1
            for y in (1, 2, 3):
                assert here.times(x, y ^ 1) == here.times(x, y) ^ x
    for x in (5, 77, 200):
        for y in (3, 91, 255):
            assert field(8).times(x, y) == tower_product(x, y)
    with pytest.raises(ValueError, match="2 to 8 bits are known, not of 9"):
        field(9)


def test_the_tower_inverts() -> None:
    chain = inversion_chain()
    assert len(chain.products) == 32
    tables = chain.tables()
    for x in range(1, 256):
        y = sum((table >> x & 1) << j for j, table in enumerate(tables))
        assert tower_product(x, y) == 1
