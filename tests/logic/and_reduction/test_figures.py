"""Numbers of ANDs reached from networks as a beginner writes them; they may fall, never rise."""

from __future__ import annotations

import hashlib
from collections.abc import Callable, Sequence
from random import Random

import numpy as np
import pytest

from revsynth.logic.and_reduction import fewest_ands
from revsynth.logic.equivalence import prove_equal
from revsynth.logic.network import Network, evaluate
from revsynth.logic.network_simulation import simulate
from tests import naive_networks as naive
from tests import sha256_network


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
    ("(a + b) % 2**32 == K", lambda: naive.sum_equals(32, 2863311530), 61),
    ("a * b == 58483", lambda: naive.product_equals(8, 58483), 82),
]


class ConstantsFirst(sha256_network.NaiveOperations):
    """Naive sums that begin with the round constant."""

    def sum(self, words: Sequence[list[int]], constant: int = 0) -> list[int]:
        first = [sha256_network.constant_word(constant)] if constant else []
        return super().sum([*first, *words])


@pytest.mark.slow
@pytest.mark.quality
def test_sha256_from_its_naive_form() -> None:
    # 22,385 is the best published count with the fixed initial value (figure recalled, not looked up).
    network = sha256_network._block(ConstantsFirst(naive.NaiveBuilder(512)), 64)
    assert network.ands > 230_000
    after = fewest_ands(network)
    assert after.ands <= 22_296
    assert after.xors <= 88_400
    digest = hashlib.sha256(b"lamp").digest()
    block = b"lamp\x80" + bytes(51) + (32).to_bytes(8, "big")
    words = [int.from_bytes(block[4 * i : 4 * i + 4], "big") for i in range(16)]
    bits = evaluate(after, [word >> i & 1 for word in words for i in range(32)])
    values = [sum(bits[32 * k + i] << i for i in range(32)) for k in range(8)]
    assert b"".join(value.to_bytes(4, "big") for value in values) == digest


@pytest.mark.quality
def test_two_rounds_of_sha256() -> None:
    network = sha256_network._block(ConstantsFirst(naive.NaiveBuilder(512)), 2)
    after = fewest_ands(network)
    assert after.ands <= 700
    samples = np.random.default_rng(1).integers(0, 1 << 63, size=(512, 64), dtype=np.uint64)
    assert np.array_equal(simulate(after, samples), simulate(network, samples))


@pytest.mark.slow
@pytest.mark.quality
def test_sha256_by_columns_is_not_made_worse() -> None:
    network = sha256_network.build()
    assert fewest_ands(network).ands <= min(network.ands, 21_960)


@pytest.mark.quality
@pytest.mark.parametrize(("make", "ands"), [row[1:] for row in FIGURES], ids=[row[0] for row in FIGURES])
def test_ands(make: Callable[[], Network], ands: int) -> None:
    network = make()
    after = fewest_ands(network)
    assert after.ands <= ands, f"{after.ands} ANDs, {ands} recorded"
    assert prove_equal(after, network).equal
