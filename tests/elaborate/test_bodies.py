"""Every kind of spec body: the network against the table that `understand` makes of it."""

from __future__ import annotations

import random
from pathlib import Path
from typing import Any

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from revsynth.elaborate import elaborate, look_up
from revsynth.errors import SpecError
from revsynth.logic.network_simulation import tabulate
from revsynth.spec.dimacs import parse_dimacs
from revsynth.spec.model import Cover, Output, Outputs, Permutation, Predicate, Spec, Word
from revsynth.spec.pla import parse_pla
from revsynth.spec.read import read_spec
from revsynth.spec.understand import understand
from tests.elaborate.samples import run

SPECS = Path(__file__).parents[2] / "specs"
WORDS = (Word("a", 4), Word("k", 3, signed=True), Word("lamp", 1))
FORMULAS = (
    "a[0] & ~a[1] | (a[2] ^ a[3])",
    "Majority(a[0], a[1], a[2], a[3], k[0], k[1], lamp)",
    "Majority(a[0], a[1], a[2], a[3])",
    "OneHot(a[0], a[1], a[2], a[3], lamp) or OneHot0(k[0], k[1], k[2], a[0])",
    "ITE(a[0], Xor(a[1], k[2]), Not(lamp)) => a[2] <=> k[1]",
    "a[0] != a[1] and not (a[2] == lamp) or And(a[0], k[0], k[1]) ? 1 : Or(false, a[3])",
)


def agrees(spec: Spec) -> None:
    """Values and care are those of the table; no check fails inside the domain."""
    wanted = understand(spec)
    function = wanted.function
    found = elaborate(spec)
    assert found.outputs == wanted.outputs
    anywhere = np.bitwise_or.reduce(function.care, axis=0)
    care = anywhere if found.function.care is None else tabulate(found.function.care)[0]
    assert np.array_equal(care, anywhere)
    assert np.array_equal(tabulate(found.function.values) & function.care, function.values)
    assert not any(tabulate(check.network).any() for check in found.checks)


def spec_of(body: Any, **more: Any) -> Spec:
    return Spec(WORDS, body, **more)


@pytest.mark.parametrize("path", sorted(SPECS.iterdir()), ids=lambda path: path.name)
def test_the_specs_that_come_with_the_project(path: Path) -> None:
    spec = read_spec(str(path))
    if spec.input_bits > 16:
        elaborate(spec)
    else:
        agrees(spec)


@pytest.mark.parametrize("text", FORMULAS)
def test_formulas(text: str) -> None:
    agrees(spec_of(Predicate(formula=text)))


@pytest.mark.parametrize(
    "where",
    [
        "a * k == 12",
        "a % 3 == k % 3 and lamp",
        "lamp",
        "a[k & 3] ^ lamp",
        "any(a == i * i for i in range(5))",
    ],
)
@pytest.mark.parametrize("domain", [None, "a != 0", "popcount(a) == 2 or k > 1"])
def test_predicates_with_domains(where: str, domain: str | None) -> None:
    agrees(spec_of(Predicate(where=where), domain=domain))


def test_outputs_of_every_width() -> None:
    words = (
        Output("total", "a + k", signed=True),
        Output("low", "a * a - k", bits=3),
        Output("long", "k", bits=7, signed=True),
        Output("flag", "a < 5"),
        Output("code", table=tuple(None if x % 5 == 0 else x * 7 % 32 for x in range(256)), bits=5),
    )
    agrees(spec_of(Outputs(words)))
    agrees(spec_of(Outputs(words[:4]), domain="12 // (a - 3) > 1 if a > 3 else k < 0"))


@given(st.integers(1, 9), st.integers(0, 2**32), st.sampled_from([0.0, 0.3, 0.9]), st.integers(1, 5))
def test_tables(inputs: int, seed: int, free: float, bits: int) -> None:
    draw = random.Random(seed)
    entries = tuple(None if draw.random() < free else draw.randrange(1 << bits) for _ in range(1 << inputs))
    agrees(Spec((Word("v", inputs),), Outputs((Output("f", table=entries, bits=bits),))))
    ones = tuple(None if entry is None else entry & 1 for entry in entries)
    agrees(Spec((Word("v", inputs),), Predicate(table=ones)))


@given(st.integers(1, 6), st.integers(0, 2**32))
def test_permutations_by_values(inputs: int, seed: int) -> None:
    draw = random.Random(seed)
    images: list[int | None] = draw.sample(range(1 << inputs), 1 << inputs)
    agrees(Spec((Word("v", inputs),), Permutation(values=tuple(images))))
    partly = tuple(image if draw.random() < 0.7 else None for image in images)
    agrees(Spec((Word("v", inputs),), Permutation(values=partly)))


@pytest.mark.parametrize(
    ("new", "domain"),
    [
        ({"a": "(a + 3) % 16"}, None),
        ({"a": "(a * 5) % 11"}, "a < 11"),
        ({"k": "~k", "lamp": "lamp ^ (k < 0)"}, None),
        ({"a": "a ^ (k & 7)", "lamp": "1 - lamp"}, None),
    ],
)
def test_maps(new: dict[str, str], domain: str | None) -> None:
    agrees(spec_of(Permutation(map=new), domain=domain))
    agrees(Spec((Word("cell", 3, count=3),), Permutation(map={"cell[1]": "cell[0] ^ cell[1]"})))


