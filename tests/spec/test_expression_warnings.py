"""Comparisons that are constant over the needed inputs give a warning, and no others do."""

from __future__ import annotations

import numpy as np
import pytest

from revsynth.spec.expression import Scope, parse
from revsynth.spec.model import Word
from revsynth.spec.vector import evaluate_all, evaluate_with_warnings

SCOPE = Scope(
    {"a": Word("a", 4), "k": Word("k", 3, signed=True), "cell": Word("cell", 2, count=2)},
    {"edges": [[0, 1], [1, 0]], "limit": 3},
)


def warnings(text: str, needed: np.ndarray | None = None) -> tuple[str, ...]:
    values, found = evaluate_with_warnings(parse(text, SCOPE), needed)
    assert values.tolist() == evaluate_all(parse(text, SCOPE), needed).tolist()
    return found


@pytest.mark.parametrize(
    ("text", "found"),
    [
        ("~a == 5", ["column 1: '~a == 5' is never true over the domain"]),
        ("a >= 0 and k < 2", ["column 1: 'a >= 0' is always true over the domain"]),
        ("0 <= a < 9", ["column 1: '0 <= a' is always true over the domain"]),
        ("(a + 1) * 2 < 99 > k", [
            "column 1: '(a + 1) * 2 < 99' is always true over the domain",
            "column 1: '99 > k' is always true over the domain",
        ]),
        ("(k) < (a + 20) < (a)", [
            "column 1: 'k < a + 20' is always true over the domain",
            "column 1: 'a + 20 < a' is never true over the domain",
        ]),
        ("k < 2 and (a + 1) != 17", ["column 11: '(a + 1) != 17' is always true over the domain"]),
        ("a in [16, 17, 18]", ["column 1: 'a in [16, 17, 18]' is never true over the domain"]),
        ("all(c < 4 for c in cell)", ["column 5: 'c < 4' is always true over the domain"]),
        ("a * a % 3 == 2", ["column 1: 'a * a % 3 == 2' is never true over the domain"]),
        ("cell[0] == cell[0]", ["column 1: 'cell[0] == cell[0]' is always true over the domain"]),
        ("k > 9 or a > 15", [
            "column 1: 'k > 9' is never true over the domain",
            "column 10: 'a > 15' is never true over the domain",
        ]),
        ("a != 0 and 12 // a < 100", ["column 12: '12 // a < 100' is always true over the domain"]),
    ],
)  # fmt: skip
def test_a_constant_comparison_is_told(text: str, found: list[str]) -> None:
    assert list(warnings(text)) == found


@pytest.mark.parametrize(
    "text",
    [
        "a == 5",
        "a < 8 or a >= 8",
        "a != 0 and 12 // a == 3",
        "limit == 3 and a > 1",
        "all(cell[i] != cell[j] for i, j in edges)",
        "sum(1 for i in range(4) if i < 9) == a",
        "any(c > 2 for c in cell if c > 1)",
        "a if k < 0 else k",
        "a < 3 and a < 4",
    ],
)
def test_other_comparisons_are_not(text: str) -> None:
    assert warnings(text) == ()


def test_only_needed_inputs_count() -> None:
    needed = np.arange(1 << SCOPE.input_bits) % 16 < 4
    assert warnings("a < 4", needed) == ("column 1: 'a < 4' is always true over the domain",)
    assert warnings("a < 4") == ()


def test_one_input_gives_no_warning() -> None:
    assert warnings("a < 4", np.arange(1 << SCOPE.input_bits) == 7) == ()


def test_a_warning_names_file_and_place() -> None:
    expression = parse("k > 1 and\n ~a == 5", SCOPE, source="beacons.toml", place="[predicate] where")
    assert evaluate_with_warnings(expression)[1] == (
        "beacons.toml: [predicate] where: line 2, column 2: '~a == 5' is never true over the domain",
    )
