"""Breaking any single gate must be caught; what is not caught is equivalent, for a reason checked by hand."""

from __future__ import annotations

from collections import Counter

import pytest

import revsynth
from revsynth.circuit.model import Kind
from revsynth.options import Oracle
from revsynth.qasm import read
from revsynth.spec.model import Spec
from revsynth.spec.understand import understand
from revsynth.verification import verify_program
from revsynth.verification.matching import match
from tests.verification.mutants import Mutant, mutants
from tests.verification.oracles import EXAMPLES, Example
from tests.verification.slow_verdict import slow_verdict

SYMMETRIC = "a controlled Z has no distinguished target (common practice)"
FLIPPED_BEFORE_ERASURE = (
    "a NOT on a product that is erased next by a measurement in the X basis: the outcome 1 gets the constant "
    "phase -1, which nobody can observe"
)

NOT_ON_PLUS = "the line is preset to 0 and has just been through H, and a NOT leaves |0> + |1> as it is"

EQUIVALENT: dict[str, dict[tuple[int, str], str]] = {
    "lamp code": {
        (11, "control 0 and target exchanged"): SYMMETRIC,
        (14, "control 0 and target exchanged"): SYMMETRIC,
    },
    "half adder": {(1, "left out"): NOT_ON_PLUS, (1, "polarity of control 0"): NOT_ON_PLUS},
    "lamp code, both ways": {(9, "control 0 and target exchanged"): SYMMETRIC},
    "locker mark": {
        (26, "polarity of control 0"): FLIPPED_BEFORE_ERASURE,
        (29, "control 0 and target exchanged"): SYMMETRIC,
    },
    "beacon cascade": {
        (2, "control 0 and target exchanged"): SYMMETRIC,
        (3, "control 0 and target exchanged"): SYMMETRIC,
        (5, "control 0 and target exchanged"): SYMMETRIC,
        (6, "control 0 and target exchanged"): SYMMETRIC,
        (6, "control 1 and target exchanged"): SYMMETRIC,
    },
}
"""By example: (operation, fault) of the mutants that do the same as the circuit, and why."""


@pytest.mark.parametrize("example", EXAMPLES, ids=lambda example: example.name)
def test_a_right_circuit_holds_exactly(example: Example) -> None:
    verdict = verify_program(example.spec, example.program(), oracle=example.oracle, exact_phase=True)
    assert verdict.holds is True
    assert verdict.counterexample is None
    assert verdict.evidence.level == "exhaustive"
    assert verdict.evidence.inputs_checked == 1 << example.spec.input_bits


@pytest.mark.parametrize("example", EXAMPLES, ids=lambda example: example.name)
def test_every_mutant_is_caught_or_equivalent_for_a_known_reason(example: Example) -> None:
    understanding = understand(example.spec)
    roles = match(understanding, example.program(), example.oracle, None)
    equivalent = set()
    for mutant in mutants(example.circuit):
        verdict = verify_program(example.spec, example.program(mutant.circuit), oracle=example.oracle)
        assert verdict.holds is slow_verdict(mutant.circuit, roles, understanding.function), mutant
        assert (verdict.counterexample is None) == verdict.holds
        if verdict.holds:
            equivalent.add((mutant.index, mutant.fault))
    assert equivalent == set(EQUIVALENT.get(example.name, {}))


def test_the_mutants_are_hundreds() -> None:
    faults = Counter(mutant.fault for example in EXAMPLES for mutant in mutants(example.circuit))
    assert faults.total() >= 300
    assert faults["left out"] >= 100
    assert faults["condition dropped"] == 4


BUILT: list[tuple[str, Oracle, Spec]] = [
    ("predicate", "phase", revsynth.predicate("lamp in [3, 5, 6]", inputs={"lamp": 3})),
    ("mark", "bit", revsynth.predicate("lamp % 3 == 1", inputs={"lamp": 3})),
    ("sum", "bit", revsynth.outputs({"total": "a + b"}, inputs={"a": 1, "b": 2})),
    ("block", "inplace", revsynth.permutation([3, 1, 0, 2, 7, 5, 4, 6])),
]


@pytest.mark.parametrize("uncompute", ["unitary", "measured"])
@pytest.mark.parametrize(("name", "oracle", "spec"), BUILT, ids=[name for name, _, _ in BUILT])
def test_mutants_of_built_circuits(name: str, oracle: Oracle, spec: Spec, uncompute: str) -> None:
    """What survives must be equivalent by the slow simulator, and one of few kinds of operation."""
    built = revsynth.build(spec, oracle=oracle, uncompute=uncompute)
    circuit = read(built.text()).circuit
    understanding = understand(spec)
    example = Example(name, spec, circuit, oracle)
    roles = match(understanding, example.program(), oracle, None)
    caught = 0
    for mutant in mutants(circuit):
        verdict = verify_program(spec, example.program(mutant.circuit), oracle=oracle)
        if verdict.holds:
            assert slow_verdict(mutant.circuit, roles, understanding.function), mutant
            assert _may_be_equivalent(mutant), mutant
        else:
            caught += 1
    assert caught >= len(circuit)


def _may_be_equivalent(mutant: Mutant) -> bool:
    """CZs are symmetric, and flips before an erasure in the X basis change a constant phase."""
    symmetric = mutant.op.kind is Kind.Z and "exchanged" in mutant.fault
    return symmetric or (mutant.op.kind is Kind.X and "polarity" in mutant.fault)
