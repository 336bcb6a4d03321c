"""Elementary steps multiply up to the textbook matrices, constant phase included."""

from __future__ import annotations

import math

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from revsynth.circuit.model import ANGLES, TARGETS, Circuit, CircuitBuilder, Guard, Kind
from revsynth.verification.elementary import (
    ANGLE,
    FLIP,
    HADAMARD,
    TURN,
    Step,
    Steps,
    elementary,
    has_angles,
    is_classical,
)
from tests.slow_simulator import unitary

UNITARY = [kind for kind in Kind if kind not in (Kind.MEASURE, Kind.RESET)]
SPECIAL = [0.0, math.pi / 4, -math.pi / 2, math.pi, 3 * math.pi / 2, 2 * math.pi, 4 * math.pi, 0.3, -2.0]


def as_circuit(steps: list[Step], qubits: int) -> Circuit:
    """The steps written back as gates of the model: phases as controlled constants."""
    c = CircuitBuilder()
    c.add_register("q", qubits)
    for step in steps:
        if step.act == FLIP:
            c.x(step.target, step.literals)
        elif step.act == HADAMARD:
            c.h(step.target)
        else:
            angle = step.angle if step.act == ANGLE else step.amount * math.pi / 4
            assert step.act in (TURN, ANGLE)
            c.add(Kind.GPHASE, (), step.literals, (angle,))
    return c.build()


@pytest.mark.parametrize("kind", UNITARY, ids=lambda kind: kind.name)
@given(data=st.data())
def test_every_kind_with_any_controls(kind: Kind, data: st.DataObject) -> None:
    c = CircuitBuilder()
    c.add_register("q", 4)
    order = data.draw(st.permutations(range(4)))
    count = data.draw(st.integers(0, 4 - TARGETS[kind]))
    controls = [2 * qubit + data.draw(st.integers(0, 1)) for qubit in order[:count]]
    angle = st.sampled_from(SPECIAL) | st.floats(-7, 7)
    c.add(
        kind,
        order[count : count + TARGETS[kind]],
        controls,
        tuple(data.draw(angle) for _ in range(ANGLES[kind])),
    )
    circuit = c.build()
    np.testing.assert_allclose(
        unitary(as_circuit(elementary(circuit), 4)), unitary(circuit), atol=1e-10, rtol=0
    )


def test_multiples_of_an_eighth_turn_stay_exact() -> None:
    c = CircuitBuilder()
    c.add_register("q", 2)
    c.add(Kind.RZ, (0,), angles=(math.pi / 4,))
    c.add(Kind.P, (1,), (0,), (7 * math.pi / 4,))
    assert not has_angles(elementary(c.build()))
    c.add(Kind.P, (1,), (0,), (0.785398,))
    assert has_angles(elementary(c.build()))


def test_what_counts_as_classical() -> None:
    c = CircuitBuilder()
    c.add_register("q", 2)
    c.add_bits("seen", 1)
    c.x(0, (3,))
    c.z(1, (0,))
    c.add(Kind.SWAP, (0, 1))
    assert is_classical(elementary(c.build()))
    c.x(0, condition=(Guard((0,)),))
    assert not is_classical(elementary(c.build()))


def test_steps_are_a_sequence_and_join_and_reorder() -> None:
    c = CircuitBuilder()
    c.add_register("q", 3)
    c.x(0, (3, 4))
    c.t(1)
    c.add(Kind.GPHASE, (), (), (0.3,))
    c.h(2)
    steps = elementary(c.build())
    every = list(steps)
    assert [steps[index] for index in range(4)] == every
    assert steps[-1] == every[-1]
    assert list(steps[1:3]) == every[1:3]
    assert list(Steps.of(every)) == every
    assert list(Steps.of([])) == []
    assert list(steps.take(np.array([3, 0, 0]))) == [every[3], every[0], every[0]]
    assert list(steps[:2].followed_by(steps[2:])) == every
    with pytest.raises(IndexError):
        steps[4]