@given(st.sampled_from(["f", "fd", "fr", "fdr"]), st.integers(0, 2**32))
def test_covers(kind: Any, seed: int) -> None:
    draw = random.Random(seed)
    rows = tuple(
        ("".join(draw.choice("01---") for _ in range(5)), "".join(draw.choice("01-~") for _ in range(2)))
        for _ in range(draw.randrange(7))
    )
    cover = Cover(5, 2, kind, rows)
    spec = Spec((Word("v", 5),), Outputs(cover=cover))
    if any(tabulate(check.network).any() for check in elaborate(spec).checks):
        found, wanted = error_of(spec)
        assert wanted in found
    else:
        agrees(spec)


def test_files_of_clauses_and_covers() -> None:
    agrees(parse_dimacs("p cnf 5 4\n1 -2 3 0\n-1 4 0\nx2 3 -5 0\n-3 -4 5 0\n"))
    agrees(parse_pla(".i 3\n.o 1\n11- 1\n-00 1\n010 -\n.e\n"))


def error_of(spec: Spec) -> tuple[list[str], str]:
    """The errors at the inputs where a check fails, and what the table way says."""
    found = []
    for check in elaborate(spec).checks:
        failing = [x for x, bit in enumerate(run(check.network, range(1 << spec.input_bits))) if bit]
        found += [str(check.error(index)) for index in failing]
        assert check.message.startswith("spec: ")
    with pytest.raises(SpecError) as caught:
        understand(spec)
    return found, str(caught.value)


@pytest.mark.parametrize(
    "spec",
    [
        spec_of(Predicate(where="12 // a == k")),
        spec_of(Predicate(where="a > 3 and 1 << k == 2")),
        spec_of(Predicate(where="a - k")),
        spec_of(Predicate(where="a"), domain="a != 1"),
        spec_of(Predicate(where="a == 1"), domain="a % k == 1"),
        spec_of(Predicate(where="a[k] == 1"), domain="lamp == 1"),
        spec_of(Outputs((Output("f", "[3, 1, 4][a]", bits=3),))),
        spec_of(Permutation(map={"a": "a + 1"})),
        spec_of(Permutation(map={"k": "k - 1"}), domain="k < 3"),
    ],
)
def test_what_is_wrong_is_named_in_the_same_words(spec: Spec) -> None:
    found, wanted = error_of(spec)
    assert wanted in found


def test_nothing_is_wrong_outside_the_domain() -> None:
    agrees(spec_of(Predicate(where="12 // a == k"), domain="a > 0"))
    agrees(spec_of(Permutation(map={"a": "a + 1 if a < 5 else 0"}), domain="a < 6"))
    (check,) = elaborate(spec_of(Predicate(where="12 // a == 3"))).checks
    with pytest.raises(ValueError, match="nothing is wrong at a = 1"):
        check.error(1)


def test_constant_comparisons_are_told_where_structure_shows_them() -> None:
    found = elaborate(spec_of(Predicate(where="~a == 5 or a + k < 99")))
    assert found.warnings == understand(spec_of(Predicate(where="~a == 5 or a + k < 99"))).warnings
    assert not elaborate(spec_of(Predicate(where="a == 5 or any(a < i for i in range(3))"))).warnings


def test_widths_left_out_are_refused_beyond_tables() -> None:
    wide = (Word("a", 40), Word("b", 40))
    with pytest.raises(SpecError, match="bits = 41 holds every value"):
        elaborate(Spec(wide, Outputs((Output("f", "a + b"),))))
    with pytest.raises(SpecError, match="no input satisfies it"):
        elaborate(Spec(wide, Predicate(where="a == b"), domain="a < 0"))
    with pytest.raises(SpecError, match="more than 8,000,000 gates"):
        elaborate(Spec((Word("a", 4000),), Predicate(where="a * a * a % 2**4096 == 1")))
    with pytest.raises(SpecError, match="negative exponent"):
        elaborate(Spec(wide, Predicate(where="pow(a, -1, b) == 1")))


def test_tables_that_would_become_too_large_are_refused(monkeypatch: pytest.MonkeyPatch) -> None:
    draw = random.Random(1)
    spec = Spec((Word("v", 12),), Predicate(table=tuple(draw.randrange(2) for _ in range(1 << 12))))
    assert elaborate(spec).function.values.ands <= 130
    monkeypatch.setattr(look_up, "MOST_GATES", 1000)
    with pytest.raises(SpecError, match="a table of 4096 entries would need a network of more than"):
        elaborate(spec)


def test_steps_are_a_function_and_a_program() -> None:
    elaboration = elaborate(spec_of(Permutation(steps=("a += 1",))))
    assert elaboration.program is not None
    assert len(elaboration.program.steps) == 1
    assert elaboration.function.values.ands == max(elaboration.outputs[0].bits - 2, 0)
