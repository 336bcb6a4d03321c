"""Lifting against states and tables: whatever it says of a small circuit must be so."""

from __future__ import annotations

import math

import pytest
from hypothesis import given
from hypothesis import strategies as st

import revsynth
from revsynth.circuit.model import Circuit, CircuitBuilder, Guard, Kind
from revsynth.qasm import read
from revsynth.spec.understand import understand
from revsynth.verification.lifting import NotClosedError, account, lift, start_of
from revsynth.verification.matching import Roles, match
from tests.verification.lifting_checks import check_against_states, judge, verdict
from tests.verification.mutants import mutants
from tests.verification.oracles import EXAMPLES, Example
from tests.verification.slow_verdict import slow_verdict
from tests.verification.textbook import and_on_zero, erase_and, register_circuit, relative_toffoli, toffoli

QUBITS = 4


@st.composite
def circuits(draw: st.DrawFn, gadgets: bool) -> Circuit:
    """Random gates on four qubits, or gadgets that often close, with measurements and conditions."""
    c = register_circuit(("q", QUBITS), bits=4)
    bits = 0
    for _ in range(draw(st.integers(1, 14))):
        a, b, t = draw(st.permutations(range(QUBITS)))[:3]
        flip = draw(st.integers(0, 1))
        condition = (Guard((2 * draw(st.integers(0, bits - 1)) + flip,)),) if bits else ()
        kind = draw(st.integers(0, 11 if gadgets else 7))
        if kind == 0:
            c.add(draw(st.sampled_from([Kind.T, Kind.TDG, Kind.S, Kind.SDG, Kind.Z])), (t,))
        elif kind == 1:
            c.x(t, (2 * a + flip,))
        elif kind == 2:
            c.h(t)
        elif kind == 3:
            c.z(t, (2 * a + flip,), condition if draw(st.booleans()) else ())
        elif kind == 4:
            c.x(t, (), condition)
        elif kind == 5:
            c.x(t, (2 * a, 2 * b + flip))
        elif kind == 6:
            c.add(
                draw(st.sampled_from([Kind.RZ, Kind.P])),
                (t,),
                angles=(draw(st.integers(0, 7)) * math.pi / 4,),
            )
        elif kind == 7:
            c.add(draw(st.sampled_from([Kind.Y, Kind.SX, Kind.S, Kind.Z])), (t,), (2 * a,) if flip else ())
        elif kind == 8:
            toffoli(c, a, b, t)
        elif kind == 9:
            relative_toffoli(c, a, b, t)
        elif kind == 10:
            and_on_zero(c, a, b, t)
        elif bits < 4:
            bits += 1
            if draw(st.booleans()):
                erase_and(c, a, b, t, bits - 1)
            else:
                c.measure(t, bits - 1)
    return c.build()


@pytest.mark.parametrize("gadgets", [False, True])
@given(data=st.data())
def test_what_lifting_says_is_so(gadgets: bool, data: st.DataObject) -> None:
    circuit = data.draw(circuits(gadgets))
    free = data.draw(st.integers(1, QUBITS))
    start = [2 * (1 + qubit) if qubit < free else data.draw(st.integers(0, 1)) for qubit in range(QUBITS)]
    check_against_states(circuit, start, free)


def gadget_circuits() -> list[tuple[str, Circuit, list[int], int]]:
    """Circuits that must close: (name, circuit, start, variables)."""
    found = []

    def add(name: str, c: CircuitBuilder, free: int) -> None:
        circuit = c.build()
        found.append((name, circuit, [2 * (1 + q) if q < free else 0 for q in range(circuit.qubits)], free))

    c = register_circuit(("q", 3))
    toffoli(c, 0, 1, 2)
    add("seven T", c, 3)
    c = register_circuit(("q", 3), bits=1)
    and_on_zero(c, 0, 1, 2)
    erase_and(c, 0, 1, 2, 0)
    add("four T and an erasure", c, 2)
    c = register_circuit(("q", 4))
    relative_toffoli(c, 0, 1, 2)
    c.z(2, (2 * 3,))
    relative_toffoli(c, 0, 1, 2)
    add("relative phases on any target", c, 4)
    c = register_circuit(("q", 3))
    for _ in range(2):
        c.h(2)
        c.x(2, (0, 2 * 1 + 1))
    c.h(2)
    c.h(2)
    add("doubly-controlled X between Hadamards", c, 3)
    c = register_circuit(("q", 2))
    for _ in range(3):
        c.h(0)
        c.s(0)
    add("three times H S: a constant phase", c, 2)
    c = register_circuit(("q", 3))
    c.add(Kind.SWAP, (0, 2), (2 * 1,))
    c.add(Kind.Y, (1,))
    add("controlled SWAP, Y", c, 3)
    c = register_circuit(("q", 2), bits=2)
    c.h(1)
    c.measure(1, 0)
    c.x(0, (), (Guard((0,)),))
    c.x(0, (), (Guard((1,), False),))
    c.add(Kind.RESET, (1,))
    add("a random outcome, used and reset", c, 1)
    c = register_circuit(("q", 3), bits=2)
    c.h(2)
    c.measure(2, 0)
    c.x(1, (0,), (Guard((0,)),))
    c.x(1, (0,), (Guard((0,)),))
    c.add(Kind.RESET, (2,))
    add("a product with an outcome, twice", c, 2)
    return found


