"""Whole blocks lowered: the same function, phases included, in every oracle form, gate set and budget."""

from __future__ import annotations

import os
import subprocess
import sys

import numpy as np
import pytest
from hypothesis import example, given
from hypothesis import strategies as st

from revsynth.cascade import PHASE, Cascade, Gate
from revsynth.cascade.price import cascade_t
from revsynth.circuit.cost import measure
from revsynth.circuit.model import Circuit, Kind
from revsynth.errors import BudgetError
from revsynth.lowering import lower
from revsynth.lowering.block_circuit import SEEN_BITS
from revsynth.synthesis.interface import Block, Placement
from tests.lowering.columns import check
from tests.strategies import cascades, gates

STYLES = [
    ("cascade", "unitary"),
    ("toffoli", "unitary"),
    ("toffoli", "measured"),
    ("clifford+t", "unitary"),
    ("clifford+t", "measured"),
]
AIMS = ["t", "qubits", "depth", "gates"]
ALLOWED = {
    "toffoli": {
        (Kind.X, 0),
        (Kind.X, 1),
        (Kind.X, 2),
        (Kind.Z, 0),
        (Kind.Z, 1),
        (Kind.Z, 2),
        (Kind.GPHASE, 0),
    },
    "clifford+t": {(Kind.X, 0), (Kind.X, 1), (Kind.Z, 0), (Kind.Z, 1), (Kind.GPHASE, 0), (Kind.H, 0)}
    | {(kind, 0) for kind in (Kind.S, Kind.SDG, Kind.T, Kind.TDG)},
}
style = pytest.mark.parametrize(("gate_set", "uncompute"), STYLES)


def inplace(
    cascade: Cascade, gate_set: str, uncompute: str, aim: str = "t", most: int | None = None
) -> Circuit:
    """A block whose lines are all inputs."""
    block = Block(cascade, "test", cascade.lines)
    registers = [("a", cascade.lines)]
    return lower(
        block, registers, oracle="phase", gates=gate_set, uncompute=uncompute, max_qubits=most, aim=aim
    )


def full(lines: int, target: int | None = None) -> Cascade:
    """One gate over all lines, all controls positive."""
    goal = lines - 1 if target is None else target
    return Cascade.from_gates(lines, [Gate(goal, tuple(2 * line for line in range(lines) if line != goal))])


@style
@given(cascade=cascades(max_lines=5, max_gates=8, phase=True), aim=st.sampled_from(AIMS))
@example(cascade=Cascade.from_gates(1, [Gate(PHASE)]), aim="t")
@example(cascade=Cascade.from_gates(1, [Gate(PHASE, (1,))]), aim="t")
@example(cascade=Cascade.from_gates(3, [Gate(PHASE, (1, 3, 5)), Gate(0), Gate(1, (1,))]), aim="gates")
def test_a_lowered_cascade_does_the_same(gate_set, uncompute, cascade, aim):
    circuit = inplace(cascade, gate_set, uncompute, aim)
    check(circuit, cascade)
    if gate_set == "cascade":
        return
    measured = {(Kind.H, 0), (Kind.MEASURE, 0)} if uncompute == "measured" else set()
    for op in circuit:
        assert (op.kind, len(op.controls)) in ALLOWED[gate_set] | measured
        assert not any(control & 1 for control in op.controls)
        assert op.condition < 0 or (op.kind, len(op.controls)) in {(Kind.X, 0), (Kind.Z, 1)}


@style
@given(cascade=cascades(max_lines=6, max_gates=12))
def test_a_cascade_of_nots_leaves_no_phase_gate_behind_in_the_toffoli_set(gate_set, uncompute, cascade):
    """Blocks with outputs carry no phase: no Z but the corrections of measurements, no constant."""
    circuit = inplace(cascade, gate_set, uncompute)
    for op in circuit:
        assert op.kind is not Kind.GPHASE
        assert gate_set == "clifford+t" or op.kind is not Kind.Z or op.condition >= 0


@st.composite
def computing_blocks(draw: st.DrawFn) -> tuple[Block, tuple[int, ...]]:
    """A block with work lines that are computed, used and uncomputed, and an output that starts in 0."""
    inputs, work = draw(st.integers(2, 3)), draw(st.integers(1, 2))
    lines = inputs + 1 + work
    steps: list[Gate] = []
    for w in range(inputs + 1, lines):
        below = [line for line in range(w) if line != inputs]
        for _ in range(draw(st.integers(1, 2))):
            polarity = draw(st.lists(st.sampled_from((0, 1, 2)), min_size=len(below), max_size=len(below)))
            pairs = zip(below, polarity, strict=True)
            steps.append(Gate(w, tuple(2 * line + p - 1 for line, p in pairs if p)))
    use = draw(st.lists(gates(lines, phase=True), max_size=4))
    use = [gate for gate in use if gate.target in (PHASE, inputs)]
    cascade = Cascade.from_gates(lines, [*steps, *use, *reversed(steps)])
    return Block(cascade, "test", inputs, outputs=1, work=work), tuple(range(inputs + 1, lines))


