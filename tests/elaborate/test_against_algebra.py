"""Networks of random formulas and expressions against two general-purpose algebra libraries.

The trees are built as objects of PyEDA and of SymPy directly, so that no parser of ours or theirs stands
between, and spelt in our language for elaboration.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from functools import reduce
from typing import Any

import pytest
import sympy
from hypothesis import given
from hypothesis import strategies as st
from pyeda.boolalg import expr as pyeda

from revsynth.elaborate import elaborate
from revsynth.logic.network_simulation import tabulate
from revsynth.logic.truth_table import unpack_values
from revsynth.spec.model import Output, Outputs, Predicate, Spec, Word

BITS = 5
FORMULA_INPUTS = tuple(Word(f"b{i}", 1) for i in range(BITS))
PYEDA = [pyeda.exprvar(f"b{i}") for i in range(BITS)]
SYMPY = sympy.symbols(f"b0:{BITS}")


@dataclass(frozen=True)
class Both:
    """One formula as text, as PyEDA's expression, and as SymPy's."""

    text: str
    pyeda: Any
    sympy: Any


OPERATORS: dict[str, tuple[str, Callable[..., Any], Callable[..., Any]]] = {
    "&": ("({} & {})", pyeda.And, sympy.And),
    "|": ("({} | {})", pyeda.Or, sympy.Or),
    "^": ("({} ^ {})", pyeda.Xor, sympy.Xor),
    "~": ("~{}", pyeda.Not, sympy.Not),
    "=>": ("({} => {})", pyeda.Implies, sympy.Implies),
    "<=>": ("({} <=> {})", pyeda.Equal, sympy.Equivalent),
    "ITE": ("ITE({}, {}, {})", pyeda.ITE, sympy.ITE),
    "Majority": ("Majority({}, {}, {})", pyeda.Majority, lambda a, b, c: (a & b) | (a & c) | (b & c)),
    "OneHot": (
        "OneHot({}, {}, {})", pyeda.OneHot, lambda a, b, c: sympy.Xor(a, b, c) & ~sympy.And(a, b, c),
    ),
    "OneHot0": ("OneHot0({}, {}, {})", pyeda.OneHot0, lambda a, b, c: ~((a & b) | (a & c) | (b & c))),
}  # fmt: skip


def apply(name: str, parts: tuple[Both, ...]) -> Both:
    text, with_pyeda, with_sympy = OPERATORS[name]
    return Both(
        text.format(*(part.text for part in parts)),
        with_pyeda(*(part.pyeda for part in parts)),
        with_sympy(*(part.sympy for part in parts)),
    )


def formulas() -> st.SearchStrategy[Both]:
    leaves = st.sampled_from([Both(f"b{i}", PYEDA[i], SYMPY[i]) for i in range(BITS)])

    def larger(parts: st.SearchStrategy[Both]) -> st.SearchStrategy[Both]:
        choices = []
        for name, (text, _, _) in OPERATORS.items():
            choices.append(st.builds(apply, st.just(name), st.tuples(*[parts] * text.count("{}"))))
        return st.one_of(choices)

    return st.recursive(leaves, larger, max_leaves=12)


@given(formulas())
def test_formulas(formula: Both) -> None:
    network = elaborate(Spec(FORMULA_INPUTS, Predicate(formula=formula.text))).function.values
    found = unpack_values(tabulate(network), BITS)
    for index in range(1 << BITS):
        bits = [index >> i & 1 for i in range(BITS)]
        by_pyeda = formula.pyeda.restrict(dict(zip(PYEDA, bits, strict=True)))
        by_sympy = formula.sympy.subs({s: bool(bit) for s, bit in zip(SYMPY, bits, strict=True)})
        assert by_pyeda.is_one() or by_pyeda.is_zero()
        assert found[index] == by_pyeda.is_one() == bool(by_sympy), formula.text


WORDS = (Word("x", 3), Word("y", 2), Word("z", 2, signed=True))
SYMBOLS = {word.name: sympy.Symbol(word.name, integer=True) for word in WORDS}
INTEGER: dict[str, tuple[str, Callable[..., Any]]] = {
    "+": ("({} + {})", lambda a, b: a + b),
    "-": ("({} - {})", lambda a, b: a - b),
    "*": ("({} * {})", lambda a, b: a * b),
    "**": ("{} ** 2", lambda a: a**2),
    "// 3": ("({} // 3)", lambda a: sympy.floor(a / sympy.Integer(3))),
    "% 5": ("({} % 5)", lambda a: sympy.Mod(a, 5)),
    "% -3": ("({} % -3)", lambda a: sympy.Mod(a, -3)),
    "abs": ("abs({})", sympy.Abs),
    "min": ("min({}, {})", sympy.Min),
    "max": ("max({}, {})", sympy.Max),
}


def integers() -> st.SearchStrategy[tuple[str, Any]]:
    """Pairs of text and SymPy's expression."""
    words = st.sampled_from(list(SYMBOLS.items()))
    numbers = st.integers(0, 9).map(lambda n: (str(n), sympy.Integer(n)))

    def combine(name: str, parts: tuple[tuple[str, Any], ...]) -> tuple[str, Any]:
        text, with_sympy = INTEGER[name]
        spelt = [f"({part})" if name == "**" else part for part, _ in parts]
        return text.format(*spelt), with_sympy(*(value for _, value in parts))

    def larger(parts: st.SearchStrategy[tuple[str, Any]]) -> st.SearchStrategy[tuple[str, Any]]:
        choices = [
            st.builds(combine, st.just(name), st.tuples(*[parts] * text.count("{}")))
            for name, (text, _) in INTEGER.items()
        ]
        return st.one_of(choices)

    return st.recursive(st.one_of(words, numbers), larger, max_leaves=5)


