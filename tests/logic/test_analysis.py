"""What `inspect` says: facts of known functions, and whole texts at their fixed width."""

from __future__ import annotations

import itertools
import json
from textwrap import dedent

import numpy as np
import pytest

from revsynth.logic.analysis import Analysis, analyse, describe
from revsynth.logic.analysis_text import WIDTH
from revsynth.spec.pla import parse_pla
from revsynth.spec.toml_reader import parse_toml
from revsynth.spec.understand import understand


def inspect(text: str) -> Analysis:
    return analyse(understand(parse_toml(dedent(text), source="spec.toml")))


def permutation(values: list[int | str]) -> Analysis:
    bits = (len(values) - 1).bit_length()
    return inspect(f"inputs = {{ v = {bits} }}\n[permutation]\nvalues = {json.dumps(values)}\n")


def aes_s_box() -> list[int]:
    """The S-box of FIPS 197, section 5.1.1, from its definition: inversion in GF(2^8), then an affine map."""

    def multiply(a: int, b: int) -> int:
        product = 0
        while b:
            product ^= a if b & 1 else 0
            a = a << 1 ^ (0x11B if a & 0x80 else 0)
            b >>= 1
        return product

    inverse = [0] + [next(b for b in range(256) if multiply(a, b) == 1) for a in range(1, 256)]
    return [
        sum(
            (
                (
                    b >> i
                    ^ b >> (i + 4) % 8
                    ^ b >> (i + 5) % 8
                    ^ b >> (i + 6) % 8
                    ^ b >> (i + 7) % 8
                    ^ 0x63 >> i
                )
                & 1
            )
            << i
            for i in range(8)
        )
        for b in inverse
    ]


PRESENT = [0xC, 0x5, 0x6, 0xB, 0x9, 0x0, 0xA, 0xD, 0x3, 0xE, 0xF, 0x8, 0x4, 0x7, 0x1, 0x2]
"""The S-box of PRESENT, ISO/IEC 29192-2."""


def test_a_predicate_with_a_domain() -> None:
    found = inspect(
        """
        title = "Lamp oil"
        [inputs]
        a = 4
        k = { bits = 3, signed = true }
        [domain]
        where = "a != 0"
        [predicate]
        where = "a * k == 12"
        """
    )
    assert (found.domain, found.marked, found.free) == (120, 3, 0)
    assert found.marked_first == ({"a": 12, "k": 1}, {"a": 6, "k": 2}, {"a": 4, "k": 3})
    assert found.facts[0].ones == 3
    assert found.facts[0].zeros == 117
    assert not found.facts[0].balanced
    assert found.embedding is not None
    assert (found.embedding.multiplicity, found.embedding.lines) == (117, 8)
    assert found.bijective is None


def test_the_marked_inputs_listed_are_the_first() -> None:
    found = inspect('inputs = { v = 9 }\n[predicate]\nwhere = "v % 7 == 3"\n')
    assert [shown["v"] for shown in found.marked_first] == list(range(3, 59, 7))
    assert found.marked == len(range(3, 512, 7))
    assert "and 65 more" in describe(found)


def test_an_adder() -> None:
    """n-bit sums have degree n + 1 in the carry; the low bit is linear (common practice)."""
    found = inspect('inputs = { a = 4, b = 4 }\n[outputs]\ntotal = { value = "a + b" }\n')
    assert [fact.degree for fact in found.facts] == [1, 2, 3, 4, 5]
    assert found.facts[0].affine == "a[0] ^ b[0]"
    assert found.facts[1].linear == ("a[1]", "b[1]")
    assert found.facts[1].without_effect == ("a[2]", "a[3]", "b[2]", "b[3]")
    assert found.symmetric == (("a[0]", "b[0]"), ("a[1]", "b[1]"), ("a[2]", "b[2]"), ("a[3]", "b[3]"))
    assert found.embedding is not None
    assert (found.embedding.multiplicity, found.embedding.garbage, found.embedding.lines) == (16, 4, 9)
    assert found.bijective is False