@style
@given(
    case=computing_blocks(), aim=st.sampled_from(AIMS), oracle=st.sampled_from(["bit", "fresh", "compute"])
)
def test_known_zeros_are_used_and_right(gate_set, uncompute, case, aim, oracle):
    block, zeros = case
    registers = [("a", block.inputs), ("f", 1)]
    circuit = lower(block, registers, oracle=oracle, gates=gate_set, uncompute=uncompute, aim=aim)
    if circuit.qubits <= 10:
        check(circuit, block.cascade, zeros if oracle == "bit" else (block.inputs, *zeros))


@style
@given(cascade=cascades(max_lines=5, max_gates=8), value=st.integers(0, 1))
def test_preset_lines_count_as_known(gate_set, uncompute, cascade, value):
    """Line 0 preset: only states that keep the promise are compared."""
    block = Block(cascade, "test", cascade.lines, placement=Placement((), ((0, value),), ()))
    circuit = lower(block, [("line", cascade.lines)], oracle="embedded", gates=gate_set, uncompute=uncompute)
    flip = Cascade.from_gates(cascade.lines, [Gate(0)] if value else [])
    check(_after(inplace(flip, "cascade", "unitary"), circuit), flip + cascade, (0,))


def _after(first: Circuit, second: Circuit) -> Circuit:
    """Both one after the other, on the qubits of the second."""
    return Circuit(
        second.registers,
        second.bit_registers,
        np.concatenate([first.kind, second.kind]),
        np.concatenate([first.offset, second.offset[1:] + first.offset[-1]]),
        np.concatenate([first.operand, second.operand]),
        np.concatenate([first.condition, second.condition]),
        np.concatenate([first.bit, second.bit]),
        {},
        second.conditions,
    )


def test_a_product_on_a_fresh_output_takes_four_t_and_its_erasure_none():
    """Gidney, Quantum 2, 2018: a held AND is 4 T, and 4 more or none to erase it."""
    compute = Cascade.from_gates(3, [Gate(2, (0, 3))])
    block = Block(compute, "test", 2, outputs=1)
    for oracle, t in (("bit", 7), ("fresh", 4)):
        circuit = lower(block, [("a", 2), ("f", 1)], oracle=oracle, gates="clifford+t", uncompute="unitary")
        assert measure(circuit).t == t
    held = Cascade.from_gates(4, [Gate(3, (0, 3)), Gate(2, (6,)), Gate(3, (0, 3))])
    block = Block(held, "test", 2, outputs=1, work=1)
    for uncompute, t in (("unitary", 8), ("measured", 4)):
        circuit = lower(block, [("a", 2), ("f", 1)], oracle="bit", gates="clifford+t", uncompute=uncompute)
        assert (measure(circuit).t, circuit.qubits) == (t, 4)


def test_one_product_on_several_outputs_is_paid_once():
    cascade = Cascade.from_gates(6, [Gate(t, (0, 2, 5)) for t in (3, 4, 5)])
    assert measure(inplace(cascade, "clifford+t", "unitary")).t == 15
    assert measure(inplace(cascade, "clifford+t", "measured")).t == 8
    assert measure(inplace(cascade, "toffoli", "unitary")).toffoli == 3
    check(inplace(cascade, "clifford+t", "measured"), cascade)


@given(cascade=cascades(max_lines=6, max_gates=12, phase=True))
def test_t_is_never_above_the_estimate_that_methods_compare_by(cascade):
    for uncompute in ("unitary", "measured"):
        assert measure(inplace(cascade, "clifford+t", uncompute)).t <= cascade_t(cascade, uncompute)


def test_registers_and_measured_bits():
    cascade = Cascade.from_gates(6, [Gate(5, (0, 3, 4, 6))])
    block = Block(cascade, "test", 4, outputs=1, work=1)
    circuit = lower(
        block, [("a", 3), ("b", 1), ("mark", 1)], oracle="bit", gates="clifford+t", uncompute="measured"
    )
    assert [(r.name, r.size, r.start) for r in circuit.registers[:3]] == [
        ("a", 3, 0),
        ("b", 1, 3),
        ("mark", 1, 4),
    ]
    assert circuit.registers[3].name == "work"
    assert measure(circuit).work == circuit.registers[3].size
    assert [r.name for r in circuit.bit_registers] == ["seen"]
    assert circuit.bits == measure(circuit).measured
    plain = inplace(Cascade.from_gates(2, [Gate(1, (0,))]), "clifford+t", "measured")
    assert [r.name for r in plain.registers] == ["a"]
    assert plain.bit_registers == ()


def test_registers_that_do_not_add_up_are_refused():
    block = Block(full(3), "test", 3)
    with pytest.raises(ValueError, match=r"registers \[\('a', 2\)\] do not add up to 3 lines"):
        lower(block, [("a", 2)], oracle="inplace", gates="cascade", uncompute="unitary")


