"""CNF files in every layout that is met, against clause-by-clause evaluation."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from revsynth.logic.truth_table import first_inputs, unpack
from revsynth.spec.dimacs import parse_dimacs
from revsynth.spec.model import Clauses, Predicate, Word
from revsynth.spec.understand import understand


def marked(text: str) -> list[int]:
    function = understand(parse_dimacs(text, "test.cnf")).function
    return np.flatnonzero(unpack(function.values[0], function.inputs)).tolist()


def obvious(variables: int, clauses: Sequence[Sequence[int]], sums: Sequence[Sequence[int]]) -> list[int]:
    """The inputs that satisfy everything, one by one, variable i in bit i - 1."""
    found = []
    for index in range(1 << variables):
        true = {i + 1 if index >> i & 1 else -(i + 1) for i in range(variables)}
        if all(true & set(clause) for clause in clauses) and all(
            len([literal for literal in clause if literal in true]) % 2 for clause in sums
        ):
            found.append(index)
    return found


def test_variable_1_is_bit_0() -> None:
    # changes under bit reversal: 1 and not 3 holds at 1 and 3
    assert marked("p cnf 3 2\n1 0\n-3 0\n") == [1, 3]
    spec = parse_dimacs("p cnf 3 2\n1 0\n-3 0\n", "test.cnf")
    assert spec.inputs == (Word("v", 3),)
    assert spec.kind == "predicate"
    assert spec.source == "test.cnf"


@pytest.mark.parametrize(
    ("what", "text"),
    [
        ("plain", "p cnf 4 3\n1 -2 0\n3 4 0\n-1 -4 0\n"),
        ("carriage returns", "p cnf 4 3\r\n1 -2 0\r\n3 4 0\r\n-1 -4 0\r\n"),
        ("several on a line", "p cnf 4 3\n1 -2 0 3 4 0 -1 -4 0\n"),
        ("over several lines", "p cnf 4 3\n1\n-2 0 3\n\n4\n0 -1 -4\n0\n"),
        ("comments in the middle", "c x\np cnf 4 3\n1\nc a comment 5 0\n-2 0\n3 4 0\nc\n-1 -4 0\n"),
        ("without the last 0", "p cnf 4 3\n1 -2 0\n3 4 0\n-1 -4"),
        ("a tail behind %", "p cnf 4 3\n1 -2 0\n3 4 0\n-1 -4 0\n%\n0\n\n"),
        ("tabs and blanks", "  p\tcnf   4  3 \n 1\t-2  0\n\t3 4 0 \n -1 -4 0"),
        ("comments that start like projections", "c independent set\nc ind is not one\nc p cnf\n"
         "p cnf 4 3\n1 -2 0\n3 4 0\n-1 -4 0\n"),
    ],
)  # fmt: skip
def test_layouts_of_one_formula(what: str, text: str) -> None:
    assert marked(text) == obvious(4, [(1, -2), (3, 4), (-1, -4)], []), what


def test_xor_clauses_are_apart() -> None:
    spec = parse_dimacs("p cnf 4 3\nx1 -2 3 0\nx 4 0\n1 4 0\n")
    assert spec.body == Predicate(clauses=Clauses(4, ((1, 4),), ((1, -2, 3), (4,))))
    assert marked("p cnf 4 3\nx1 -2 3 0\nx 4 0\n1 4 0\n") == obvious(4, [(1, 4)], [(1, -2, 3), (4,)])


def test_unused_variables_stay() -> None:
    assert marked("p cnf 3 1\n2 0\n") == [2, 3, 6, 7]


def test_no_clauses_and_an_empty_clause() -> None:
    assert marked("p cnf 2 0\n") == [0, 1, 2, 3]
    assert marked("p cnf 2 2\n1 0 0\n") == []
    assert marked("p cnf 2 1\nx 0\n") == []


@st.composite
def cnf_texts(draw: st.DrawFn) -> tuple[str, int, list[list[int]], list[list[int]]]:
    """A CNF, and its text with line breaks, blanks, comments and endings anywhere they are allowed."""
    variables = draw(st.integers(1, 8))
    literal = st.integers(1, variables).flatmap(lambda v: st.sampled_from((v, -v)))
    every = draw(st.lists(st.tuples(st.booleans(), st.lists(literal, max_size=4)), max_size=8))
    gap = st.sampled_from((" ", "  ", "\t", "\n", "\r\n", "\n\n", "\nc a comment 0 1\n"))
    text = draw(st.sampled_from(("", "c first\n", "\n"))) + f"p cnf {variables} {len(every)}\n"
    for is_sum, clause in every:
        text += "x" if is_sum else ""
        for number in clause:
            text += f"{number}" + draw(gap)
        text += "0" + draw(gap)
    text += draw(st.sampled_from(("", "\n%\n0\n", "\nc the end")))
    sums = [clause for is_sum, clause in every if is_sum]
    return text, variables, [clause for is_sum, clause in every if not is_sum], sums


@given(cnf_texts())
def test_any_layout(case: tuple[str, int, list[list[int]], list[list[int]]]) -> None:
    text, variables, clauses, sums = case
    assert marked(text) == obvious(variables, clauses, sums)


def test_a_published_count() -> None:
    # The pigeonhole principle (common practice): n + 1 pigeons do not fit n holes; n pigeons fit in n! ways.
    holes = 3
    for pigeons, ways in ((3, 6), (4, 0)):
        seat = {(p, h): p * holes + h + 1 for p in range(pigeons) for h in range(holes)}
        clauses = [[seat[p, h] for h in range(holes)] for p in range(pigeons)]
        clauses += [
            [-seat[p, h], -seat[q, h]] for h in range(holes) for p in range(pigeons) for q in range(p)
        ]
        clauses += [
            [-seat[p, h], -seat[p, g]] for p in range(pigeons) for h in range(holes) for g in range(h)
        ]
        text = f"p cnf {len(seat)} {len(clauses)}\n" + "".join(
            " ".join(map(str, clause)) + " 0\n" for clause in clauses
        )
        function = understand(parse_dimacs(text)).function
        assert function.marked == ways
        assert len(first_inputs(function.values[0], 10)) == ways
