"""Formulas against four independent readings: our slow one, PyEDA's operators, PyEDA's parser, and SymPy."""

from __future__ import annotations

import random

import numpy as np
import pytest
import sympy
from hypothesis import given
from hypothesis import strategies as st
from pyeda.boolalg.expr import expr

from revsynth.errors import ExpressionError
from revsynth.logic.truth_table import unpack
from revsynth.spec import formula_reference
from revsynth.spec.formula import parse_formula
from revsynth.spec.formula_columns import evaluate_formula
from revsynth.spec.formula_reference import read_again, value_of, values_of
from revsynth.spec.layout import bit_names, decode
from revsynth.spec.model import Word
from revsynth.spec.pyeda_adapter import second_opinion

WORDS = (Word("a", 2), Word("k", 1, signed=True), Word("cell", 2, count=2), Word("lamp", 1, count=2))
BITS = 9
ATOMS = (
    "a[0]",
    "a[1]",
    "k",
    "k[0]",
    "cell[0][1]",
    "cell[1][0]",
    "lamp[0]",
    "lamp[1][0]",
    "0",
    "1",
    "true",
    "false",
)
LOOSE = ("&", "^", "|", "and", "&&", "or", "||", "=>", "<=>")


def column(text: str, words: tuple[Word, ...] = WORDS) -> np.ndarray:
    formula = parse_formula(text, words)
    return unpack(evaluate_formula(formula), formula.inputs)


def formulas(atoms: tuple[str, ...] = ATOMS) -> st.SearchStrategy[str]:
    """Formulas of every operator and function, with and without brackets."""

    def larger(inner: st.SearchStrategy[str]) -> st.SearchStrategy[str]:
        bracketed = inner.map(lambda text: f"({text})")
        operand = st.one_of(bracketed, st.sampled_from(atoms), st.sampled_from(atoms).map("~{}".format))
        chain = st.lists(st.tuples(st.sampled_from(LOOSE), operand), min_size=1, max_size=5)
        several = st.lists(inner, min_size=1, max_size=5).map(", ".join)
        return st.one_of(
            st.tuples(operand, chain).map(lambda t: t[0] + "".join(f" {sign} {part}" for sign, part in t[1])),
            st.tuples(operand, st.sampled_from(("==", "!=")), operand).map(" ".join),
            st.tuples(st.sampled_from(("~", "!", "not ")), bracketed).map("".join),
            st.tuples(inner, inner, inner).map(lambda t: f"({t[0]}) ? {t[1]} : {t[2]}"),
            st.tuples(st.sampled_from(("Xor", "Majority", "OneHot", "OneHot0", "And", "Or")), several).map(
                lambda t: f"{t[0]}({t[1]})"
            ),
            st.tuples(inner, inner, inner).map(lambda t: f"ITE({', '.join(t)})"),
            inner.map(lambda text: f"Not({text})"),
        )

    return st.recursive(st.sampled_from(atoms), larger, max_leaves=20)


@given(formulas(), st.integers(0, 2**32))
def test_three_readings_agree(text: str, seed: int) -> None:
    found = column(text)
    nodes = read_again(text, WORDS)
    some = random.Random(seed).sample(range(1 << BITS), 16)
    assert [value_of(nodes, decode(WORDS, index)) for index in some] == found[some].tolist()
    assert values_of(nodes, [decode(WORDS, index) for index in some]) == found[some].tolist()
    assert second_opinion(text, WORDS, some).tolist() == found[some].tolist()


@pytest.mark.parametrize(
    ("text", "as_if"),
    [
        ("~a[0] & a[1]", "(~a[0]) & a[1]"),
        ("a[0] ^ a[1] & k", "a[0] ^ (a[1] & k)"),
        ("a[0] | a[1] ^ k", "a[0] | (a[1] ^ k)"),
        ("a[0] == a[1] | k", "a[0] == (a[1] | k)"),
        ("not a[0] == a[1]", "not (a[0] == a[1])"),
        ("not a[0] and a[1]", "(not a[0]) and a[1]"),
        ("not a[0] | a[1]", "not (a[0] | a[1])"),
        ("a[0] or a[1] and k", "a[0] or (a[1] and k)"),
        ("a[0] || a[1] && k", "a[0] or (a[1] and k)"),
        ("a[0] & k == a[1] and k", "((a[0] & k) == a[1]) and k"),
        ("a[0] or a[1] => k", "(a[0] or a[1]) => k"),
        ("a[0] => a[1] => k", "a[0] => (a[1] => k)"),
        ("a[0] <=> a[1] => k", "a[0] <=> (a[1] => k)"),
        ("a[0] => a[1] <=> k", "(a[0] => a[1]) <=> k"),
        ("a[0] <=> a[1] ? k : lamp[0]", "(a[0] <=> a[1]) ? k : lamp[0]"),
        ("a[0] ? a[1] : k ? lamp[0] : lamp[1]", "a[0] ? a[1] : (k ? lamp[0] : lamp[1])"),
        ("a[0] ? k ? lamp[0] : lamp[1] : a[1]", "a[0] ? (k ? lamp[0] : lamp[1]) : a[1]"),
        ("a[0] ? a[1] : k => lamp[0]", "a[0] ? a[1] : (k => lamp[0])"),
        ("!a[0] != !a[1]", "(~a[0]) ^ (~a[1])"),
    ],
)
def test_what_binds_tighter(text: str, as_if: str) -> None:
    assert column(text).tolist() == column(as_if).tolist()
    nodes = read_again(text, WORDS)
    assert [value_of(nodes, decode(WORDS, index)) for index in range(1 << BITS)] == column(text).tolist()