@pytest.mark.parametrize("gate_set", ["toffoli", "clifford+t"])
@pytest.mark.parametrize("uncompute", ["unitary", "measured"])
@pytest.mark.parametrize("lines", range(2, 8))
def test_an_odd_permutation_of_four_or_more_lines_needs_one_work_qubit(gate_set, uncompute, lines):
    """Gates on fewer lines than there are make even permutations only (common practice)."""
    least = lines + (lines >= 4)
    assert inplace(full(lines), gate_set, uncompute, aim="qubits").qubits == least
    assert inplace(full(lines), gate_set, uncompute, most=least).qubits == least
    with pytest.raises(BudgetError, match=rf"^needs at least {least} qubits, {least - 1} allowed$"):
        inplace(full(lines), gate_set, uncompute, most=least - 1)


def test_the_cascade_set_needs_no_scratch_and_keeps_its_budget():
    assert inplace(full(5), "cascade", "unitary", most=5).qubits == 5
    with pytest.raises(BudgetError, match=r"^needs at least 5 qubits, 4 allowed$") as caught:
        inplace(full(5), "cascade", "unitary", most=4)
    assert caught.value.exit_status == 1


@pytest.mark.parametrize("aim", AIMS)
@pytest.mark.parametrize(("gate_set", "uncompute"), STYLES[1:])
def test_t_falls_as_the_budget_grows(gate_set, uncompute, aim):
    """Budgets from the least upwards: all correct, none over its budget, T never rising for the aim T."""
    cascade = Cascade.from_gates(
        7,
        [
            Gate(6, (0, 2, 5, 7, 8)),
            Gate(2, (1, 2, 7, 9)),
            Gate(PHASE, (0, 3, 4, 6, 8, 10)),
            Gate(0, (4, 6, 10)),
        ],
    )
    least = inplace(cascade, gate_set, uncompute, aim="qubits").qubits
    found = []
    for most in range(least, 12):
        circuit = inplace(cascade, gate_set, uncompute, aim, most)
        assert circuit.qubits <= most
        check(circuit, cascade)
        found.append(measure(circuit).t + measure(circuit).toffoli)
    if aim == "t":
        assert found == sorted(found, reverse=True)
        assert found[-1] < found[0]


def test_small_sizes_do_not_stumble():
    empty = Cascade.from_gates(0, [])
    for gate_set, uncompute in STYLES:
        circuit = lower(Block(empty, "test", 0), [], oracle="phase", gates=gate_set, uncompute=uncompute)
        assert len(circuit) == 0
        minus = Cascade.from_gates(0, [Gate(PHASE)])
        circuit = lower(Block(minus, "test", 0), [], oracle="phase", gates=gate_set, uncompute=uncompute)
        assert [op.kind for op in circuit] == [Kind.GPHASE]


def test_bits_are_used_again_in_turn_where_there_are_very_many(monkeypatch):
    assert SEEN_BITS == 65536
    cascade = Cascade.from_gates(5, [Gate(4, (0, 2, 4, 6)), Gate(3, (1, 2, 8)), Gate(4, (0, 2, 4, 6))])
    monkeypatch.setattr("revsynth.lowering.block_circuit.SEEN_BITS", 2)
    circuit = inplace(cascade, "clifford+t", "measured")
    assert circuit.bits == 2 < measure(circuit).measured
    check(circuit, cascade)


def test_too_many_gates_are_refused_before_memory_runs_out(monkeypatch):
    monkeypatch.setattr("revsynth.lowering.assemble.MOST_GATES", 100)
    cascade = Cascade.from_gates(8, [Gate(7, (0, 2, 4, 6, 8, 10)), Gate(6, (0, 2, 4, 8, 14))] * 3)
    with pytest.raises(BudgetError, match=r"^the circuit would have \d+ gates, 100 are allowed$"):
        inplace(cascade, "clifford+t", "unitary")


PROGRAM = """
from revsynth.cascade import Cascade, Gate
from revsynth.lowering import lower
from revsynth.synthesis.interface import Block
gates = []
for i in range(90):
    lines = [line for line in range(7) if line != i % 7 and i >> line & 1]
    gates.append(Gate(i % 7, tuple(2 * line + (i * line >> 1 & 1) for line in lines)))
cascade = Cascade.from_gates(7, gates)
for oracle in ("bit", "fresh"):
    block = Block(cascade, "test", 5, outputs=2)
    for gates, uncompute, aim in (("clifford+t", "measured", "t"), ("toffoli", "unitary", "depth")):
        registers = [("a", 5), ("f", 2)]
        c = lower(block, registers, oracle=oracle, gates=gates, uncompute=uncompute, aim=aim)
        print(c.kind.tolist(), c.operand.tolist(), c.condition.tolist(), c.bit.tolist())
"""


def test_the_same_gates_under_two_hash_seeds():
    runs = [
        subprocess.run(
            [sys.executable, "-c", PROGRAM],
            env={**os.environ, "PYTHONHASHSEED": seed},
            capture_output=True,
            text=True,
            check=True,
        ).stdout
        for seed in ("1", "2")
    ]
    assert runs[0] == runs[1]
    assert len(runs[0]) > 1000


def test_small_work_does_not_import_the_compiler():
    program = PROGRAM + "import sys\nassert 'numba' not in sys.modules\n"
    subprocess.run([sys.executable, "-c", program], capture_output=True, check=True)
