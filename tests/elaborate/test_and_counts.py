"""How many ANDs expressions take: the figures to reach, and closed forms that are common practice."""

from __future__ import annotations

import pytest

from revsynth.elaborate import elaborate
from revsynth.logic.network import Network
from revsynth.spec.model import Output, Outputs, Predicate, Spec, Word

pytestmark = pytest.mark.quality


def words(**bits: int) -> tuple[Word, ...]:
    return tuple(Word(name, width) for name, width in bits.items())


def predicate(where: str, **bits: int) -> Network:
    return elaborate(Spec(words(**bits), Predicate(where=where))).function.values


def output(value: str, width: int, **bits: int) -> Network:
    return elaborate(Spec(words(**bits), Outputs((Output("f", value, bits=width),)))).function.values


@pytest.mark.parametrize("bits", [1, 2, 7, 64, 128])
def test_one_and_a_bit_for_sums_differences_and_comparisons(bits: int) -> None:
    assert output("a + b", bits + 1, a=bits, b=bits).ands == bits
    assert output("a - b", bits + 1, a=bits, b=bits).ands == bits
    assert output(f"(a + b) % 2**{bits}", bits, a=bits, b=bits).ands == bits - 1
    assert output("b if a[0] else a", bits, a=bits, b=bits).ands == bits
    for sign in ("<", "<=", ">", ">="):
        assert predicate(f"a {sign} b", a=bits, b=bits).ands == bits
    assert predicate("a == b", a=bits, b=bits).ands == bits - 1
    assert predicate("a != b", a=bits, b=bits).ands == bits - 1


@pytest.mark.parametrize("constant", [1, 2, 40, 64, 77, 128, 200, 255])
def test_comparisons_with_constants_skip_trailing_zeros(constant: int) -> None:
    """n - 1 - trailing zeros ANDs for n bits."""
    zeros = (constant & -constant).bit_length() - 1
    assert predicate(f"a < {constant}", a=8).ands == 7 - zeros
    assert predicate(f"a >= {constant}", a=8).ands == 7 - zeros
    assert predicate(f"a > {constant - 1}", a=8).ands == 7 - zeros
    assert predicate(f"a == {constant}", a=8).ands == 7


@pytest.mark.parametrize("bits", [1, 2, 3, 5, 7, 8, 31, 63, 64])
def test_counting_ones_takes_bits_less_their_ones(bits: int) -> None:
    """n - ones(n) ANDs (J. Boyar, R. Peralta, Tight bounds for the multiplicative complexity, 2008)."""
    assert output("popcount(a)", 7, a=bits).ands == bits - bits.bit_count()
    assert output(f"sum(a[i] for i in range({bits}))", 7, a=bits).ands == bits - bits.bit_count()
    assert output("parity(a)", 1, a=bits).ands == 0


def test_figures() -> None:
    assert predicate("popcount(x) >= 32", x=63).ands == 57
    assert output("popcount(x)", 5, x=31).ands == 26
    assert predicate("a < b and a == b", a=32, b=32).ands <= 64
    assert output("a * b", 32, a=16, b=16).ands == 496
    assert output("a * a", 32, a=16).ands <= 239


def test_an_equality_assumes_its_lower_bits_in_every_carry() -> None:
    """62 ANDs and 63 XORs were the figure; the first carry is free."""
    network = predicate("(a + b) % 2**32 == 2863311530", a=32, b=32)
    assert (network.ands, network.xors) <= (61, 63)
    assert int(network.and_depth().max()) <= 6
    assert predicate("a * b == 58483", a=8, b=8).ands <= 126
    assert predicate("a + b == c + d", a=8, b=8, c=8, d=8).ands <= 23


def test_division() -> None:
    assert output("a // b", 16, a=16, b=16).ands <= 256
    assert output("a % b", 16, a=16, b=16).ands <= 287
    assert output("a // 10", 16, a=16).ands <= 41
    assert output("a % 10", 16, a=16).ands <= 19
    assert output("a % 1000", 16, a=32).ands <= 86
    assert output("a // 64 + a % 16", 16, a=16).ands <= 10


def test_tables_share_their_products() -> None:
    """Any function of 8 bits in 26 ANDs, 8 of them in 81; of 6 bits in 11; a shift of 16 bits in 64."""

    def listed(values: list[int]) -> str:
        return f"{values}[x]"

    assert output(listed([pow(i, 3, 257) % 2 for i in range(256)]), 1, x=8).ands <= 26
    assert output(listed([pow(i, 3, 257) % 256 for i in range(256)]), 8, x=8).ands <= 81
    assert output(listed([pow(i, 3, 67) % 2 for i in range(64)]), 1, x=6).ands <= 11
    assert output("x >> r", 16, x=16, r=4).ands <= 64


@pytest.mark.parametrize("join", ["|", "+", "^"])
def test_rotations_take_one_selection_a_bit_and_bit_of_the_count(join: str) -> None:
    """The selections of a half turn are shared by two bits each."""
    for text in (f"(x << r) {join} (x >> (16 - r))", f"(x << (16 - r)) {join} (x >> r)"):
        assert output(f"({text}) % 2**16", 16, x=16, r=4).ands == 56
        assert output(f"({text}) & 65535", 16, x=16, r=4).ands == 56
    assert output(f"((x << r) {join} (x >> (16 - r))) % 2**17", 17, x=16, r=4).ands > 64


def test_min_and_max_share_their_selections() -> None:
    assert output("max(a, b) * 256 + min(a, b)", 16, a=8, b=8).ands == 16
    assert output("max(a, b) * 2 + min(a, b)", 2, a=1, b=1).ands == 1


def test_sums_compared_again_are_added_up_once() -> None:
    """n for the sum, and n each for its comparisons."""
    assert predicate("a + b == 3 or a + b == 5 or a + b == 9", a=8, b=8).ands <= 8 + 3 * 8 + 2
    assert predicate("popcount(x) >= 5 and popcount(x) <= 9", x=31).ands <= 26 + 2 * 4 + 1
    assert predicate("any(a + b == i * i for i in range(1, 6))", a=8, b=8).ands <= 8 + 5 * 8 + 4
    assert predicate("3 < a + b < 100", a=8, b=8).ands <= 8 + 2 * 8 + 1
