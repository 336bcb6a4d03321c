"""From spec to function: widths, domains, free values, permutations; and the second way to the values."""

from __future__ import annotations

from dataclasses import replace
from itertools import product

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from revsynth.errors import ExpressionError
from revsynth.logic.truth_table import first_inputs, pack, unpack, unpack_values
from revsynth.spec.expectation import Expectation, expected_value
from revsynth.spec.layout import decode
from revsynth.spec.model import Clauses, Cover, Output, Outputs, Permutation, Predicate, Spec, Word
from revsynth.spec.toml_reader import parse_toml
from revsynth.spec.understand import Understanding, understand


def rows(understanding: Understanding) -> list[tuple[int | None, ...]]:
    """The bits at each input as the tables say, None where free."""
    function = understanding.function
    values = np.stack([unpack(row, function.inputs) for row in function.values], axis=1)
    care = np.stack([unpack(row, function.inputs) for row in function.care], axis=1)
    return [
        tuple(int(bit) if fixed else None for bit, fixed in zip(*pair, strict=True))
        for pair in zip(values, care, strict=True)
    ]


def agree(spec: Spec) -> Understanding:
    """Understand a spec and compare every input with its second evaluation."""
    understanding = understand(spec)
    expectation = Expectation(understanding)
    assert [expectation(index) for index in range(1 << spec.input_bits)] == rows(understanding)
    assert list(expectation.at(range(1 << spec.input_bits))) == rows(understanding)
    domain = unpack(understanding.function.domain, spec.input_bits)
    assert [expectation.in_domain(index) for index in range(len(domain))] == domain.astype(bool).tolist()
    return understanding


def test_words_and_domain_by_plain_loops() -> None:
    spec = parse_toml(
        "[inputs]\na = 3\nk = { bits = 2, signed = true }\ncell = { bits = 1, count = 2 }\n"
        '[domain]\nwhere = "a != 0"\n[predicate]\nwhere = "a * k == cell[0] - 2 * cell[1]"\n'
    )
    found = rows(agree(spec))
    every = product((0, 1), (0, 1), (0, 1, -2, -1), range(8))
    for index, (c1, c0, k, a) in enumerate(every):
        assert found[index] == ((int(a * k == c0 - 2 * c1),) if a else (None,))


@pytest.mark.parametrize(
    ("keys", "bits", "signed"),
    [
        ("value = '0'", 1, False),
        ("value = 'a'", 3, False),
        ("value = 'a > 2'", 1, False),
        ("value = 'a + 1'", 4, False),
        ("value = 'a - 8', signed = true", 4, True),
        ("value = 'a - 9', signed = true", 5, True),
        ("value = 'a', signed = true", 4, True),
        ("value = '0', signed = true", 1, True),
        ("value = '-1', signed = true", 1, True),
        ("value = '-4 - a // 7 * 4', signed = true", 4, True),
        ("value = 'a - 4', bits = 2", 2, False),
        ("value = 'a ** 40', bits = 70", 70, False),
        ("value = 'a ** 40'", 113, False),
        ("value = '-a ** 40', signed = true", 114, True),
        ("value = '-a', bits = 70", 70, False),
        ("table = [0, 5, '-', 1, 0, 0, 0, 0]", 3, False),
        ("table = [0, -5, '-', 1, 0, 0, 0, 0], signed = true", 4, True),
        ("table = ['-', '-', '-', '-', '-', '-', '-', '-']", 1, False),
        ("table = [0, 0, 0, 0, 0, 0, 0, 36893488147419103232]", 66, False),
    ],
)
def test_just_wide_enough(keys: str, bits: int, signed: bool) -> None:
    understanding = agree(parse_toml(f"[inputs]\na = 3\n[outputs]\nt = {{ {keys} }}\n"))
    assert understanding.outputs == (Word("t", bits, signed),)


def test_widths_count_the_domain_only() -> None:
    text = '[inputs]\na = 3\n[domain]\nwhere = "2 < a < 6"\n[outputs]\nt = { value = "a - 3" }\n'
    understanding = agree(parse_toml(text))
    assert understanding.outputs == (Word("t", 2),)
    assert understanding.function.free == 0
    assert first_inputs(understanding.function.domain, 9) == [3, 4, 5]


def test_several_outputs_lie_side_by_side_the_first_lowest() -> None:
    text = "[inputs]\na = 2\nb = 2\n[outputs]\nt = { value = 'a + b' }\nd = { value = 'a - b', bits = 2 }\n"
    understanding = agree(parse_toml(text))
    values = unpack_values(understanding.function.values, 4)
    assert [w.bits for w in understanding.outputs] == [3, 2]
    assert values.tolist() == [(a + b) + 8 * ((a - b) % 4) for b in range(4) for a in range(4)]


