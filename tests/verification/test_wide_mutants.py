"""Broken circuits for wide specs are refused with a counterexample that is one, never called right."""

from __future__ import annotations

import random
from dataclasses import replace

import pytest

import revsynth
from revsynth.circuit.model import Circuit
from revsynth.options import Oracle
from revsynth.qasm import Program, read
from revsynth.spec.expectation import Expectation
from revsynth.spec.model import Clauses, Output, Outputs, Predicate, Spec, Word
from revsynth.spec.netlist import Netlist, NetlistGate
from revsynth.spec.understand import understand
from revsynth.verification import verify_program
from revsynth.verification.evidence import Counterexample
from revsynth.verification.matching import match
from revsynth.verification.proof.running import Runner
from tests.verification.mutants import some_mutants
from tests.verification.test_wide_against_narrow import check_told


@pytest.fixture(autouse=True)
def _fewer_random_inputs(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr("revsynth.verification.proof.samples.RANDOM", 4096)
    monkeypatch.setattr("revsynth.verification.proof.wide.FIRST_CONFLICTS", 10_000)
    monkeypatch.setattr("revsynth.verification.proof.wide.LAST_CONFLICTS", 20_000)


def planted_clauses(variables: int, count: int, seed: int) -> Clauses:
    """Random clauses of three variables, all satisfied by one planted assignment."""
    draw = random.Random(seed)
    planted = [draw.getrandbits(1) for _ in range(variables)]
    clauses: list[tuple[int, ...]] = []
    while len(clauses) < count:
        chosen = draw.sample(range(1, variables + 1), 3)
        clause = tuple(v if draw.getrandbits(1) else -v for v in chosen)
        if any(planted[abs(literal) - 1] == (literal > 0) for literal in clause):
            clauses.append(clause)
    return Clauses(variables, tuple(clauses))


def random_netlist(inputs: int, gates: int, outputs: int, seed: int) -> Netlist:
    """Gates of two operands from the last forty signals."""
    draw = random.Random(seed)
    made = []
    for number in range(inputs + 1, inputs + 1 + gates):
        low = max(number - 40, 1)
        one, other = draw.sample(range(low, number), 2)
        signs = draw.getrandbits(1), draw.getrandbits(1)
        kind = draw.choice(["and", "or", "xor"])
        made.append(NetlistGate(kind, (2 * one + signs[0], 2 * other + signs[1])))  # type: ignore[arg-type]
    last = inputs + gates
    return Netlist(inputs, tuple(made), tuple(2 * (last - i) for i in range(outputs)))


def netlist_spec(inputs: int, gates: int, outputs: int, seed: int) -> Spec:
    netlist = random_netlist(inputs, gates, outputs, seed)
    return Spec((Word("v", inputs),), Outputs((Output("f", bits=outputs),), netlist=netlist))


PRODUCT = revsynth.outputs({"f": {"value": "a * b + c", "bits": 18}}, inputs={"a": 8, "b": 9, "c": 9})
SUM = revsynth.outputs(
    {"f": {"value": "a + k", "bits": 34, "signed": True}},
    inputs={"a": 32, "k": {"bits": 30, "signed": True}},
    domain="a % 3 != 1",
)
SPECS: dict[str, tuple[Spec, Oracle]] = {
    "sum is": (revsynth.predicate("(a + b) % 2**32 == 2863311530", inputs={"a": 32, "b": 32}), "phase"),
    "order": (revsynth.predicate("a < b <= c + 5", inputs={"a": 16, "b": 16, "c": 16}), "bit"),
    "product is": (revsynth.predicate("a * b == 58483", inputs={"a": 13, "b": 14}), "phase"),
    "product": (PRODUCT, "bit"),
    "sum": (SUM, "fresh"),
    "count": (revsynth.predicate("popcount(a) == 17 and a[3]", inputs={"a": 34}), "compute"),
    "clauses": (Spec((Word("v", 30),), Predicate(clauses=planted_clauses(30, 120, 5))), "phase"),
    "netlist": (netlist_spec(30, 90, 6, 1), "bit"),
    "clock": (revsynth.permutation(inputs={"a": 28}, map={"a": "(a + 12345) % 2**28"}), "inplace"),
}  # fmt: skip
SETTINGS = [("cascade", "unitary"), ("clifford+t", "measured")]


def built(spec: Spec, oracle: Oracle, gates: str, uncompute: str) -> Program:
    made = revsynth.build(spec, oracle=oracle, gates=gates, uncompute=uncompute, effort="low")
    assert made.evidence.level == "proved"
    return read(made.text("openqasm3"))


def refused(spec: Spec, program: Program, circuit: Circuit, oracle: Oracle) -> Counterexample | None:
    """The counterexample for a changed circuit; None where it is undecided, or proved to be right still.

    Some changes change nothing, such as an X on a qubit that is measured next in the X basis. What is called
    right is run at many inputs, and must be.
    """
    broken = replace(program, circuit=circuit)
    verdict = verify_program(spec, broken, oracle=oracle)
    understanding = understand(spec)
    roles = match(understanding, broken, oracle, None)
    if verdict.holds:
        index = next(x for x in range(64) if Expectation(understanding)(x)[0] is not None)
        count, told = Runner(understanding, circuit, roles, index).sample([0, index], lambda _: None)
        assert (count > 100, told) == (True, None)
        return None
    if verdict.holds is None:
        assert verdict.evidence.detail
        return None
    assert verdict.counterexample is not None
    check_told(understanding, verdict.counterexample, roles)
    return verdict.counterexample


@pytest.mark.parametrize("settings", SETTINGS, ids=lambda settings: " ".join(settings))
@pytest.mark.parametrize("name", SPECS)
def test_broken_circuits_are_refused(name: str, settings: tuple[str, str]) -> None:
    spec, oracle = SPECS[name]
    try:
        program = built(spec, oracle, *settings)
    except revsynth.RevsynthError:
        assert name == "clock"
        return
    told = [refused(spec, program, mutant.circuit, oracle) for mutant in some_mutants(program.circuit, 12, 3)]
    assert told.count(None) <= len(told) // 2


@pytest.mark.slow
@pytest.mark.parametrize("settings", SETTINGS, ids=lambda settings: " ".join(settings))
@pytest.mark.parametrize("name", SPECS)
def test_many_broken_circuits_are_refused(name: str, settings: tuple[str, str]) -> None:
    spec, oracle = SPECS[name]
    program = built(spec, oracle, *settings)
    for mutant in some_mutants(program.circuit, 100, 4):
        refused(spec, program, mutant.circuit, oracle)


RARE = [
    ("a == 123456789012 and b == 77", "a == 123456789012 and b == 78", {"a": 40, "b": 20}),
    ("a * b == 58483 and a > 1", "a * b == 58483 and a > 239", {"a": 12, "b": 13}),
    ("(a ^ b) == 2**39 + 5 and a + b == 2**40 + 3", "a + b == 2**40 + 3 and 0 * b", {"a": 40, "b": 40}),
    ("a + b + c == 3 * 2**20 - 3", "a + b + c == 3 * 2**20 - 4", {"a": 20, "b": 20, "c": 20}),
]  # fmt: skip


@pytest.mark.parametrize("case", RARE, ids=lambda case: case[0])
def test_faults_in_rare_predicates_are_found(case: tuple[str, str, dict[str, int]]) -> None:
    """Random inputs alone would never meet them."""
    right, wrong, inputs = case
    spec = revsynth.predicate(right, inputs=inputs)
    text = wrong.replace("and 0 * b", "and b * 0 == 1")
    other = revsynth.build(revsynth.predicate(text, inputs=inputs), effort="low", gates="toffoli")
    program = read(other.text("openqasm3"))
    told = refused(spec, program, program.circuit, "phase")
    assert told is not None or "2**39" in right
    if told is not None:
        assert told.kind == "phase"


def test_a_constant_phase_counts_where_it_is_to_be_exact() -> None:
    spec = revsynth.predicate("a + b == 12345", inputs={"a": 20, "b": 20})
    text = revsynth.build(spec, gates="clifford+t").text("openqasm3") + "gphase(pi);\n"
    verdict = verify_program(spec, read(text))
    assert verdict.holds
    assert abs(verdict.global_phase) == pytest.approx(3.14159265)
    exact = verify_program(spec, read(text), exact_phase=True)
    assert exact.holds is False
    assert exact.counterexample is not None
    assert exact.counterexample.kind == "phase"
    assert exact.counterexample.expected["phase"] != exact.counterexample.got["phase"]


def test_what_the_spec_leaves_undefined_is_an_error_of_the_spec() -> None:
    fine = revsynth.predicate("b != 0 and a // b == 3", inputs={"a": 20, "b": 8})
    text = revsynth.build(fine, effort="low", gates="toffoli").text("openqasm3")
    spec = revsynth.predicate("a // b == 3", inputs={"a": 20, "b": 8})
    with pytest.raises(revsynth.RevsynthError, match="b = 0"):
        verify_program(spec, read(text))


def test_undecided_says_what_the_sample_supports(monkeypatch: pytest.MonkeyPatch) -> None:
    """The circuit multiplies the other way round, and the solver is given next to no time."""
    inputs = {"a": 24, "b": 24}
    other = revsynth.predicate("b * a == 58483", inputs=inputs)
    text = revsynth.build(other, effort="low", gates="toffoli", unverified=True).text("openqasm3")
    spec = revsynth.predicate("a * b == 58483", inputs=inputs)
    monkeypatch.setattr("revsynth.verification.proof.sweep.STEP_CONFLICTS", 1)
    monkeypatch.setattr("revsynth.verification.proof.sweep.FEW_CONFLICTS", 1)
    monkeypatch.setattr("revsynth.verification.proof.wide.FIRST_CONFLICTS", 1)
    monkeypatch.setattr("revsynth.verification.proof.wide.LAST_CONFLICTS", 2)
    verdict = verify_program(spec, read(text))
    assert verdict.holds is None
    assert verdict.evidence.level == "sampled"
    assert "at 95 % confidence at most 3 in 4096" in verdict.evidence.detail
    assert "no proof" in verdict.evidence.detail


def test_an_empty_domain_is_an_error() -> None:
    spec = revsynth.predicate("a > 3", inputs={"a": 30}, domain="a + 1 == a")
    with pytest.raises(revsynth.RevsynthError, match="no input satisfies it"):
        verify_program(spec, read("OPENQASM 3.0;\nqubit[30] a;\n"))


@pytest.mark.slow
def test_a_product_modulo_a_number_is_run_at_every_input() -> None:
    """Scratch ends clean because 7 times its inverse is 1: no solver sees that, all inputs show it."""
    spec = revsynth.permutation(map={"a": "(a * 7) % 33554393"}, inputs={"a": 25}, domain="a < 33554393")
    found = revsynth.build(spec, uncompute="measured")
    assert found.evidence.level == "proved"
    assert any("at every value of the inputs" in link for link in found.evidence.links)
