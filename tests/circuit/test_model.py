"""The circuit as flat arrays: operations come back as they went in, and impossible ones are refused."""

from __future__ import annotations

import math

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from revsynth.circuit.model import ANGLES, TARGETS, Circuit, CircuitBuilder, Guard, Kind, Op, Register
from tests.slow_simulator import matrix, unitary

QUBITS = 4
BITS = 3


@st.composite
def operations(draw: st.DrawFn) -> Op:
    """Any operation on four qubits and three bits, controls, condition and angles included."""
    kind = draw(st.sampled_from(list(Kind)))
    qubits = draw(st.permutations(range(QUBITS)))
    targets = tuple(qubits[: TARGETS[kind]])
    if kind is Kind.MEASURE:
        return Op(kind, (), targets, bit=draw(st.integers(0, BITS - 1)))
    rest = qubits[TARGETS[kind] :]
    chosen = rest[: draw(st.integers(0, len(rest)))] if kind is not Kind.RESET else []
    controls = tuple(2 * qubit + draw(st.integers(0, 1)) for qubit in chosen)
    angles = tuple(draw(st.floats(-7, 7)) for _ in range(ANGLES[kind]))
    return Op(kind, controls, targets, angles)


conditions = st.lists(
    st.builds(
        Guard,
        st.lists(st.integers(0, 2 * BITS - 1), min_size=1, max_size=2, unique=True).map(tuple),
        st.booleans(),
    ),
    max_size=2,
).map(tuple)


def builder() -> CircuitBuilder:
    made = CircuitBuilder()
    made.add_register("a", 1)
    made.add_register("k", QUBITS - 1)
    made.add_bits("seen", BITS)
    return made


@given(st.lists(st.tuples(operations(), conditions), max_size=12))
def test_operations_come_back_as_they_went_in(given_operations: list[tuple[Op, tuple[Guard, ...]]]) -> None:
    made = builder()
    for op, condition in given_operations:
        made.add(op.kind, op.targets, op.controls, op.angles, condition, op.bit)
    assert len(made) == len(given_operations)
    circuit = made.build()
    assert len(circuit) == len(given_operations)
    for got, (op, condition) in zip(circuit, given_operations, strict=True):
        assert got._replace(condition=-1) == op
        assert (circuit.conditions[got.condition] if got.condition >= 0 else ()) == condition
        assert got.qubits == (*(c >> 1 for c in op.controls), *op.targets)


def test_registers_are_numbered_one_after_the_other() -> None:
    circuit = builder().build()
    assert circuit.qubits == QUBITS
    assert circuit.bits == BITS
    assert circuit.registers == (Register("a", 1, 0), Register("k", 3, 1))
    found = circuit.register("k")
    assert found is not None
    assert list(found.members) == [1, 2, 3]
    assert circuit.register("seen") is None
    assert repr(circuit) == "<Circuit of 0 operations on 4 qubits>"


def test_arrays_have_the_stated_types() -> None:
    for circuit in (CircuitBuilder().build(), built_with_everything()):
        types = {
            name: getattr(circuit, name).dtype for name in ("kind", "offset", "operand", "condition", "bit")
        }
        assert types == {
            "kind": np.dtype(np.uint8),
            "offset": np.dtype(np.int64),
            "operand": np.dtype(np.int32),
            "condition": np.dtype(np.int32),
            "bit": np.dtype(np.int32),
        }


def built_with_everything(*, angle: float = 0.5, expected: bool = True, control: int = 3) -> Circuit:
    made = builder()
    made.x(0, (control,))
    made.add(Kind.RZ, (2,), angles=(angle,))
    made.measure(1, 2)
    made.x(3, condition=(Guard((5,), expected),))
    return made.build()


def test_circuits_are_compared_gate_for_gate() -> None:
    one = built_with_everything()
    assert one == built_with_everything()
    assert one != built_with_everything(angle=0.25)
    assert one != built_with_everything(expected=False)
    assert one != built_with_everything(control=2)
    assert one != "a circuit"
    other = CircuitBuilder()
    other.add_register("b", QUBITS)
    assert builder().build() != other.build()
    with pytest.raises(TypeError, match="unhashable"):
        hash(one)