@given(integers(), st.sampled_from([7, 20]))
def test_integers(pair: tuple[str, Any], bits: int) -> None:
    """All values modulo 2**bits; SymPy works with exact integers and rational numbers."""
    text, symbolic = pair
    network = elaborate(Spec(WORDS, Outputs((Output("f", text, bits=bits),)))).function.values
    found = unpack_values(tabulate(network), sum(word.bits for word in WORDS))
    for index in range(0, 128, 3):
        x, y, z = index & 7, index >> 3 & 3, index >> 5
        values = {"x": x, "y": y, "z": z - 4 if z & 2 else z}
        exact = symbolic.subs({SYMBOLS[name]: sympy.Integer(value) for name, value in values.items()})
        assert exact.is_Integer
        assert found[index] == int(exact) % 2**bits, (text, values)


@pytest.mark.parametrize("relation", ["<", "<=", ">", ">=", "==", "!="])
@given(one=integers(), other=integers())
def test_relations(relation: str, one: tuple[str, Any], other: tuple[str, Any]) -> None:
    """A comparison of two expressions against the sign of their exact difference."""
    network = elaborate(Spec(WORDS, Predicate(where=f"{one[0]} {relation} {other[0]}"))).function.values
    found = unpack_values(tabulate(network), sum(word.bits for word in WORDS))
    wanted = {"<": {-1}, "<=": {-1, 0}, ">": {1}, ">=": {0, 1}, "==": {0}, "!=": {-1, 1}}[relation]
    for index in range(0, 128, 11):
        x, y, z = index & 7, index >> 3 & 3, index >> 5
        values = {"x": x, "y": y, "z": z - 4 if z & 2 else z}
        at = {SYMBOLS[name]: sympy.Integer(value) for name, value in values.items()}
        assert bool(found[index]) == (sympy.sign(one[1].subs(at) - other[1].subs(at)) in wanted)


def test_a_parity_of_many_bits_from_pyeda() -> None:
    """A row of exclusive ors, longer than what fits a word."""
    bits = 14
    inputs = (Word("x", bits),)
    variables = [pyeda.exprvar("x", i) for i in range(bits)]
    chained = reduce(pyeda.Xor, variables)
    text = " ^ ".join(f"x[{i}]" for i in range(bits))
    network = elaborate(Spec(inputs, Predicate(formula=text))).function.values
    assert network.ands == 0
    found = unpack_values(tabulate(network), bits)
    for index in range(0, 1 << bits, 1021):
        point = {variable: index >> i & 1 for i, variable in enumerate(variables)}
        assert found[index] == int(chained.restrict(point))