@pytest.mark.parametrize(("name", "circuit", "start", "free"), gadget_circuits())
def test_known_identities_close(name: str, circuit: Circuit, start: list[int], free: int) -> None:
    lifted = lift(circuit, start, free)
    assert (lifted.revealed, lifted.outcome_signs, lifted.steady) == ((), (), ()), name
    assert len(lifted.variables) > free or check_against_states(circuit, start, free)


@pytest.mark.parametrize("example", EXAMPLES, ids=lambda example: example.name)
def test_right_examples_are_shown_right_and_no_wrong_mutant_is(example: Example) -> None:
    understanding = understand(example.spec)
    roles = match(understanding, example.program(), example.oracle, None)
    function = understanding.function
    assert verdict(example.circuit, roles, function) is True
    for mutant in mutants(example.circuit):
        found = verdict(mutant.circuit, roles, function)
        if found is not None:
            assert found == slow_verdict(mutant.circuit, roles, function), (mutant.fault, mutant.index)


SPECS = [
    ("phase", revsynth.predicate("a * b == 6", inputs={"a": 3, "b": 3})),
    ("bit", revsynth.predicate("a < b", inputs={"a": 3, "b": 3})),
    ("phase", revsynth.predicate("lamp == 127", inputs={"lamp": 7})),
    ("bit", revsynth.outputs({"total": "a + b"}, inputs={"a": 2, "b": 3})),
    ("fresh", revsynth.outputs({"area": "a * b"}, inputs={"a": 2, "b": 3})),
    ("compute", revsynth.predicate("a * b == 6", inputs={"a": 3, "b": 3})),
    ("inplace", revsynth.permutation([3, 1, 0, 2, 7, 5, 4, 6, 15, 12, 14, 13, 8, 11, 10, 9])),
]


STYLES = [
    ("clifford+t", "unitary"),
    ("clifford+t", "measured"),
    ("toffoli", "measured"),
    ("cascade", "unitary"),
]


@pytest.mark.parametrize(("gates", "uncompute"), STYLES)
@pytest.mark.parametrize(("oracle", "spec"), SPECS)
def test_built_circuits_give_their_truth_table(oracle: str, spec, gates: str, uncompute: str) -> None:
    built = revsynth.build(spec, oracle=oracle, gates=gates, uncompute=uncompute, effort="low")
    understanding = understand(spec)
    roles = match(understanding, read(built.text("openqasm3")), oracle, None)
    start, variables = start_of(roles, built.circuit.qubits)
    lifted = lift(built.circuit, start, variables)
    assert judge(lifted, account(lifted, roles), roles, understanding.function)
    assert lifted.sixteenths == 0
    assert lifted.radians == 0.0


def test_what_does_not_close_is_said_with_its_place() -> None:
    c = register_circuit(("q", 2))
    c.h(0)
    with pytest.raises(NotClosedError, match="1 path variables are left") as raised:
        lift(c.build(), [2, 4], 2)
    assert raised.value.operation == -1
    c.x(1, (0,))
    c.add(Kind.P, (1,), angles=(0.1,))
    with pytest.raises(NotClosedError, match="no multiple of pi/4") as raised:
        lift(c.build(), [2, 4], 2)
    assert raised.value.operation == 2
    c = register_circuit(("q", 3))
    c.h(0)
    c.x(2, (0, 2))
    with pytest.raises(NotClosedError, match="reads a qubit in superposition"):
        lift(c.build(), [2, 4, 6], 3)
    with pytest.raises(ValueError, match="2 starts for 3 qubits"):
        lift(c.build(), [2, 4], 2)


def test_a_measured_input_is_a_claim_that_fails() -> None:
    c = register_circuit(("q", 2), bits=1)
    c.x(1, (0,))
    c.measure(1, 0)
    c.x(1, (), (Guard((0,)),))
    roles = Roles("bit", (0,), ())
    start, variables = start_of(roles, 2)
    found = account(lift(c.build(), start, variables), roles)
    assert [(claim.kind, claim.operation, claim.constant) for claim in found.claims] == [("phase", 1, True)]


def test_claims_name_what_is_wrong() -> None:
    c = register_circuit(("q", 4), bits=1)
    c.x(0, (2 * 1,))
    c.x(2, (2 * 1,))
    c.t(1)
    c.h(3)
    c.measure(3, 0)
    roles = Roles("bit", (0, 1), ())
    start, variables = start_of(roles, 4)
    found = account(lift(c.build(), start, variables), roles)
    assert [(claim.kind, claim.qubit) for claim in found.claims] == [
        ("input", 0), ("scratch", 2), ("scratch", 3), ("phase", -1),
    ]  # fmt: skip
