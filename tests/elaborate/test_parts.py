"""Small parts of elaboration against their definitions."""

from __future__ import annotations

from itertools import product
from math import gcd

import pytest
from hypothesis import given
from hypothesis import strategies as st

from revsynth.elaborate import elaborate
from revsynth.elaborate.columns import Columns, signed_digits
from revsynth.elaborate.explain import OfCover
from revsynth.elaborate.look_up import look_up, normal_form
from revsynth.elaborate.modular_power import group_exponent
from revsynth.errors import SpecError
from revsynth.logic.network import evaluate
from revsynth.logic.network_builder import NetworkBuilder
from revsynth.spec.model import Cover, Predicate, Spec, Word


@given(st.integers(-(2**80), 2**80))
def test_signed_digits_make_up_the_number_with_few_of_them(number: int) -> None:
    digits = signed_digits(number)
    assert sum((-1 if negative else 1) << place for place, negative in digits) == number
    assert len(digits) <= abs(number).bit_count()
    assert len(digits) <= (abs(number).bit_length() + 2) // 2


@pytest.mark.parametrize("modulus", [1, 2, 4, 8, 9, 15, 16, 21, 24, 35, 49, 63, 97, 105, 128])
def test_the_exponent_of_a_group_is_the_least_that_makes_all_powers_1(modulus: int) -> None:
    units = [x for x in range(1, modulus + 1) if gcd(x, modulus) == 1]
    least = next(e for e in range(1, modulus + 1) if all(pow(x, e, modulus) == 1 % modulus for x in units))
    assert group_exponent(modulus) == least


def test_inverses_modulo_what_cannot_be_factored_are_refused() -> None:
    hard = (2**31 - 1) * (2**61 - 1)
    spec = Spec((Word("a", 40),), Predicate(where=f"pow(a, -1, {hard}) == 5"))
    with pytest.raises(SpecError, match="a modulus of 92 bits that has large factors is not built"):
        elaborate(spec)


@given(st.lists(st.tuples(st.integers(0, 4), st.integers(-9, 9)), max_size=8), st.integers(-40, 40))
def test_columns_add_up_and_know_where_they_are_0(terms: list[tuple[int, int]], constant: int) -> None:
    builder = NetworkBuilder(5)
    added, tested = Columns(builder, 6, constant), Columns(builder, 6, constant)
    for index, coefficient in terms:
        for columns in (added, tested):
            columns.add_multiple(builder.input(index), coefficient)
    zero = builder.all_of([tested.zero(place) for place in range(6)])
    network = builder.build([*added.bits(), zero])
    for bits in product((0, 1), repeat=5):
        total = (constant + sum(coefficient * bits[index] for index, coefficient in terms)) % 64
        *found, is_zero = evaluate(network, bits)
        assert sum(bit << place for place, bit in enumerate(found)) == total
        assert is_zero == (total == 0)


@given(st.integers(0, 7), st.data())
def test_looked_up_bits_are_those_of_the_tables(bits: int, data: st.DataObject) -> None:
    tables = data.draw(st.lists(st.integers(0, (1 << (1 << bits)) - 1), min_size=1, max_size=4))
    builder = NetworkBuilder(bits)
    network = builder.build(look_up(builder, [builder.input(place) for place in range(bits)], tables))
    for index in range(1 << bits):
        found = evaluate(network, [index >> place & 1 for place in range(bits)])
        assert found == [table >> index & 1 for table in tables]


def test_normal_form_of_a_majority() -> None:
    """ab + ac + bc: the products 011, 101 and 110."""
    assert normal_form(0b11101000, 3) == 1 << 0b011 | 1 << 0b101 | 1 << 0b110


def test_nothing_is_wrong_where_a_cover_has_no_conflict() -> None:
    cover = Cover(2, 1, "fr", (("1-", "1"), ("-1", "0")))
    wrong = OfCover(cover, "panel.pla")
    assert "output 0 is both 1 (row 1) and 0 (row 2)" in str(wrong(3))
    with pytest.raises(ValueError, match="nothing is wrong at v = 1"):
        wrong(1)
