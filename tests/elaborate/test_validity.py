"""Wide specs are refused where they are undefined, with the error that a small spec gets, and looked over."""

from __future__ import annotations

import pytest

from revsynth.elaborate import elaborate
from revsynth.elaborate.overview import overview, text
from revsynth.elaborate.validity import check_valid
from revsynth.errors import ExpressionError, SpecError
from revsynth.spec.model import Spec
from revsynth.spec.toml_reader import parse_toml
from revsynth.spec.understand import understand


def predicate(where: str, domain: str = "") -> Spec:
    """A predicate on two words of 20 bits."""
    limits = f'[domain]\nwhere = "{domain}"\n' if domain else ""
    return parse_toml(f'[inputs]\na = 20\nb = 20\n{limits}[predicate]\nwhere = "{where}"')


def test_a_division_by_zero_inside_the_domain_names_an_input() -> None:
    spec = predicate("a // b == 3", domain="a > 5")
    with pytest.raises(ExpressionError, match=r"division by zero.* at a = \d+, b = 0"):
        check_valid(spec, elaborate(spec))


@pytest.mark.parametrize(
    ("where", "domain"),
    [("a // b == 3", "b > 0"), ("b != 0 and a // b == 3", ""), ("a + b == 3", "a * b == 12")],
)
def test_what_is_never_reached_is_no_error(where: str, domain: str) -> None:
    spec = predicate(where, domain)
    check_valid(spec, elaborate(spec))


def test_a_condition_is_0_or_1() -> None:
    spec = predicate("a & b")
    with pytest.raises(ExpressionError, match=r"a condition is true or false.*!= 0"):
        check_valid(spec, elaborate(spec))


def test_an_empty_domain_is_refused() -> None:
    spec = predicate("a == b", domain="a + b == 3 and a - b == 2")
    with pytest.raises(SpecError, match="no input satisfies it"):
        check_valid(spec, elaborate(spec))


def test_marked_inputs_are_found_and_are_marked() -> None:
    spec = predicate("(a + b) % 2**20 == 12345 and a > b", domain="a % 2 == 0")
    seen = overview(understand(spec), elaborate(spec).function)
    assert len(seen.marked_found) == 4
    assert seen.none_marked is False
    for values in seen.marked_found:
        a, b = values["a"], values["b"]
        assert (a + b) % 2**20 == 12345
        assert a > b
        assert a % 2 == 0
    assert "found by a solver" in text(seen)
    assert seen.to_json()["marked"] is None


def test_nothing_marked_is_proved() -> None:
    spec = predicate("a * 2 == b * 2 + 1")
    seen = overview(understand(spec), elaborate(spec).function)
    assert seen.none_marked
    assert seen.to_json()["marked"] == 0
    assert "no input is marked" in text(seen)


def test_inputs_without_effect_are_named() -> None:
    spec = predicate("a > 12345 and b[3] == 1")
    seen = overview(understand(spec), elaborate(spec).function)
    assert "b[0]" in seen.without_effect
    assert "b[3]" not in seen.without_effect


def test_outputs_have_an_overview_too() -> None:
    spec = parse_toml('[inputs]\na = 30\n[outputs]\nnext = { value = "a + 1", bits = 31 }')
    seen = overview(understand(spec), elaborate(spec).function)
    assert "30 input bits to 31 output bits" in text(seen)
    assert seen.to_json()["network"]["ands"] == 29
