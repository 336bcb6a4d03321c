"""Specs at many chosen inputs at once, against the plain evaluation input by input."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

import revsynth
from revsynth.errors import ExpressionError, SpecError
from revsynth.spec.expectation import Expectation
from revsynth.spec.expression import parse
from revsynth.spec.model import Clauses, Cover, Outputs, Predicate, Spec, Word
from revsynth.spec.netlist import Netlist, NetlistGate
from revsynth.spec.sampled import SampledSpec
from revsynth.spec.toml_reader import parse_toml
from revsynth.spec.understand import Understanding, understand
from tests.spec.random_expressions import SCOPE, WORDS, Text, expressions


def check(understanding: Understanding, words: int = 2, seed: int = 0) -> None:
    """Bits, free places and domain at random inputs, those with all bits equal among them."""
    draw = np.random.default_rng(seed)
    size = understanding.input_bits
    inputs = draw.integers(0, 1 << 64, (size, words), dtype=np.uint64)
    inputs &= ~np.uint64(3)
    inputs |= np.uint64(1)
    indices = [
        sum(int(inputs[bit, row >> 6] >> np.uint64(row & 63) & np.uint64(1)) << bit for bit in range(size))
        for row in range(64 * words)
    ]
    expectation = Expectation(understanding)
    try:
        expected = list(expectation.at(indices))
    except ExpressionError:
        with pytest.raises(ExpressionError):
            SampledSpec(understanding).wanted(inputs)
        return
    found = SampledSpec(understanding).wanted(inputs)
    for row, wanted in enumerate(expected):
        word, place = row >> 6, np.uint64(row & 63)
        assert found.domain[word] >> place & np.uint64(1) == expectation.in_domain(indices[row])
        bits = tuple(
            None if int(free[word] >> place) & 1 else int(bit[word] >> place) & 1
            for bit, free in zip(found.bits, found.free, strict=True)
        )
        assert bits == wanted, indices[row]


@given(expressions())
def test_random_expressions(text: Text) -> None:
    body = Outputs((revsynth.spec.model.Output("f", value=text[0], bits=9, signed=True),))
    spec = Spec(WORDS, body, constants=dict(SCOPE.constants))
    outputs = (Word("f", 9, signed=True),)
    try:
        parse(text[0], SCOPE)
    except ExpressionError:
        return
    check(Understanding(spec, None, outputs, ()))


SPECS = {
    "a predicate of wide words": """
        [inputs]
        a = 64
        k = { bits = 63, signed = true }
        m = 62
        x = { bits = 64, signed = true }
        [domain]
        where = "k % 3 != 0"
        [predicate]
        where = "(a * k + m) % 2**64 > 2**62 and x < a or x // k == -5"
        """,
    "outputs": """
        [inputs]
        cell = { bits = 7, count = 6 }
        s = { bits = 5, signed = true }
        [outputs]
        total = { value = "sum(cell) * s", bits = 80, signed = true }
        most = { value = "max(cell) > s", bits = 1 }
        """,
    "a map": """
        [inputs]
        a = 40
        b = { bits = 3, count = 2 }
        [domain]
        where = "a < 1000003"
        [permutation]
        map = { a = "(a + 77 * b[0]) % 1000003" }
        """,
    "a formula": """
        [inputs]
        v = 30
        [predicate]
        formula = '''Majority(v[0], v[1], v[2], v[3], v[7]) ^ Majority(v[4], v[5], v[6], v[8]) & ~v[9]
                     | OneHot(v[10], v[11], v[12]) => OneHot0(v[13], v[14], v[15]) <=> (v[16] ? v[17] : v[18])
                     & (Or(v[19], v[20], 0) != And(v[21], v[22], 1))'''
        """,
}


@pytest.mark.parametrize("name", SPECS)
def test_specs(name: str) -> None:
    check(understand(parse_toml(SPECS[name])), words=8)


ROWS = st.tuples(st.text("01-", min_size=5, max_size=5), st.text("01-~", min_size=2, max_size=2))


@given(st.sampled_from(["f", "fd", "fr", "fdr"]), st.lists(ROWS, max_size=6))
def test_covers(kind: str, rows: list[tuple[str, str]]) -> None:
    spec = Spec((Word("v", 5),), Outputs(cover=Cover(5, 2, kind, tuple(rows))))  # type: ignore[arg-type]
    check(Understanding(spec, None, (Word("f", 2),), ()))


LITERALS = st.integers(1, 6).flatmap(lambda v: st.sampled_from([v, -v]))
CLAUSES = st.lists(st.lists(LITERALS, max_size=4).map(tuple), max_size=6).map(tuple)


@given(CLAUSES, CLAUSES)
def test_clauses(clauses: tuple[tuple[int, ...], ...], xors: tuple[tuple[int, ...], ...]) -> None:
    spec = Spec((Word("v", 6),), Predicate(clauses=Clauses(6, clauses, xors)))
    check(Understanding(spec, None, (), ()))


@given(st.data())
def test_netlists(data: st.DataObject) -> None:
    gates = []
    for number in range(7, 15):
        operands = data.draw(st.lists(st.integers(0, 2 * number - 1), max_size=4))
        kind = data.draw(st.sampled_from(["and", "or", "xor", "cover"]))
        row = st.text("01-", min_size=len(operands), max_size=len(operands))
        rows = data.draw(st.lists(row, max_size=3)) if kind == "cover" else []
        gates.append(NetlistGate(kind, tuple(operands), tuple(rows)))  # type: ignore[arg-type]
    outputs = data.draw(st.lists(st.integers(0, 29), min_size=2, max_size=4))
    netlist = Netlist(6, tuple(gates), tuple(outputs))
    words = (revsynth.spec.model.Output("f", bits=len(outputs)),)
    spec = Spec((Word("v", 6),), Outputs(words, netlist=netlist))
    check(Understanding(spec, None, (Word("f", len(outputs)),), ()))


def test_what_is_undefined_or_no_truth_value_is_named() -> None:
    inputs = np.full((40, 2), 0x5555555555555555, dtype=np.uint64)
    inputs[:, 0] = 0
    zero = understand(revsynth.predicate("a // b == 3", inputs={"a": 20, "b": 20}))
    with pytest.raises(ExpressionError, match="a = 0, b = 0"):
        SampledSpec(zero).wanted(inputs)
    number = understand(revsynth.predicate("a - b + 2", inputs={"a": 20, "b": 20}))
    with pytest.raises(ExpressionError, match="the value is 2 at a = 0, b = 0"):
        SampledSpec(number).wanted(inputs)
    unfit = understand(revsynth.permutation(inputs={"a": 20, "b": 20}, map={"a": "a + 2**20 - b"}))
    with pytest.raises(SpecError, match="the new value is 1048576 at a = 0, b = 0"):
        SampledSpec(unfit).wanted(inputs)


def test_the_number_of_inputs_follows_from_the_spec() -> None:
    small = SampledSpec(understand(revsynth.predicate("a + b == 77", inputs={"a": 32, "b": 32})))
    assert small.count(1 << 20) == 1 << 20
    text = "a**7 + b**7 == (a + b)**7 - a * b * 12345678901234567890123456789"
    large = SampledSpec(understand(revsynth.predicate(text, inputs={"a": 64, "b": 64})))
    assert large.count(1 << 20) < 1 << 20
    assert large.count(1 << 20) % 64 == 0
    assert large.count(1 << 20) == large.count(1 << 20)