def test_lines_that_are_an_upper_bound_are_called_one() -> None:
    """252 rows whose five don't-cares differ: too many ways for the fewest lines to be worked out."""
    free = list(itertools.combinations(range(12), 5))[:252]
    rows = [
        "".join(str(x >> bit & 1) for bit in range(8))
        + " "
        + "".join("-" if b in five else "0" for b in range(12))
        for x, five in enumerate(free)
    ]
    spec = parse_pla("\n".join([".i 8", ".o 12", ".type fdr", *rows]))
    found = analyse(understand(spec))
    assert found.embedding is not None
    assert (found.embedding.lines, found.embedding.exact) == (20, False)
    assert "at most 20: the larger of" in describe(found)


def test_free_values_make_a_degree_smaller() -> None:
    """Parity, known at the even weights only, can be chosen constant; the text says that it is a choice."""
    table = "".join("-" if x.bit_count() % 2 else "1" for x in range(16))
    found = inspect(f'inputs = {{ v = 4 }}\n[predicate]\ntable = "{table}"\n')
    fact = found.facts[0]
    assert (fact.degree, fact.affine, fact.free) == (0, "1", 8)
    assert found.without_effect == ("v[0]", "v[1]", "v[2]", "v[3]")
    assert "can be chosen so: 1" in describe(found)
    assert "v[0]...v[3] (with free values chosen so)" in describe(found)


def test_negated_symmetry_is_written_with_a_tilde() -> None:
    found = inspect('inputs = { v = 3 }\n[predicate]\nwhere = "v == 5"\n')
    assert found.symmetric == (("v[0]", "~v[1]", "v[2]"),)


def test_one_bit_words_and_arrays_have_plain_names() -> None:
    found = inspect(
        'inputs = { up = 1, cell = { bits = 2, count = 2 } }\n[predicate]\nformula = "up ^ cell[1][0]"\n'
    )
    assert found.facts[0].affine == "up ^ cell[1][0]"
    assert found.facts[0].balanced
    assert found.bound is None


def test_the_present_s_box() -> None:
    """Published: four ANDs are needed; the bound by independent outputs says so."""
    found = permutation(PRESENT)
    assert found.bijective is True
    assert found.degree == 3
    assert found.bound is not None
    assert found.bound.ands == 4
    assert found.permutation is not None
    assert found.permutation.cycles is not None
    assert found.permutation.cycles.fixed_points == 0


def test_the_aes_s_box() -> None:
    """FIPS 197: S(0x53) = 0xed. Degree 7, no fixed point, cycles of 2, 27, 59, 81, 87 (from memory)."""
    table = aes_s_box()
    assert table[0x53] == 0xED
    found = permutation(table)
    assert {fact.degree for fact in found.facts} == {7}
    assert all(fact.balanced for fact in found.facts)
    assert found.permutation is not None
    assert found.permutation.cycles is not None
    assert found.permutation.cycles.cycles == ((2, 1), (27, 1), (59, 1), (81, 1), (87, 1))
    assert found.permutation.cycles.odd
    assert "needs one work qubit" in describe(found)
    assert found.bound is not None
    assert found.bound.ands == 8


def test_the_hidden_weighted_bit_function() -> None:
    """x rotated left by its own weight (Golubitsky, Maslov, IEEE Trans. Computers 61(9), 2012)."""
    rotated = [(x << x.bit_count() | x >> 4 - x.bit_count()) & 15 for x in range(16)]
    assert rotated == [0, 2, 4, 12, 8, 5, 9, 11, 1, 6, 10, 13, 3, 14, 7, 15]
    found = permutation(rotated)
    assert found.bijective is True
    assert found.permutation is not None
    assert found.permutation.cycles is not None
    assert found.permutation.cycles.fixed_points == 4  # 0, 5, 10, 15
    assert found.permutation.cycles.cycles == ((1, 4), (2, 2), (4, 2))


