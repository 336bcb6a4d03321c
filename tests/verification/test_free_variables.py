"""That variables left out of a CNF follow from the free ones is proved; a wrong definition is noticed."""

from __future__ import annotations

from dataclasses import replace

import pytest

import revsynth
from revsynth.elaborate.free_spec import free_spec
from revsynth.spec.dimacs import parse_dimacs
from revsynth.spec.model import Predicate, Spec
from revsynth.verification.proof.free_variables import check_free_variables

ADDER = """p cnf 6 12
-4 1 0
-4 2 0
4 -1 -2 0
-5 1 2 0
-5 -1 -2 0
5 -1 2 0
5 1 -2 0
-6 4 5 0
6 -4 0
6 -5 0
6 3 0
-3 1 0
"""


def adder() -> Spec:
    """Sum and carry of two bits, of which one is 1, over the free variables."""
    return free_spec(parse_dimacs(ADDER, "pair.cnf")).spec


def test_definitions_are_proved() -> None:
    (line,) = check_free_variables(adder())
    assert "that are not free follow from the" in line
    assert "proved by a solver" in line


def test_other_specs_have_nothing_to_prove() -> None:
    assert check_free_variables(revsynth.truth_table("0110", inputs={"x": 2})) == []


def test_a_wrong_definition_is_noticed() -> None:
    spec = adder()
    assert isinstance(spec.body, Predicate)
    origin = spec.body.free_of
    assert origin is not None
    defined = next(v for v in range(1, 7) if v not in origin.variables)
    values = list(origin.values)
    values[defined - 1] ^= 1
    broken = replace(spec.body, free_of=replace(origin, values=tuple(values)))
    with pytest.raises(AssertionError, match=f"variable {defined} of pair.cnf does not follow"):
        check_free_variables(replace(spec, body=broken))


def test_a_build_over_free_variables_says_which_they_are() -> None:
    built = revsynth.build(adder())
    found = built.to_json()
    assert built.evidence.level == "exhaustive"
    assert any("not free follow" in link for link in built.evidence.links)
    assert found["marked"] == sum(
        all(any((x >> abs(v) - 1 & 1) == (v > 0) for v in clause) for clause in clauses())
        for x in range(1 << 6)
    )
    assert len(found["v_bits"]) == found["inputs"]["v"]["bits"] < 6
    assert "--free-inputs" in built.text()


def clauses() -> list[list[int]]:
    """The clauses as the file has them."""
    return [[int(word) for word in line.split()[:-1]] for line in ADDER.splitlines()[1:]]
