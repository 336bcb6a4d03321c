"""The proof for wide specs, put to small ones: it must say what running every input says, faults included."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import replace

import pytest

import revsynth
from revsynth.options import Oracle
from revsynth.qasm import Program, read
from revsynth.spec.expectation import Expectation
from revsynth.spec.layout import encode
from revsynth.spec.model import Cover, Outputs, Predicate, Spec, Word
from revsynth.spec.understand import Understanding, understand
from revsynth.verification.decide import decide
from revsynth.verification.evidence import Counterexample
from revsynth.verification.matching import Roles, match
from revsynth.verification.proof.telling import WideTeller
from revsynth.verification.proof.wide import WideDecision, decide_wide
from tests.verification.mutants import Mutant, mutants, some_mutants
from tests.verification.oracles import EXAMPLES, Example


def wide(
    understanding: Understanding, program: Program, roles: Roles
) -> tuple[WideDecision, Counterexample | None]:
    """The decision by proof, and the counterexample."""
    bare = replace(understanding, tabulated=None)
    decision = decide_wide(bare, program.circuit, roles, lambda _: None)
    if decision.failure is None:
        return decision, decision.told
    assert decision.lifted is not None
    assert decision.translation is not None
    teller = WideTeller(bare, program.circuit, roles, decision.lifted, decision.translation)
    return decision, teller.tell(decision.failure)


def check(spec: Spec, program: Program, oracle: Oracle | None, faults: Iterable[Mutant]) -> list[int]:
    """Both verdicts on the circuit and on its mutants; how many were right, wrong, and left undecided."""
    understanding = understand(spec)
    roles = match(understanding, program, oracle, None)
    circuits = [program.circuit, *(mutant.circuit for mutant in faults)]
    counts = [0, 0, 0]
    for circuit in circuits:
        exact = decide(circuit, roles, understanding.function, lambda _: None)
        assert exact.holds is not None
        decision, told = wide(understanding, replace(program, circuit=circuit), roles)
        if decision.holds is None:
            counts[2] += 1
            assert decision.level in ("sampled", "none")
            assert decision.detail
            continue
        assert decision.holds == exact.holds, (decision, exact)
        counts[not exact.holds] += 1
        if exact.holds:
            assert decision.level == "proved"
            assert decision.global_phase == pytest.approx(exact.global_phase, abs=1e-9)
        else:
            assert told is not None
            check_told(understanding, told, roles)
    return counts


def check_told(understanding: Understanding, told: Counterexample, roles: Roles) -> None:
    """What a counterexample expects is what the spec says at its input."""
    words = {word.name for word in understanding.spec.inputs}
    if not isinstance(told.inputs, dict):
        return
    index = encode(understanding.spec.inputs, {n: v for n, v in told.inputs.items() if n in words})
    bits = Expectation(understanding)(index)
    if told.kind == "phase" and roles.oracle == "phase" and told.expected["phase"] in (1, -1):
        assert bits[0] == (told.expected["phase"] == -1)
    if told.kind == "output":
        begun = [told.inputs.get(word.name, 0) for word in understanding.outputs or (Word("mark", 1),)]
        values, place = [], 0
        for word, first in zip(understanding.outputs or (Word("mark", 1),), begun, strict=True):
            value = sum((bit or 0) << i for i, bit in enumerate(bits[place : place + word.bits]))
            start = first if roles.oracle == "bit" else 0
            values.append(value ^ (start & ((1 << word.bits) - 1)))
            place += word.bits
        if None not in bits:
            for word, value in zip(understanding.outputs or (Word("mark", 1),), values, strict=True):
                if word.name in told.expected:
                    assert told.expected[word.name] & ((1 << word.bits) - 1) == value
                    assert told.expected[word.name] != told.got[word.name]


@pytest.fixture(autouse=True)
def _fewer_random_inputs(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr("revsynth.verification.proof.samples.RANDOM", 64)


@pytest.mark.parametrize("example", EXAMPLES, ids=lambda example: example.name)
def test_examples_by_hand_and_their_mutants(example: Example) -> None:
    counts = check(example.spec, example.program(), example.oracle, mutants(example.circuit))
    if "table" in str(example.spec.body) and not isinstance(example.spec.body, Outputs):
        return
    assert counts[0] or counts[2]


DOMAIN = "a != 3 and a + b < 11"
PREDICATE = revsynth.predicate("(a * b + 1) % 4 == 1", inputs={"a": 3, "b": 3}, domain=DOMAIN)
SUM = revsynth.outputs(
    {"total": {"value": "a + k", "bits": 4, "signed": True}, "odd": {"value": "parity(a & k)", "bits": 1}},
    inputs={"a": 2, "k": {"bits": 3, "signed": True}},
)
PARTLY = revsynth.outputs(
    {"rest": {"value": "a % b", "bits": 2}}, inputs={"a": 3, "b": 2}, domain="b != 0 and a >= b"
)
LOOSE = Spec(
    (Word("v", 4),),
    Outputs(cover=Cover(4, 2, "fdr", (("1-0-", "1-"), ("01-1", "01"), ("10-1", "-0"), ("0000", "0~")))),
)
MARKED = Spec(
    (Word("v", 4),), Predicate(cover=Cover(4, 1, "fd", (("1-01", "1"), ("-11-", "-"), ("0-1-", "1"))))
)
CLOCK = revsynth.permutation(inputs={"a": 3, "b": 2}, map={"a": "(a + b) % 7"}, domain="a < 7")
FORMULA = revsynth.predicate(formula="Majority(a[0], a[1], a[2]) ^ a[3] & ~a[0]", inputs={"a": 4})

CASES = [
    (spec, oracle, gates, uncompute)
    for spec, oracles in [
        (PREDICATE, ("phase", "bit", "fresh", "compute", "embedded")),
        (SUM, ("bit", "fresh", "compute", "embedded")),
        (PARTLY, ("bit", "compute", "embedded")),
        (LOOSE, ("bit", "fresh", "embedded")),
        (MARKED, ("phase", "bit", "compute")),
        (CLOCK, ("inplace",)),
        (FORMULA, ("phase", "compute")),
    ]
    for oracle in oracles
    for gates, uncompute in [
        ("cascade", "unitary"),
        ("toffoli", "measured"),
        ("clifford+t", "unitary"),
        ("clifford+t", "measured"),
    ]
]


QUICK = range(0, len(CASES), 3)
"""Every third: all forms, and all ways to build with some of them."""


@pytest.mark.parametrize(
    "number", [pytest.param(n, marks=() if n in QUICK else pytest.mark.slow) for n in range(len(CASES))]
)
def test_built_circuits_and_some_mutants(number: int) -> None:
    spec, oracle, gates, uncompute = CASES[number]
    built = revsynth.build(spec, oracle=oracle, gates=gates, uncompute=uncompute, seed=0)
    program = read(built.text("openqasm3"))
    counts = check(spec, program, oracle, some_mutants(program.circuit, 10, number))
    assert counts[0]
