"""Cancelling neighbours keeps the operation, finds what it should, and its compiled form does the same."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from revsynth.circuit.model import Circuit, Kind, Register
from revsynth.lowering import cancel
from revsynth.lowering.assemble import Gates
from revsynth.lowering.cancel import cancel_neighbours
from revsynth.lowering.constructions import Style
from revsynth.lowering.draft import Composite, Draft
from revsynth.lowering.expand import expand
from tests.slow_simulator import unitary

QUBITS = 4
SINGLES = [Kind.X, Kind.Z, Kind.H, Kind.S, Kind.SDG, Kind.T, Kind.TDG]


def gates_of(draft: Draft) -> Gates:
    """A draft on its own qubits."""
    shape = draft.template()
    offset = np.concatenate([[0], np.cumsum(shape.count)]).astype(np.int64)
    operand = (shape.local * shape.scale).astype(np.int32)
    return Gates(shape.kind, offset, operand, shape.condition, shape.bit, shape.bits)


def circuit_of(gates: Gates, qubits: int = QUBITS) -> Circuit:
    """Unitary gates as a circuit."""
    return Circuit(
        [Register("q", qubits, 0)],
        [],
        gates.kind,
        gates.offset,
        gates.operand,
        gates.condition,
        gates.bit,
        {},
        [],
    )


@st.composite
def drafts(draw: st.DrawFn, composites: bool = False) -> Draft:
    """Many gates on few qubits, so that there is much to cancel."""
    draft = Draft()
    pool: list[tuple[int, int]] = [(kind, 1) for kind in SINGLES] + [(Kind.X, 2), (Kind.Z, 2)]
    if composites:
        pool = [(Kind.X, 1), (Kind.X, 2), (Kind.X, 3), *((kind, 3) for kind in Composite)]
    for _ in range(draw(st.integers(0, 40))):
        kind, width = draw(st.sampled_from(pool))
        draft.put(kind, draw(st.permutations(range(QUBITS)))[:width])
    return draft


@given(drafts())
def test_the_operation_stays(draft):
    before = gates_of(draft)
    after = cancel_neighbours(before, QUBITS)
    assert len(after) <= len(before)
    assert np.abs(unitary(circuit_of(before)) - unitary(circuit_of(after))).max() < 1e-9


@given(drafts(composites=True))
def test_composite_gates_cancel_only_with_their_inverses(draft):
    """Written out unitarily, AND and ERASE are inverses on any state of the target."""
    style = Style("clifford+t", "unitary", "t")
    before = gates_of(draft)
    after = cancel_neighbours(before, QUBITS)
    one, other = (unitary(circuit_of(expand(gates, style))) for gates in (before, after))
    assert np.abs(one - other).max() < 1e-9


@given(drafts())
def test_a_circuit_and_its_inverse_vanish(draft):
    """The pairs are nested as deep as the circuit is long."""
    inverse = {Kind.S: Kind.SDG, Kind.SDG: Kind.S, Kind.T: Kind.TDG, Kind.TDG: Kind.T}
    for kind, qubits, _, _ in reversed(list(draft.gates)):
        draft.put(inverse.get(Kind(kind), kind), qubits)
    assert len(cancel_neighbours(gates_of(draft), QUBITS)) == 0


@given(drafts())
def test_the_compiled_pass_does_the_same(draft):
    gates = gates_of(draft)
    plain = cancel_neighbours(gates, QUBITS)
    with pytest.MonkeyPatch.context() as patch:
        patch.setattr(cancel, "COMPILED_FROM", 0)
        compiled = cancel_neighbours(gates, QUBITS)
    for name in ("kind", "offset", "operand", "condition", "bit"):
        assert np.array_equal(getattr(plain, name), getattr(compiled, name))


@pytest.mark.parametrize(
    ("turns", "left"),
    [
        ([1, 1], [Kind.S]),
        ([1, 2, 2, 7], [Kind.Z]),
        ([1, 1, 1], [Kind.S, Kind.T]),
        ([2, 1, 2], [Kind.Z, Kind.T]),
        ([1, 4, 7], [Kind.Z]),
        ([6, 7, 1, 2], []),
        ([7, 7], [Kind.SDG]),
        ([1] * 7, [Kind.TDG]),
    ],
)
def test_phases_merge_along_a_qubit(turns, left):
    """Turns in eighths; 3 and 5 eighths take a Clifford gate and a T."""
    names = {1: Kind.T, 2: Kind.S, 4: Kind.Z, 6: Kind.SDG, 7: Kind.TDG}
    draft = Draft()
    draft.cx(0, 1)
    for turn in turns:
        draft.put(names[turn], (0,))
    draft.cx(0, 1)
    after = cancel_neighbours(gates_of(draft), QUBITS)
    assert after.kind.tolist()[1:-1] == left if left else len(after) == 0


def test_measurements_and_conditions_stand_between():
    draft = Draft()
    draft.h(0)
    outcome = draft.measure(0)
    draft.x(1)
    draft.x(1, condition=outcome)
    draft.x(1, condition=outcome)
    draft.x(1)
    draft.h(0)
    gates = gates_of(draft)
    assert len(cancel_neighbours(gates, QUBITS)) == len(gates)
