"""Every refusal is reached by its own examples, in one line that says where and what would be right."""

from __future__ import annotations

import re
from typing import Any

import pytest

from revsynth.errors import ExpressionError
from revsynth.spec import refusals
from revsynth.spec.expression import Expression, Scope, parse
from revsynth.spec.layout import decode
from revsynth.spec.model import Word
from revsynth.spec.reference import evaluate
from revsynth.spec.refusals import REFUSALS
from revsynth.spec.vector import evaluate_all

WORDS = (Word("a", 4), Word("k", 3, signed=True), Word("cell", 2, count=5))
CONSTANTS: dict[str, Any] = {
    "edges": [[0, 1], [1, 2], [2, 4]],
    "table": [3, 1, 4, 1, 5],
    "mixed": [3, [1, 2]],
    "empty": [],
    "broken": 1.5,
    "huge": [2**5000],
}
SCOPE = Scope({word.name: word for word in WORDS}, CONSTANTS)
CASES = [(name, text) for name, refusal in REFUSALS.items() for text in refusal.examples]
WHERE = r"beacons\.toml: \[domain\] where: (line \d+, )?column \d+: "


def refused(text: str) -> str:
    """The message for an expression that is refused, whether before or while it is evaluated."""
    with pytest.raises(ExpressionError) as caught:
        evaluate_all(parse(text, SCOPE, source="beacons.toml", place="[domain] where"))
    return str(caught.value)


@pytest.mark.parametrize(("name", "text"), CASES, ids=[f"{name}-{text[:30]!r}" for name, text in CASES])
def test_each_example_is_refused_for_its_reason(name: str, text: str) -> None:
    message = refused(text)
    template = re.sub(r"\\\{.*?\\\}", ".*", re.escape(REFUSALS[name].message))
    assert re.fullmatch(WHERE + template, message), message
    assert "\n" not in message
    assert len(message) < 400


def test_every_refusal_has_examples() -> None:
    assert all(refusal.examples for refusal in REFUSALS.values())
    assert len({refusal.message for refusal in REFUSALS.values()}) == len(REFUSALS)


def fails(expression: Expression, index: int) -> bool:
    """Whether the reference evaluator refuses an input."""
    try:
        evaluate(expression, decode(WORDS, index))
    except ExpressionError:
        return True
    return False


@pytest.mark.parametrize(
    ("name", "text"), [(name, text) for name, text in CASES if "{at}" in REFUSALS[name].message]
)
def test_both_evaluators_name_the_same_first_input(name: str, text: str) -> None:
    expression = parse(text, SCOPE, source="beacons.toml", place="[domain] where")
    message = refused(text)
    first = next(index for index in range(1 << SCOPE.input_bits) if fails(expression, index))
    with pytest.raises(ExpressionError, match=f"^{re.escape(message)}$"):
        evaluate(expression, decode(WORDS, first))


def test_place_is_told_by_line_in_text_of_several_lines() -> None:
    assert refused("a == 1\n  and b == 2\n") == (
        "beacons.toml: [domain] where: line 2, column 7: there is no name 'b'; "
        "the names here are a, k, cell, edges, table, mixed, empty, broken, huge"
    )
    assert "line 3, column 3: '1.5' is not an integer" in refused("\na == 1 or # first\n  1.5 == a")
    assert "line 1, column 8: there is no name 'b'" in refused("(a and b\n)")


def test_column_counts_from_one_behind_leading_blanks() -> None:
    assert "column 3: there is no name 'x'" in refused("  x == 1")
    assert "column 3: there is no name 'x'" in refused("\t\tx == 1")


def test_division_by_zero_names_the_input_in_words() -> None:
    with pytest.raises(ExpressionError, match=r"^column 1: division by zero at a = 0, k = 3; guard it"):
        evaluate_all(parse("12 // (a * 4 + 3 - k)", Scope({"a": Word("a", 2), "k": Word("k", 2)})))


def test_an_expression_without_words_names_no_input() -> None:
    with pytest.raises(ExpressionError, match=r"^column 1: division by zero; guard it"):
        evaluate_all(parse("1 // 0", Scope({})))


def test_long_numbers_are_shown_by_their_size() -> None:
    with pytest.raises(ExpressionError, match=r"bit about 2\*\*3000 of a does not exist"):
        parse("a[2**3000]", SCOPE)
    with pytest.raises(ExpressionError, match=r"negative exponent about -2\*\*70 at"):
        evaluate_all(parse("2 ** (-2 ** 70)", SCOPE))


def test_long_parts_are_cut_short() -> None:
    with pytest.raises(ExpressionError, match=r"'\[a, a, a, a, .*\.\.\.' is a list") as caught:
        parse(f"1 + [{', '.join('a' * 100)}]", SCOPE)
    assert len(str(caught.value)) < 180


def test_a_guarded_operation_is_not_refused() -> None:
    for text in (
        "a == 0 or 12 // a > 1",
        "a != 0 and 12 // a",
        "0 if a == 0 else 12 // a",
        "0 < a < 12 // a",
    ):
        evaluate_all(parse(text, SCOPE))


def test_messages_say_what_would_be_right() -> None:
    assert refusals.TRUE_DIVISION.message.endswith("write // for whole numbers")
    assert "write == to compare" in refused("a = 3")
    assert "write 'and' for &&" in refused("a && k")
    assert "takes 2 to 3 arguments, not 1" in refused("pow(a)")
    assert "names here are a, k, cell, edges" in refused("lamp == 3")
    assert "functions are abs, all, any, distinct, len" in refused("median(a)")
