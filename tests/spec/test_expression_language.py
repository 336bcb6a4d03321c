"""What the language allows and means, on cases whose answer is known without any evaluator."""

from __future__ import annotations

import ast
import pickle

import numpy as np
import pytest
import sympy
from sympy.parsing.sympy_parser import parse_expr

from revsynth.errors import ExpressionError, SpecError
from revsynth.spec.expression import Scope, check_name, parse
from revsynth.spec.model import Word
from revsynth.spec.names import FUNCTIONS
from revsynth.spec.reference import evaluate
from revsynth.spec.vector import evaluate_all

A4 = Scope({"a": Word("a", 4)})
AB = Scope({"a": Word("a", 4), "b": Word("b", 4)})


def values(text: str, scope: Scope = A4) -> list[int]:
    """The values for all inputs, input 0 first."""
    return evaluate_all(parse(text, scope)).tolist()


def test_inputs_are_numbered_with_the_first_word_lowest() -> None:
    scope = Scope({"a": Word("a", 2), "k": Word("k", 2, signed=True), "cell": Word("cell", 1, count=2)})
    assert values("a", scope)[:8] == [0, 1, 2, 3, 0, 1, 2, 3]
    assert values("k", scope)[:16] == [0] * 4 + [1] * 4 + [-2] * 4 + [-1] * 4
    assert values("cell[0] + 2 * cell[1]", scope)[::16] == [0, 1, 2, 3]