def test_a_permutation_with_free_images() -> None:
    one_left = permutation([1, 0, 3, "-"])
    assert one_left.permutation is not None
    assert one_left.permutation.cycles is not None
    assert one_left.permutation.cycles.cycles == ((2, 2),)
    two_left = permutation([1, 0, "-", "-"])
    assert two_left.permutation is not None
    assert two_left.permutation.cycles is None
    assert two_left.permutation.free == 2
    assert "can be chosen even" in describe(two_left)


def test_outputs_may_be_a_bijection_too() -> None:
    found = inspect('inputs = { v = 4 }\n[outputs]\ncode = { value = "v ^ v >> 1", bits = 4 }\n')
    assert found.bijective is True
    assert found.affine
    assert found.embedding is not None
    assert found.embedding.lines == 4
    assert found.bound is None


def test_the_degree_bound_gives_its_reason() -> None:
    """Schnorr 1988: degree d needs d - 1 ANDs; a product of n bits has degree n and needs exactly n - 1."""
    found = inspect('inputs = { v = 6 }\n[predicate]\nwhere = "v == 63"\n')
    assert found.bound is not None
    assert found.bound.ands == 5
    assert "Schnorr 1988" in found.bound.why


def test_json_is_plain_and_complete() -> None:
    found = permutation(PRESENT).to_json()
    assert json.loads(json.dumps(found)) == found
    assert found["permutation"]["odd"] is False
    assert found["lower_bound"]["ands"] == 4
    assert len(found["bits"]) == 4
    assert found["inputs"] == {"v": {"bits": 4}}


def test_an_upper_bound_of_the_degree_is_called_one() -> None:
    found = inspect(
        'inputs = { v = 12 }\n[domain]\nwhere = "v % 3 != 1"\n[predicate]\nwhere = "v % 5 == 2"\n'
    )
    assert not found.facts[0].degree_exact
    assert f"at most {found.degree}, with free values chosen well" in describe(found)
    assert found.bound is not None
    assert found.bound.ands == 1


def test_the_whole_text_of_a_predicate() -> None:
    found = inspect(
        """
        title = "Lamp oil"
        [inputs]
        a = 3
        cell = { bits = 1, count = 2 }
        [predicate]
        where = "a == 5 and cell[0] != cell[1]"
        """
    )
    assert describe(found) == dedent(
        """\
        Lamp oil: a predicate on 5 input bits

        Inputs
          a                   3 bits
          cell                2 words of 1 bit

        Domain
          every input         32

        Marked
          inputs              2 of 32 (6.2 %) of the domain
                              a = 5, cell = [1, 0]
                              a = 5, cell = [0, 1]

        Function
          balance             2 ones, 30 zeros
          degree              4
          affine              no
          linear inputs       none
          inputs of no effect none
          symmetric inputs    {a[0], ~a[1], a[2]}; {cell[0], cell[1]}
          ANDs, at least      3: marked has degree 4: at least degree - 1 (Schnorr 1988)

        Embedding in place
          same output value   for 30 inputs at most
          lines               6: the larger of 5 input bits and 1 output bit + 5 garbage (ceil(log2 30))
                              1 line starts in a constant"""
    )


@pytest.mark.parametrize("seed", range(3))
def test_the_text_keeps_its_width(seed: int) -> None:
    values = np.random.Generator(np.random.PCG64(seed)).permutation(256).tolist()
    assert max(map(len, describe(permutation(values)).splitlines())) <= WIDTH


@pytest.mark.slow
def test_twenty_four_inputs_are_analysed() -> None:
    found = inspect('inputs = { a = 12, b = 12 }\n[predicate]\nwhere = "a + b == 4095"\n')
    assert found.marked == 4096
    assert found.degree == 12
    assert len(found.symmetric) == 12
