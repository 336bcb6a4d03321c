"""The verdict against its definition, on right and wrong circuits made at random."""

from __future__ import annotations

import contextlib
from unittest.mock import patch

import numpy as np
import pytest
from hypothesis import event, given
from hypothesis import strategies as st

from revsynth.circuit.model import Circuit, CircuitBuilder, Guard, Kind, Op
from revsynth.logic.function import Function
from revsynth.logic.truth_table import pack, words_for
from revsynth.verification import engines
from revsynth.verification.branches import NotUniformError
from revsynth.verification.decide import decide
from revsynth.verification.matching import Roles
from tests.slow_simulator import run_circuit
from tests.verification.slow_verdict import slow_verdict, starts
from tests.verification.textbook import and_on_zero, erase_and, relative_toffoli, toffoli, with_steps

N = 2
"""Input bits; qubits 0 and 1. Qubits 2 and 3 are outputs, keep or scratch, by the form."""

FORMS = [
    Roles("phase", (0, 1)),
    Roles("bit", (0, 1), (2, 3)),
    Roles("bit", (0, 1), (2,), lent=(3,)),
    Roles("fresh", (0, 1), (2,)),
    Roles("compute", (0, 1), (2,), kept=(3,)),
    Roles("inplace", (0, 1), (1, 0)),
    Roles("embedded", (0, 2), (2,), preset=((1, 1),), leftover=(0, 1)),
]


@st.composite
def circuits(draw: st.DrawFn, wild: bool) -> Circuit:
    """Pieces on five qubits and two bits, mostly of the kind that leave basis states; `wild` adds others."""
    c = CircuitBuilder()
    c.add_register("q", 5)
    c.add_bits("seen", 2)
    pieces = ["flip", "flip", "sign", "toffoli", "and", "pair", "fraction"]
    if wild:
        pieces += ["h", "measure", "reset", "conditioned", "angle", "relative", "gate"]
    for piece in draw(st.lists(st.sampled_from(pieces), min_size=1, max_size=5)):
        a, b, t, *_ = draw(st.permutations(range(5)))
        negative = draw(st.integers(0, 1))
        bit = draw(st.integers(0, 1))
        if piece == "flip":
            c.x(t, [2 * a + negative, 2 * b][: draw(st.integers(0, 2))])
        elif piece == "sign":
            c.z(t, [2 * a + negative, 2 * b][: draw(st.integers(0, 2))])
        elif piece == "toffoli":
            toffoli(c, a, b, t)
        elif piece == "and":
            and_on_zero(c, a % 4, (a + 1) % 4, 4)
            if t < 4:
                c.cx(4, t)
            erase_and(c, a % 4, (a + 1) % 4, 4, bit)
        elif piece == "pair":
            relative_toffoli(c, a, b, t)
            relative_toffoli(c, a, b, t)
        elif piece == "fraction":
            c.t(a)
            c.cx(a, b)
            c.cx(a, b)
            c.t(a, inverse=True)
        elif piece == "h":
            c.h(t)
        elif piece == "measure":
            c.measure(t, bit)
        elif piece == "reset":
            c.add(Kind.RESET, (t,))
        elif piece == "conditioned":
            guard = (Guard((2 * bit + negative,), draw(st.booleans())),)
            c.x(t, [2 * a][: draw(st.integers(0, 1))], guard)
        elif piece == "angle":
            c.add(Kind.RZ, (t,), angles=(draw(st.sampled_from((0.3, np.pi / 4, np.pi, 2 * np.pi))),))
        elif piece == "relative":
            relative_toffoli(c, a, b, t)
        else:
            c.add(draw(st.sampled_from((Kind.Y, Kind.SX, Kind.H, Kind.S))), (t,), (2 * a + negative,))
    return c.build()


def function_of(draw: st.DrawFn, circuit: Circuit, roles: Roles) -> Function:
    """What the circuit itself does to inputs (first branch, largest amplitude), some of it made free."""
    count = 1 if roles.oracle == "phase" else len(roles.outputs)
    values = np.zeros((count, 1 << N), dtype=np.uint8)
    reference = None
    for x, start in starts(circuit, roles, N):
        vector = np.zeros(1 << circuit.qubits, dtype=complex)
        vector[start] = 1
        state = run_circuit(circuit, vector)[0][1]
        end = int(np.argmax(np.abs(state)))
        reference = state[end] if reference is None else reference
        if roles.oracle == "phase":
            values[0, x] = (state[end] / reference).real < 0
        elif roles.oracle != "bit" or not any(start >> q & 1 for q in roles.outputs):
            values[:, x] = [end >> q & 1 for q in roles.outputs]
    care = np.ones_like(values)
    domain = np.ones(1 << N, dtype=np.uint8)
    for x in draw(st.lists(st.integers(0, 3), max_size=2)):
        care[:, x] = 0
        domain[x] = 0
    if draw(st.booleans()):
        care[0, draw(st.integers(0, 3))] = 0
    if draw(st.integers(0, 3)) == 0:
        values[0, draw(st.integers(0, 3))] ^= 1
    packed = np.stack([pack(row) for row in values]), np.stack([pack(row) for row in care])
    assert packed[0].shape == (count, words_for(N))
    return Function(N, count, packed[0] & packed[1], packed[1], pack(domain))


def mutated(draw: st.DrawFn, circuit: Circuit) -> Circuit:
    """One operation left out, inverted, redirected or stripped of its condition."""
    ops = list(circuit)
    index = draw(st.integers(0, len(ops) - 1))
    op = ops[index]
    change: Op | None = None
    way = draw(st.integers(0, 3))
    if way == 1 and op.kind in (Kind.T, Kind.TDG):
        change = op._replace(kind=Kind.TDG if op.kind is Kind.T else Kind.T)
    elif way == 2 and op.controls:
        change = op._replace(controls=(op.controls[0] ^ 1, *op.controls[1:]))
    elif way == 3 and op.condition >= 0:
        change = op._replace(condition=-1)
    return with_steps(circuit, [(index, change)])


def engine(mode: str) -> contextlib.AbstractContextManager[object]:
    """Forces an engine: the general one, complex arithmetic, a changed order of steps, the compiled one."""
    if mode == "sparse":
        return patch.object(engines.Engines, "_bitsliced", side_effect=NotUniformError)
    if mode == "floating":
        return patch.object(engines, "has_angles", return_value=True)
    if mode == "reordered":
        return patch.object(engines, "FEW", 0)
    if mode.startswith("compiled"):
        few = 0 if mode.endswith("reordered") else engines.FEW
        return patch.multiple(engines, COMPILED_FROM=0, COMPILED_LOADED=0, FEW=few)
    return contextlib.nullcontext()


@pytest.mark.parametrize(
    "mode", ["as it comes", "sparse", "floating", "reordered", "compiled", "compiled and reordered"]
)
@given(data=st.data())
def test_the_verdict_is_that_of_the_definition(mode: str, data: st.DataObject) -> None:
    draw = data.draw
    roles = draw(st.sampled_from(FORMS))
    circuit = draw(circuits(draw(st.booleans())))
    function = function_of(draw, circuit, roles)
    if draw(st.booleans()):
        circuit = mutated(draw, circuit)
    with engine(mode):
        decision = decide(circuit, roles, function, lambda _: None)
    expected = slow_verdict(circuit, roles, function)
    event(f"{roles.oracle} {expected}")
    assert decision.holds is expected
    assert (decision.found is None) == expected