def test_functions_by_counting() -> None:
    bits = [f"a[{i}]" for i in range(4)]
    words = (Word("a", 4),)
    ones = np.array([x.bit_count() for x in range(16)])
    for name, wanted in {
        "Xor": ones % 2 == 1,
        "And": ones == 4,
        "Or": ones > 0,
        "OneHot": ones == 1,
        "OneHot0": ones <= 1,
        "Majority": ones >= 3,
    }.items():
        assert column(f"{name}({', '.join(bits)})", words).tolist() == wanted.astype(int).tolist(), name
    seven = (Word("a", 7),)
    text = "Majority(" + ", ".join(f"a[{i}]" for i in range(7)) + ")"
    assert column(text, seven).tolist() == [int(x.bit_count() >= 4) for x in range(128)]


def test_the_first_bit_is_the_lowest() -> None:
    # changes under bit reversal: a[0] and not a[2] holds at 1 and 3, not at 4 and 6
    assert np.flatnonzero(column("a[0] & ~a[2]", (Word("a", 3),))).tolist() == [1, 3]
    words = (Word("a", 1), Word("cell", 2, count=2))
    assert np.flatnonzero(
        column("cell[1][0] & ~a & ~cell[0][0] & ~cell[0][1] & ~cell[1][1]", words)
    ).tolist() == [8]


BRACKETED = ("&", "|", "^")


@st.composite
def common_formulas(draw: st.DrawFn, depth: int = 4) -> str:
    """Formulas in the syntax that PyEDA's parser, SymPy's and ours share."""
    atom = f"x{draw(st.integers(0, 6))}"
    if depth == 0 or draw(st.integers(0, 4)) == 0:
        return atom
    if draw(st.integers(0, 4)) == 0:
        return f"~({draw(common_formulas(depth - 1))})"
    parts = draw(st.lists(common_formulas(depth - 1), min_size=2, max_size=3))
    signs = [draw(st.sampled_from(BRACKETED)) for _ in parts[1:]]
    text = parts[0] + "".join(f" {sign} {part}" for sign, part in zip(signs, parts[1:], strict=True))
    return f"({text})" if draw(st.booleans()) else text


SINGLES = tuple(Word(f"x{i}", 1) for i in range(7))


@given(common_formulas(), st.integers(0, 127))
def test_pyeda_and_sympy_parse_it_alike(text: str, index: int) -> None:
    wanted = column(text, SINGLES)[index]
    values = {f"x{i}": index >> i & 1 for i in range(7)}
    theirs = expr(text)
    point = {v: values[v.name] for v in theirs.inputs}
    assert int(theirs.restrict(point).is_one()) == wanted
    symbols = {name: sympy.Symbol(name) for name in values}
    symbolic = sympy.sympify(text, locals=symbols, convert_xor=False)
    assert int(bool(symbolic.subs({symbols[n]: bool(v) for n, v in values.items()}))) == wanted


def test_pyeda_parses_the_other_operators_alike() -> None:
    for text in (
        "x0 => x1 => x2", "x0 | x1 => x2 & ~x3", "x0 <=> x1 ^ x2", "x0 ? x1 : x2 ? x3 : x4",
        "ITE(x0, x1 ^ x2, ~x3)", "Majority(x0, x1, x2, x3, x4)", "OneHot(x0, x1, x2) | OneHot0(x3, x4, x5)",
        "Xor(x0, And(x1, x2), Or(x3, x4), Not(x5))",
    ):  # fmt: skip
        theirs = expr(text)
        ours = column(text, SINGLES)
        for index in range(128):
            values = {v: index >> int(v.name[1:]) & 1 for v in theirs.inputs}
            assert int(theirs.restrict(values).is_one()) == ours[index], text