def test_bit_zero_is_the_least_significant() -> None:
    assert values("a[0]") == [0, 1] * 8
    assert values("a[3]") == [0] * 8 + [1] * 8
    assert values("a[1:4]") == [n // 2 for n in range(16)]
    assert values("a[0:3]") == [n % 8 for n in range(16)]


def test_a_signed_word_has_the_bits_of_its_twos_complement() -> None:
    scope = Scope({"k": Word("k", 3, signed=True)})
    assert values("k", scope) == [0, 1, 2, 3, -4, -3, -2, -1]
    assert values("k[2]", scope) == [0] * 4 + [1] * 4
    assert values("k[0:3]", scope) == list(range(8))
    assert values("popcount(k)", scope) == [0, 1, 1, 2, 1, 2, 2, 3]


def test_and_and_or_give_an_operand() -> None:
    assert values("a and 7") == [0] + [7] * 15
    assert values("a or 7") == [7, *range(1, 16)]


def test_division_rounds_down_and_the_remainder_has_the_sign_of_the_divisor() -> None:
    assert values("(a - 8) // 3") == [-3, -3, -2, -2, -2, -1, -1, -1, 0, 0, 0, 1, 1, 1, 2, 2]
    assert values("a % -3") == [0, -2, -1] * 5 + [0]


def test_inversion_is_of_exact_integers() -> None:
    assert values("~a == 5") == [False] * 16
    assert values("~a") == [-n - 1 for n in range(16)]
    assert values("~(a > 7)") == [-1] * 8 + [-2] * 8


def test_a_bit_and_a_look_up_may_be_taken_by_a_word() -> None:
    scope = Scope({"a": Word("a", 4), "i": Word("i", 2)}, {"lamp": [2, 3, 5, 7]})
    assert values("a[i]", scope) == [(a >> i) & 1 for i in range(4) for a in range(16)]
    assert values("lamp[i] * 2", scope) == [2 * p for p in (2, 3, 5, 7) for _ in range(16)]
    assert values("lamp[-1 - i]", scope) == [p for p in (7, 5, 3, 2) for _ in range(16)]


def test_colourings_of_a_ring_of_five_beacons() -> None:
    """Common practice: a ring of n has (c-1)**n + (-1)**n * (c-1) proper colourings in c colours."""
    scope = Scope({"cell": Word("cell", 2, count=5)}, {"edges": [[i, (i + 1) % 5] for i in range(5)]})
    assert sum(values("all(cell[i] != cell[j] for i, j in edges)", scope)) == 3**5 - 3
    three = "all(c < 3 for c in cell) and all(cell[i] != cell[j] for i, j in edges)"
    assert sum(values(three, scope)) == 2**5 - 2


def test_primes_below_256() -> None:
    found = values("a > 1 and all(a % d for d in range(2, a) if d * d <= a)", Scope({"a": Word("a", 8)}))
    assert [n for n, prime in enumerate(found) if prime] == list(sympy.primerange(256))


@pytest.mark.parametrize(
    "text",
    [
        "(a * 3 + b) % 7 - b // 3",
        "a**3 - 5 * a * b + b**2",
        "(a - b) // 4 + (b - a) % 5",
        "(a - 9) * (b + 2) // -3",
        "(a + b) ** 5 % (b + 1)",
        "abs(a - b) * (a - 20) % 11",
    ],
)
def test_integer_expressions_agree_with_sympy(text: str) -> None:
    """SymPy as an independent evaluator: floor and Mod of exact rationals, no Python operators."""
    a, b = sympy.symbols("a b", integer=True)
    tree = ast.parse(text, mode="eval").body

    def build(node: ast.expr) -> sympy.Expr:
        if isinstance(node, ast.Constant):
            return sympy.Integer(node.value)
        if isinstance(node, ast.Name):
            return {"a": a, "b": b}[node.id]
        if isinstance(node, ast.UnaryOp):
            return -build(node.operand)
        if isinstance(node, ast.Call):
            return sympy.Abs(build(node.args[0]))
        assert isinstance(node, ast.BinOp)
        x, y = build(node.left), build(node.right)
        makers = {
            ast.Add: lambda: sympy.Add(x, y),
            ast.Sub: lambda: sympy.Add(x, -y),
            ast.Mult: lambda: sympy.Mul(x, y),
            ast.Pow: lambda: sympy.Pow(x, y),
            ast.FloorDiv: lambda: sympy.floor(x / y),
            ast.Mod: lambda: sympy.Mod(x, y),
        }
        return makers[type(node.op)]()

    formula = build(tree)
    ours = values(text, AB)
    for index in range(0, 256, 5):
        assert ours[index] == int(formula.subs({a: index % 16, b: index // 16}))


@pytest.mark.parametrize(
    ("text", "formula"),
    [
        ("x[0] & x[1] | ~x[2] & 1", "(x0 & x1) | ~x2"),
        ("x[0] ^ x[1] ^ x[2] ^ x[3]", "x0 ^ x1 ^ x2 ^ x3"),
        ("(x[0] or x[1]) and not (x[2] and x[3])", "(x0 | x1) & ~(x2 & x3)"),
        ("x[0] if x[3] else x[1] ^ x[2]", "ITE(x3, x0, x1 ^ x2)"),
        ("not x[0] <= x[2]", "~(x0 >> x2)"),
        ("sum(x[i] for i in range(4)) >= 3", "(x0&x1&x2)|(x0&x1&x3)|(x0&x2&x3)|(x1&x2&x3)"),
        ("popcount(x) == 1", "(x0^x1^x2^x3) & ~((x0&x1)|(x2&x3)|((x0|x1)&(x2|x3)))"),
    ],
)
def test_boolean_expressions_agree_with_sympy(text: str, formula: str) -> None:
    """SymPy's Boolean algebra as an independent evaluator, truth table by substitution."""
    symbols = sympy.symbols("x0:4")
    boolean = parse_expr(formula, {str(symbol): symbol for symbol in symbols})
    ours = values(text, Scope({"x": Word("x", 4)}))
    for index in range(16):
        point = {symbol: bool(index >> place & 1) for place, symbol in enumerate(symbols)}
        assert bool(ours[index]) == bool(boolean.subs(point))


def test_values_beyond_64_bits_are_exact() -> None:
    assert values("pow(a, 40)") == [n**40 for n in range(16)]
    assert values("(a * b) << 70 >> 70", AB) == [a * b for b in range(16) for a in range(16)]
    assert values("(a + 1) * 2**60 * 8 // 8 == (a + 1) * 2**60") == [True] * 16
    assert values("(a - 8) * 2**60") == [(n - 8) << 60 for n in range(16)]
    assert values("a * 2**60 * 2 - a * 2**61") == [0] * 16


def test_products_around_the_edge_of_64_bits() -> None:
    scope = Scope({"a": Word("a", 4)}, {"top": 2**63 - 1, "low": -(2**63), "root": 3037000500})
    assert values("(root - 8 + a) * (root - 8 + a)", scope) == [(3037000500 - 8 + n) ** 2 for n in range(16)]
    assert values("top - 7 + a", scope) == [2**63 - 8 + n for n in range(16)]
    assert values("low + 7 - a", scope) == [7 - n - 2**63 for n in range(16)]
    assert values("-(low + a)", scope) == [2**63 - n for n in range(16)]
    assert values("(low + a) // -1", scope) == [2**63 - n for n in range(16)]
    assert values("abs(low + a)", scope) == [2**63 - n for n in range(16)]
    assert values("(low + a) % (a - 16)", scope) == [(n - 2**63) % (n - 16) for n in range(16)]


def test_the_array_is_as_narrow_as_its_values() -> None:
    assert evaluate_all(parse("a > 3", A4)).dtype == np.bool_
    assert evaluate_all(parse("a + 3", A4)).dtype == np.int64
    assert evaluate_all(parse("a << 70 >> 70", A4)).dtype == np.int64
    assert evaluate_all(parse("a << 62", A4)).dtype == object
    assert evaluate_all(parse("2**64", A4)).dtype == object
    assert all(type(value) is int for value in evaluate_all(parse("a << 62", A4)))


def test_a_constant_expression_has_one_value_an_input() -> None:
    assert values("3") == [3] * 16
    assert values("True", Scope({})) == [True]


def test_inputs_that_are_not_needed_never_raise() -> None:
    expression = parse("12 // a", A4)
    found = evaluate_all(expression, np.arange(16) > 0)
    assert found[1:].tolist() == [12 // n for n in range(1, 16)]
    assert evaluate_all(expression, np.zeros(16, dtype=np.bool_)).shape == (16,)
    with pytest.raises(ValueError, match=r"needed: bool of shape \(16,\) wanted, not int64 \(16,\)"):
        evaluate_all(expression, np.arange(16))
    with pytest.raises(ValueError, match=r"not bool \(8,\)"):
        evaluate_all(expression, np.ones(8, dtype=np.bool_))


def test_more_than_24_input_bits_are_refused_in_words() -> None:
    expression = parse("a == 3", Scope({"a": Word("a", 25)}), source="wide.toml", place="[predicate] where")
    with pytest.raises(SpecError, match=r"^wide.toml: \[predicate\] where: 25 input bits are too many .* 24"):
        evaluate_all(expression)


def test_the_reference_takes_words_of_any_width() -> None:
    scope = Scope({"a": Word("a", 200), "k": Word("k", 90, signed=True)})
    a, k = 2**199 + 12345, -(2**89) + 7
    point = {"a": a, "k": k}
    assert (
        evaluate(parse("a * k % 1000003 + a[199] + k[0:90]", scope), point) == a * k % 1000003 + 1 + k % 2**90
    )


def test_the_reference_checks_what_it_is_given() -> None:
    expression = parse("a + cell[0]", Scope({"a": Word("a", 4), "cell": Word("cell", 2, count=2)}))
    assert evaluate(expression, {"a": np.int64(3), "cell": np.array([1, 2])}) == 4
    for point, message in (
        ({"cell": [0, 0]}, "no value is given for the word 'a'"),
        ({"a": 16, "cell": [0, 0]}, "a = 16 does not fit: 0 to 15 is wanted"),
        ({"a": -1, "cell": [0, 0]}, "a = -1 does not fit"),
        ({"a": 0, "cell": [0, 4]}, "does not fit: 0 to 3 is wanted"),
        ({"a": 0, "cell": [0]}, "cell has 2 elements, not 1"),
    ):
        with pytest.raises(SpecError, match=message):
            evaluate(expression, point)


def test_text_may_have_several_lines_and_comments() -> None:
    text = "\n  a > 3   # far out: 1/2 'é'\n  and a < 9\n"
    assert values(text) == [3 < n < 9 for n in range(16)]
    assert values(text.replace("\n", "\r\n")) == [3 < n < 9 for n in range(16)]


def test_a_chain_of_a_thousand_terms_is_no_nesting() -> None:
    assert values(" ^ ".join(["a"] * 1001)) == list(range(16))
    assert values(" or ".join(f"a == {n}" for n in range(0, 5000, 3))) == [n % 3 == 0 for n in range(16)]


def test_deep_nesting_within_the_limit_works() -> None:
    assert values("~" * 98 + "a") == list(range(16))
    deep = "a"
    for _ in range(45):
        deep = f"({deep} + 1 if a < 3 else a)"
    assert values(deep) == [45, 46, 47, *range(3, 16)]


def test_an_expression_can_be_pickled() -> None:
    """Builds in other processes take expressions along."""
    for text in ("a[1] + popcount(a)", " + ".join(["a"] * 1001)):
        expression = parse(text, A4, source="lamps.toml", place="[domain] where")
        copy = pickle.loads(pickle.dumps(expression))
        assert copy == expression
        assert evaluate_all(copy).tolist() == values(text)


def test_names_that_words_and_constants_may_have() -> None:
    for name in ("a", "A", "cell_2", "lamp9", "x", "match", "abso"):
        check_name(name)
    for name in ("", "_a", "9a", "a-b", "a b", "\u00e9", "a\n", "cell[0]", "\uff41"):
        with pytest.raises(SpecError, match="ASCII letters, digits and underscores, a letter first"):
            check_name(name)
    for name in ("if", "lambda", "True", "and"):
        with pytest.raises(SpecError, match="Python keyword"):
            check_name(name)
    for name in (*FUNCTIONS, "Xor", "ITE", "OneHot0", "rotate"):
        with pytest.raises(SpecError, match="is a function of expressions or formulas"):
            check_name(name)
    with pytest.raises(SpecError, match=r"^f.toml: \[inputs\]: 'len' cannot be a name"):
        check_name("len", source="f.toml", place="[inputs]")


def test_a_name_is_a_word_or_a_constant() -> None:
    with pytest.raises(SpecError, match="'a' is both a word and a constant"):
        Scope({"a": Word("a", 2)}, {"a": 3})


def test_an_underscore_may_be_bound_again() -> None:
    scope = Scope({"a": Word("a", 2)}, {"edges": [[5, 1, 2], [6, 3, 4]]})
    assert values("sum(j for _, j, _ in edges) + a", scope) == [4, 5, 6, 7]
    assert values("sum(1 for _ in range(3) for _ in range(a))", scope) == [0, 3, 6, 9]


def test_loop_variables_end_with_their_comprehension() -> None:
    assert values("sum(i for i in range(3)) + sum(i for i in range(4)) + a")[0] == 9
    with pytest.raises(ExpressionError, match="there is no name 'i'"):
        parse("sum(i for i in range(3)) + i", A4)


def test_checking_takes_no_time_that_grows_with_nesting() -> None:
    """Items of mixed lists are looked at by their place, level in level."""
    text = "a"
    for _ in range(45):
        text = f"[{text}, [1]][0]"
    assert values(text) == list(range(16))
