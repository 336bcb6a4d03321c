"""What `measure` counts, against a slow count by the contract's words."""

from __future__ import annotations

import math

import pytest
from hypothesis import given
from hypothesis import strategies as st

from revsynth.cascade import Cascade, Gate
from revsynth.circuit import cost as cost_module
from revsynth.circuit.cost import Cost, measure
from revsynth.circuit.model import ANGLES, TARGETS, Circuit, CircuitBuilder, Guard, Kind, Op
from revsynth.lowering import lower
from revsynth.synthesis.interface import Block

QUBITS, BITS = 4, 3


@st.composite
def circuits(draw: st.DrawFn) -> Circuit:
    """Any kinds, controls and conditions."""
    builder = CircuitBuilder()
    builder.add_register("a", 2)
    builder.add_register("work", QUBITS - 2)
    builder.add_bits("seen", BITS)
    for _ in range(draw(st.integers(0, 25))):
        kind = draw(st.sampled_from(list(Kind)))
        order = draw(st.permutations(range(QUBITS)))
        most = 0 if kind in (Kind.MEASURE, Kind.RESET) else QUBITS - TARGETS[kind]
        controls = draw(st.integers(0, most))
        angle = st.sampled_from([0.0, math.pi / 4, math.pi / 2, math.pi, -math.pi / 4, 0.3])
        guard = draw(st.sampled_from([(), (Guard((0,)),), (Guard((2, 5), False), Guard((1,)))]))
        builder.add(
            kind,
            order[controls : controls + TARGETS[kind]],
            [2 * q + draw(st.integers(0, 1)) for q in order[:controls]],
            tuple(draw(angle) for _ in range(ANGLES[kind])),
            guard,
            draw(st.integers(0, BITS - 1)) if kind is Kind.MEASURE else -1,
        )
    return builder.build()


def slow_depth(circuit: Circuit, counts: list[bool]) -> int:
    """The longest chain by looking back from every operation to all those it must wait for."""
    ops = list(circuit)
    ends: list[int] = []
    for index, op in enumerate(ops):
        read = {
            b >> 1
            for guard in (circuit.conditions[op.condition] if op.condition >= 0 else ())
            for b in guard.bits
        }
        start = 0
        for bit in read:
            writers = [i for i in range(index) if ops[i].bit == bit]
            start = max(start, ends[writers[-1]] if writers else 0)
        for i in range(index):
            if set(ops[i].qubits) & set(op.qubits):
                start = max(start, ends[i])
        ends.append(start + counts[index])
    return max(ends, default=0)


def is_t(op: Op) -> bool:
    """T, its inverse, and phases by odd multiples of pi/4, a controlled gphase being a phase."""
    controls = len(op.controls) - (op.kind is Kind.GPHASE)
    if controls or (op.kind is Kind.GPHASE and not op.controls):
        return False
    odd = op.angles and round(op.angles[0] / (math.pi / 4)) % 2 == 1
    exact = op.angles and abs(op.angles[0] / (math.pi / 4) - round(op.angles[0] / (math.pi / 4))) < 1e-9
    return op.kind in (Kind.T, Kind.TDG) or bool(op.kind in (Kind.P, Kind.RZ, Kind.GPHASE) and odd and exact)


def is_toffoli(op: Op) -> bool:
    """X and Z with two controls, a phase of pi being a Z."""
    if op.kind in (Kind.X, Kind.Z):
        return len(op.controls) == 2
    turn = op.kind in (Kind.P, Kind.GPHASE) and abs(op.angles[0] - math.pi) < 1e-9
    return turn and len(op.controls) == 2 + (op.kind is Kind.GPHASE)


def slow_counts(circuit: Circuit) -> dict[str, int]:
    """The counts that need no idea of what is Clifford."""
    ops = list(circuit)
    return {
        "qubits": circuit.qubits,
        "work": QUBITS - 2,
        "gates": len(ops),
        "t": sum(map(is_t, ops)),
        "toffoli": sum(map(is_toffoli, ops)),
        "cx": sum(op.kind is Kind.X and len(op.controls) == 1 for op in ops),
        "measured": sum(op.kind is Kind.MEASURE for op in ops),
        "depth": slow_depth(circuit, [bool(op.qubits) for op in ops]),
        "t_depth": slow_depth(circuit, [is_t(op) for op in ops]),
        "toffoli_depth": slow_depth(circuit, [is_toffoli(op) for op in ops]),
    }


@given(circuits())
def test_the_counts_are_those_of_a_slow_count(circuit):
    found = measure(circuit).to_json()
    assert {name: found[name] for name in slow_counts(circuit)} == slow_counts(circuit)


@given(circuits())
def test_the_compiled_pass_finds_the_same_depths(circuit):
    plain = measure(circuit)
    with pytest.MonkeyPatch.context() as patch:
        patch.setattr(cost_module, "COMPILED_FROM", 0)
        assert measure(circuit) == plain


def test_gates_under_an_if_count_once_and_start_after_their_measurement():
    builder = CircuitBuilder()
    builder.add_register("a", 3)
    builder.add_bits("seen", 1)
    for _ in range(3):
        builder.h(0)
    builder.measure(0, 0)
    builder.z(2, (2,), condition=(Guard((0,)),))
    builder.x(0, condition=(Guard((0,)),))
    cost = measure(builder.build())
    assert (cost.gates, cost.depth, cost.cz, cost.measured) == (6, 5, 1, 1)


def test_the_constant_phase_is_a_gate_without_depth():
    builder = CircuitBuilder()
    builder.add_register("a", 1)
    builder.add(Kind.GPHASE, (), angles=(math.pi,))
    cost = measure(builder.build())
    assert (cost.gates, cost.depth, cost.other, cost.rotations) == (1, 0, 0, 0)


def test_the_textbook_doubly_controlled_not():
    """7 T, 6 CNOT, 2 H (common practice)."""
    cascade = Cascade.from_gates(3, [Gate(2, (0, 2))])
    circuit = lower(
        Block(cascade, "t", 3), [("a", 3)], oracle="inplace", gates="clifford+t", uncompute="unitary"
    )
    cost = measure(circuit)
    assert (cost.t, cost.cx, cost.gates, cost.toffoli) == (7, 6, 15, 0)
    assert cost.depth <= 12
    plain = lower(Block(cascade, "t", 3), [("a", 3)], oracle="inplace", gates="toffoli", uncompute="unitary")
    assert (measure(plain).toffoli, measure(plain).toffoli_depth, measure(plain).t) == (1, 1, 0)


def test_json_keys_and_their_order():
    empty = CircuitBuilder().build()
    assert measure(empty) == Cost(*[0] * 13)
    assert list(measure(empty).to_json(ands=6, cascade=9).items())[:4] == [
        ("qubits", 0), ("work", 0), ("ands", 6), ("cascade", 9),
    ]  # fmt: skip
    assert list(measure(empty).to_json()) == [
        "qubits", "work", "ands", "cascade", "gates", "toffoli", "t", "rotations", "other", "cx", "cz",
        "depth", "t_depth", "toffoli_depth", "measured",
    ]  # fmt: skip
    assert measure(empty).to_json()["ands"] is None