def test_entries_of_tables_that_are_cut_give_a_warning() -> None:
    text = "[inputs]\na = 2\n[outputs]\nt = { table = [4, 1, 2, 7], bits = 2 }\n"
    understanding = agree(parse_toml(text, "x.toml"))
    assert understanding.warnings == (
        "x.toml: [outputs] t table: entry 0 is 4 (and 1 more): only the low 2 bits are kept",
    )


def test_comparisons_that_never_change_give_a_warning() -> None:
    understanding = understand(
        parse_toml('[inputs]\na = 3\n[predicate]\nwhere = "~a == 5 or a == 1"\n', "x.toml")
    )
    assert len(understanding.warnings) == 1
    assert understanding.warnings[0].startswith("x.toml: [predicate] where: ")
    assert "'~a == 5' is never true" in understanding.warnings[0]


def test_values_with_free_images_and_a_domain() -> None:
    understanding = agree(parse_toml('[permutation]\nvalues = [2, "-", 3, 0]\n'))
    assert understanding.outputs == (Word("v", 2),)
    assert rows(understanding) == [(0, 1), (None, None), (1, 1), (0, 0)]
    assert understanding.function.free == 1
    text = '[inputs]\na = 2\n[domain]\nwhere = "a < 3"\n[permutation]\nvalues = [2, 1, 3, 1]\n'
    assert rows(agree(parse_toml(text)))[3] == (None, None)


def test_a_map_keeps_the_words_it_does_not_name() -> None:
    text = (
        "[inputs]\na = 2\nk = { bits = 2, signed = true }\ncell = { bits = 1, count = 2 }\n"
        "[permutation]\nmap = { k = '-1 - k', \"cell[1]\" = 'cell[0] ^ cell[1]' }\n"
    )
    understanding = agree(parse_toml(text))
    images = unpack_values(understanding.function.values, 6)
    for index in range(64):
        before = decode(understanding.outputs, index)
        after = decode(understanding.outputs, int(images[index]))
        one, two = before["cell"]
        assert after == {"a": before["a"], "k": -1 - before["k"], "cell": [one, one ^ two]}


def test_a_map_over_a_domain() -> None:
    text = '[inputs]\na = 4\n[domain]\nwhere = "a < 11"\n[permutation]\nmap = { a = "(a + 3) % 11" }\n'
    found = rows(agree(parse_toml(text)))
    assert found[9] == (1, 0, 0, 0)
    assert found[11:] == [(None,) * 4] * 5


def test_gray_code_is_one_to_one_and_changes_one_bit() -> None:
    # common practice: the reflected binary code is x ^ (x >> 1) (F. Gray, US patent 2,632,058, 1953)
    text = "[inputs]\nx = 6\n[outputs]\ncode = { value = 'x ^ (x >> 1)' }\n"
    codes = unpack_values(agree(parse_toml(text)).function.values, 6)
    assert sorted(codes.tolist()) == list(range(64))
    assert all((codes[i] ^ codes[(i + 1) % 64]).bit_count() == 1 for i in range(64))
    reflected = [0]
    for bit in range(6):
        reflected += [(1 << bit) | code for code in reversed(reflected)]
    assert codes.tolist() == reflected


def test_seven_segments_of_a_decimal_digit() -> None:
    # common practice: segments a (top), then clockwise b to f, g in the middle; 6 and 9 with their tails
    lit = ("abcdef", "bc", "abged", "abgcd", "fgbc", "afgcd", "afgedc", "abc", "abcdefg", "abcdfg")
    codes = [sum(1 << "abcdefg".index(segment) for segment in set(names)) for names in lit]
    table = ", ".join([*map(str, codes), *['"-"'] * 6])
    understanding = agree(parse_toml(f"[inputs]\nd = 4\n[outputs]\nsegments = {{ table = [{table}] }}\n"))
    assert understanding.outputs == (Word("segments", 7),)
    assert understanding.function.free == 6
    segment_e = unpack(understanding.function.values[4], 4)[:10]
    assert np.flatnonzero(segment_e).tolist() == [0, 2, 6, 8]


