"""Numbers of ANDs reached from networks as a beginner writes them; they may fall, never rise."""

from __future__ import annotations

from collections.abc import Callable
from random import Random

import pytest

from revsynth.logic.and_reduction import fewest_ands
from revsynth.logic.equivalence import prove_equal
from revsynth.logic.network import Network
from tests import naive_networks as naive


def random_table(inputs: int, seed: int) -> Network:
    random = Random(seed)
    return naive.table(inputs, [[random.getrandbits(1) for _ in range(1 << inputs)]])


def aes() -> Network:
    box = naive.aes_sbox()
    return naive.table(8, [[value >> bit & 1 for value in box] for bit in range(8)])


# Full adder 1 AND, a < b n, equality n - 1 ANDs: common practice. Weight of n bits n - ones(n), so majority
# of 63 is 57: Boyar, Peralta, TCS 396, 2008. Schoolbook product at most 2 n^2 - n: counted by hand.
FIGURES: list[tuple[str, Callable[[], Network], int]] = [
    ("64-bit adder with carry", lambda: naive.adder(64), 64),
    ("128-bit adder with carry", lambda: naive.adder(128), 128),
    ("a < b on 64 bits", lambda: naive.comparison(64), 64),
    ("a < b and a == b on 32 bits", lambda: naive.comparison_and_equality(32), 63),
    ("16 x 16 product", lambda: naive.product(16), 496),
    ("majority of 63", lambda: naive.majority(63), 57),
    ("weight of 31", lambda: naive.weight(31), 26),
    ("16-bit odd-even sorting network", lambda: naive.sorting_network(16), 63),
    ("16-bit rotator", lambda: naive.rotator(16, 4), 49),
    ("AES S-box from its table (FIPS 197)", aes, 80),
    ("random function of 8 inputs", lambda: random_table(8, 1), 26),
    ("another random function of 8 inputs", lambda: random_table(8, 2), 26),
    ("random function of 5 inputs", lambda: random_table(5, 1), 4),
    ("(a + b) % 2**32 == K", lambda: naive.sum_equals(32, 2863311530), 62),
    ("a * b == 58483", lambda: naive.product_equals(8, 58483), 135),
]


@pytest.mark.quality
@pytest.mark.parametrize(("make", "ands"), [row[1:] for row in FIGURES], ids=[row[0] for row in FIGURES])
def test_ands(make: Callable[[], Network], ands: int) -> None:
    network = make()
    after = fewest_ands(network)
    assert after.ands <= ands, f"{after.ands} ANDs, {ands} recorded"
    assert prove_equal(after, network).equal