def test_conditions_are_compared_by_what_they_say_and_not_by_their_number() -> None:
    """The same guarded gate, in one circuit beside a condition that no gate has."""
    one = built_with_everything()
    padded = Circuit(
        one.registers,
        one.bit_registers,
        one.kind,
        one.offset,
        one.operand,
        np.where(one.condition >= 0, 1, -1).astype(np.int32),
        one.bit,
        one.angles,
        [(Guard((0,)),), *one.conditions],
    )
    assert padded == one


def test_equal_conditions_are_kept_once() -> None:
    made = builder()
    for target in range(3):
        made.x(target, condition=(Guard((1,)),))
    made.z(0, condition=(Guard((0,)),))
    assert made.build().conditions == ((Guard((1,)),), (Guard((0,)),))


def test_a_built_circuit_does_not_change_with_its_builder() -> None:
    made = builder()
    made.h(0)
    first = made.build()
    made.h(1)
    made.cx(0, 1)
    assert len(first) == 1
    assert len(made.build()) == 3


@pytest.mark.parametrize(
    ("kind", "targets", "controls", "message"),
    [
        (Kind.X, (4,), (), r"X on qubits \[4\] of 4: out of range or repeated"),
        (Kind.X, (-1,), (), r"X on qubits \[-1\] of 4: out of range or repeated"),
        (Kind.X, (1,), (2,), r"X on qubits \[1, 1\] of 4: out of range or repeated"),
        (Kind.Z, (0,), (2, 3), r"Z on qubits \[1, 1, 0\] of 4: out of range or repeated"),
        (Kind.SWAP, (2, 2), (), r"SWAP on qubits \[2, 2\] of 4: out of range or repeated"),
        (Kind.SWAP, (2,), (), "SWAP takes 2 targets, not 1"),
        (Kind.H, (0, 1), (), "H takes 1 targets, not 2"),
        (Kind.GPHASE, (0,), (), "GPHASE takes 0 targets, not 1"),
    ],
)
def test_operations_that_cannot_be_are_refused(
    kind: Kind, targets: tuple[int, ...], controls: tuple[int, ...], message: str
) -> None:
    with pytest.raises(ValueError, match=message):
        builder().add(kind, targets, controls)


SHORTHANDS = [
    ("x", (0,), Kind.X),
    ("z", (0,), Kind.Z),
    ("h", (0,), Kind.H),
    ("s", (0,), Kind.S),
    ("s", (0, True), Kind.SDG),
    ("t", (0,), Kind.T),
    ("t", (0, True), Kind.TDG),
]


@pytest.mark.parametrize(("name", "arguments", "kind"), SHORTHANDS)
def test_shorthands_are_the_textbook_gates(name: str, arguments: tuple[int, ...], kind: Kind) -> None:
    made = CircuitBuilder()
    made.add_register("q", 1)
    getattr(made, name)(*arguments)
    assert [op.kind for op in made.build()] == [kind]
    assert np.allclose(unitary(made.build()), matrix(kind))


@pytest.mark.parametrize("kind", [kind for kind in Kind if kind < Kind.SWAP])
def test_one_qubit_kinds_are_unitary_and_what_the_docstring_says(kind: Kind) -> None:
    """Textbook relations: S = T T, Z = S S, X = SX SX = H Z H, and P, RZ the same up to a phase."""
    angles = (0.7, -0.3, 1.1)[: ANGLES[kind]]
    m = matrix(kind, angles)
    assert np.allclose(m @ m.conj().T, np.eye(2))
    t, s, x, z, h = (matrix(k) for k in (Kind.T, Kind.S, Kind.X, Kind.Z, Kind.H))
    assert np.allclose(t @ t, s)
    assert np.allclose(s @ s, z)
    assert np.allclose(h @ z @ h, x)
    assert np.allclose(matrix(Kind.SX) @ matrix(Kind.SX), x)
    assert np.allclose(matrix(Kind.RZ, (0.7,)) * np.exp(0.35j), matrix(Kind.P, (0.7,)))
    assert np.allclose(matrix(Kind.U, (math.pi / 2, 0, math.pi)), h)


def test_a_cnot_has_qubit_0_least_significant() -> None:
    """A matrix that changes under bit reversal: control 0, target 1 swaps the basis states 1 and 3."""
    made = CircuitBuilder()
    made.add_register("q", 2)
    made.cx(0, 1)
    assert np.array_equal(np.argmax(np.abs(unitary(made.build())), axis=0), [0, 3, 2, 1])