def test_a_whole_column_from_pyeda_keeps_unused_bits_and_our_order() -> None:
    words = (Word("z", 2), Word("b", 3), Word("a", 2))
    text = "a[1] & ~z[0] ^ b[2] & b[2] ^ (b[0] ^ b[0])"
    assert second_opinion(text, words).tolist() == column(text, words).tolist()
    assert second_opinion("b[0] & ~b[0]", words).tolist() == [0] * 128
    assert second_opinion("1", words).tolist() == [1] * 128


@pytest.mark.parametrize(
    ("message", "text", "words"),
    [
        ("whole columns up to 12 input bits, this has 13", "a[0]", (Word("a", 13),)),
        ("at most 100 operations within each other", "~" * 200 + "a", (Word("a", 1),)),
        ("Majority of at most 11 bits, not 12", f"Majority({', '.join(['a'] * 12)})", (Word("a", 1),)),
        ("this is not a formula", "a ? a", (Word("a", 1),)),
        ("this is not a formula", "a & & a", (Word("a", 1),)),
        ("this is not a formula", "(a", (Word("a", 1),)),
        ("this is not a formula", "a)", (Word("a", 1),)),
    ],
)
def test_what_the_second_opinion_refuses(message: str, text: str, words: tuple[Word, ...]) -> None:
    with pytest.raises(ExpressionError, match=message):
        second_opinion(text, words)


def test_long_and_deep_formulas_need_no_recursion() -> None:
    rng = random.Random(7)
    words = (Word("a", 12),)
    chosen = [rng.randrange(12) for _ in range(5000)]
    bits = np.array([[x >> i & 1 for i in range(12)] for x in range(4096)], dtype=np.uint8)
    long_sum = column(" ^ ".join(f"a[{i}]" for i in chosen), words)
    assert long_sum.tolist() == (bits[:, chosen].sum(axis=1) % 2).tolist()
    long_product = column(" & ".join(f"a[{i % 11}]" for i in range(5000)), words)
    assert np.flatnonzero(long_product).tolist() == [2047, 4095]
    assert column("(" * 5000 + "a[3]" + ")" * 5000, words).sum() == 2048
    assert column("~" * 5001 + "a[3]", words).tolist() == (1 - bits[:, 3]).tolist()
    implied = " => ".join(["a[0]"] * 3000 + ["a[1]"])
    assert column(implied, words).tolist() == (1 - (bits[:, 0] & (1 - bits[:, 1]))).tolist()
    chosen_last = " ".join("a[0] ? a[1] :" for _ in range(1000)) + " a[2]"
    assert column(chosen_last, words).tolist() == np.where(bits[:, 0], bits[:, 1], bits[:, 2]).tolist()
    nodes = read_again(chosen_last, words)
    assert value_of(nodes, {"a": 0b011}) == 1
    assert value_of(nodes, {"a": 0b100}) == 1
    assert value_of(nodes, {"a": 0b001}) == 0


def test_blocks_of_inputs_join_to_the_whole_column() -> None:
    words = (Word("a", 20),)
    found = column("a[19] & ~a[0] ^ a[18] | a[6] & a[5] & ~a[17]", words)
    x = np.arange(1 << 20)
    bit = [x >> i & 1 for i in range(20)]
    wanted = ((bit[19] & (1 - bit[0])) ^ bit[18]) | (bit[6] & bit[5] & (1 - bit[17]))
    assert np.array_equal(found, wanted)


def test_many_operands_at_once_take_smaller_blocks() -> None:
    words = (Word("a", 18),)
    found = column(f"OneHot({', '.join(f'a[{i % 18}]' for i in range(2000))})", words)
    assert found.sum() == 0
    once = column(f"OneHot({', '.join(f'a[{i}]' for i in range(18))})", words)
    assert np.flatnonzero(once).tolist() == [1 << i for i in range(18)]


def test_comments_and_line_breaks() -> None:
    text = "a[0]   # the low bit\n | a[1]\n"
    assert column(text).tolist() == column("a[0] | a[1]").tolist()
    assert value_of(read_again(text, WORDS), {"a": 2}) == 1


def test_names_of_the_bits_cover_the_formula() -> None:
    for index, name in enumerate(bit_names(WORDS)):
        assert np.flatnonzero(column(name))[0] == 1 << index


def test_a_formula_of_many_parts_is_evaluated_a_few_inputs_at_a_time(monkeypatch: pytest.MonkeyPatch) -> None:
    nodes = read_again("Majority(a[0], a[1], k) ^ lamp[0]", WORDS)
    inputs = [decode(WORDS, index) for index in range(1 << BITS)]
    at_once = values_of(nodes, inputs)
    monkeypatch.setattr(formula_reference, "_MOST_BITS", 3 * len(nodes))
    assert values_of(nodes, inputs) == at_once
