"""What is said to commute with X does, by the matrix; and what plainly does is found."""

from __future__ import annotations

import numpy as np
from hypothesis import given
from hypothesis import strategies as st

from revsynth.circuit.model import Circuit, CircuitBuilder, Guard, Kind
from revsynth.verification.commuting import commuting
from revsynth.verification.elementary import elementary
from tests.slow_simulator import unitary
from tests.verification.textbook import and_on_zero, erase_and, register_circuit, relative_toffoli, toffoli


@st.composite
def circuits(draw: st.DrawFn) -> Circuit:
    c = CircuitBuilder()
    c.add_register("q", 4)
    for _ in range(draw(st.integers(1, 8))):
        order = draw(st.permutations(range(4)))
        piece = draw(st.sampled_from(("toffoli", "x", "z", "gate", "h")))
        if piece == "toffoli":
            toffoli(c, *order[:3])
        elif piece in "xz":
            kind = Kind.X if piece == "x" else Kind.Z
            literals = [2 * q + draw(st.integers(0, 1)) for q in order[1 : 1 + draw(st.integers(0, 2))]]
            c.add(kind, order[:1], literals)
        elif piece == "h":
            c.h(order[0])
            c.z(order[0], [2 * q for q in order[1 : 1 + draw(st.integers(0, 1))]])
            c.h(order[0])
        else:
            c.add(draw(st.sampled_from((Kind.S, Kind.SDG, Kind.T, Kind.H, Kind.Y))), order[:1])
    return c.build()


@given(circuits())
def test_claims_hold_by_the_matrix(circuit: Circuit) -> None:
    matrix = unitary(circuit)
    for qubit in commuting(elementary(circuit), 4, range(4)):
        flip = np.arange(16) ^ (1 << qubit)
        np.testing.assert_allclose(matrix[flip][:, flip], matrix, atol=1e-10, rtol=0)


def test_outputs_of_toffolis_and_erased_ands_are_found() -> None:
    c = register_circuit(("a", 3), ("y", 2), ("work", 1), bits=1)
    toffoli(c, 0, 1, 3)
    and_on_zero(c, 0, 2, 5)
    c.cx(5, 4)
    c.cx(4, 3)
    erase_and(c, 0, 2, 5, 0)
    assert commuting(elementary(c.build()), 6, (3,)) == [3]
    assert commuting(elementary(c.build()), 6, (3, 4)) == [3]


def test_nothing_is_claimed_where_it_is_false() -> None:
    for number, spoil in enumerate(
        (
            lambda c: c.z(2),
            lambda c: c.cx(2, 0),
            lambda c: c.t(2),
            lambda c: c.measure(2, 0),
            lambda c: c.add(Kind.RESET, (2,)),
            lambda c: c.z(2, condition=(Guard((0,)),)),
            lambda c: relative_toffoli(c, 0, 1, 2),
            lambda c: c.x(0, (2 * 1, 2 * 2)),
        )
    ):
        c = register_circuit(("a", 2), ("y", 1), bits=1)
        toffoli(c, 0, 1, 2)
        spoil(c)
        assert commuting(elementary(c.build()), 3, (2,)) == [], number