def specs() -> st.SearchStrategy[Spec]:
    """Specs of every kind over a word or two, by tables, clauses, covers and expressions."""
    words = (Word("a", 2), Word("k", 2, signed=True))
    bit = st.sampled_from((0, 1, None))
    condition = st.sampled_from(
        ("a > k", "a & 1", "popcount(a) == 1 or k < -1", "a in [1, 3] and k", "not a * k")
    )
    domain = st.sampled_from((None, "a != 2", "k >= 0 or a == 1", "a != 0"))
    number = st.sampled_from(("a - k", "a * k", "a ** 3 - k", "12 // (a + 1)", "k % 3", "a if k else -1"))
    literal = st.sampled_from((1, -1, 2, -2, 3, -3, 4, -4))
    clause = st.lists(literal, max_size=3).map(tuple)
    clauses = st.builds(
        Clauses, st.just(4), st.lists(clause, max_size=4).map(tuple), st.lists(clause, max_size=2).map(tuple)
    )
    predicate = st.one_of(
        condition.filter(lambda text: text != "a in [1, 3] and k").map(lambda text: Predicate(where=text)),
        st.lists(bit, min_size=16, max_size=16).map(lambda entries: Predicate(table=tuple(entries))),
        st.sampled_from(("a[0] ^ k[1] => a[1]", "Majority(a[0], a[1], k[0]) != k[1]")).map(
            lambda text: Predicate(formula=text)
        ),
        clauses.map(lambda found: Predicate(clauses=found)),
    )
    output = st.one_of(
        number.map(lambda text: Output("t", value=text, signed=True)),
        number.map(lambda text: Output("t", value=text, bits=3)),
        st.lists(st.one_of(st.none(), st.integers(-9, 9)), min_size=16, max_size=16).map(
            lambda entries: Output("t", table=tuple(entries), signed=True)
        ),
    )
    row = st.tuples(st.text("01-", min_size=4, max_size=4), st.sampled_from(("1-", "-1", "11", "--", "1~")))
    cover = st.builds(
        Cover, st.just(4), st.just(2), st.sampled_from(("f", "fd", "fr", "fdr")), st.lists(row).map(tuple)
    )
    body = st.one_of(
        predicate,
        st.tuples(output, output).map(lambda two: Outputs((two[0], replace(two[1], name="u")))),
        cover.map(lambda found: Outputs(cover=found)),
        st.permutations(range(16)).map(lambda images: Permutation(values=tuple(images))),
        st.just(Permutation(map={"a": "(a + 1 + k) % 4"})),
    )
    return st.builds(Spec, st.just(words), body, domain=domain)


@given(specs())
def test_the_second_way_agrees(spec: Spec) -> None:
    agree(spec)


@pytest.mark.parametrize(
    "text",
    [
        "[inputs]\na = 3\n[predicate]\nwhere = 'a == 5'\n",
        "[inputs]\na = 3\n[predicate]\nformula = 'a[0] & ~a[1] & a[2]'\n",
        "[inputs]\na = 3\n[outputs]\nt = { value = 'a + 1' }\n",
        "[inputs]\na = 3\n[permutation]\nmap = { a = '(a + 1) % 8' }\n",
    ],
)
def test_the_second_way_notices_a_wrong_table(text: str) -> None:
    understanding = understand(parse_toml(text))
    function = understanding.function
    expectation = Expectation(understanding)
    for row, index in product(range(function.outputs), range(8)):
        values = function.values.copy()
        values[row] ^= pack(np.arange(8) == index)
        wrong = replace(understanding, tabulated=replace(function, values=values))
        assert [i for i in range(8) if rows(wrong)[i] != expectation(i)] == [index]


def test_the_second_way_notices_a_word_that_is_too_narrow() -> None:
    understanding = understand(parse_toml("[inputs]\na = 3\n[outputs]\nt = { value = 'a + 1' }\n"))
    narrow = replace(understanding, outputs=(Word("t", 3),))
    with pytest.raises(AssertionError, match="t was taken for 3 bits, but holds 8"):
        expected_value(narrow, 7)
    assert expected_value(narrow, 6) == (1, 1, 1)


def test_the_second_way_refuses_what_is_no_condition() -> None:
    understanding = understand(
        parse_toml("[inputs]\na = 2\n[domain]\nwhere = 'a < 2'\n[predicate]\nwhere = 'a'\n")
    )
    assert [expected_value(understanding, index) for index in range(4)] == [(0,), (1,), (None,), (None,)]
    open_domain = replace(understanding, spec=replace(understanding.spec, domain=None))
    with pytest.raises(ExpressionError, match="a condition is true or false, or 0 or 1, not 2"):
        expected_value(open_domain, 2)
