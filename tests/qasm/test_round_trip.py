"""What is written reads back gate for gate, in every format, on both paths of the reader."""

from __future__ import annotations

import math
import subprocess
import sys

import pytest
from hypothesis import given
from hypothesis import strategies as st

from revsynth.circuit.model import Circuit, CircuitBuilder, Guard, Kind
from revsynth.errors import UsageError
from revsynth.qasm import prepare, read, write
from revsynth.qasm.dialects import NAMES_PLAIN
from revsynth.qasm.formula import canonical
from revsynth.qasm.prepare import one_register
from revsynth.qasm.writer import angle_text, comment_line
from tests.qasm.circuits import angles, circuits, conditions

KINDS_2 = (
    Kind.X, Kind.Z, Kind.H, Kind.S, Kind.SDG, Kind.T, Kind.TDG, Kind.P, Kind.SX, Kind.SWAP, Kind.RZ,
    Kind.GPHASE,
)  # fmt: skip


@given(circuits())
def test_openqasm3_reads_back_gate_for_gate(circuit: Circuit) -> None:
    prepared = prepare(circuit, "openqasm3")
    text = write(prepared, format="openqasm3", header=["beacons"])
    program = read(text)
    assert program.circuit == prepared
    assert program.version == "3.0"
    assert program.comments == ("beacons",)


@given(circuits())
def test_the_parser_alone_reads_the_same_as_with_the_fast_path(circuit: Circuit) -> None:
    """A block comment before each statement keeps the fast path from taking its line."""
    text = write(prepare(circuit, "openqasm3"), format="openqasm3")
    slow = "\n".join("/**/" + line for line in text.split("\n"))
    assert read(slow).circuit == read(text).circuit


@given(circuits(kinds=KINDS_2, max_controls=0, conditional=False))
def test_openqasm2_reads_back_gate_for_gate(circuit: Circuit) -> None:
    prepared = prepare(circuit, "openqasm2")
    program = read(write(prepared, format="openqasm2", header=["beacons"]))
    assert program.circuit == prepared
    assert program.version == "2.0"


@given(circuits(kinds=(Kind.X, Kind.Z), max_controls=2, negative=False, conditional=False))
def test_openqasm2_holds_toffoli_gates(circuit: Circuit) -> None:
    prepared = prepare(circuit, "openqasm2")
    assert read(write(prepared, format="openqasm2")).circuit == prepared


@given(circuits(kinds=(Kind.MEASURE, Kind.RESET, Kind.X, Kind.H), max_controls=0), st.integers(0, 7))
def test_openqasm2_holds_measurements_and_conditions_on_a_whole_register(
    circuit: Circuit, value: int
) -> None:
    builder = CircuitBuilder()
    for register in circuit.registers:
        builder.add_register(register.name, register.size)
    builder.add_bits("seen", 3)
    condition = (Guard(tuple(2 * bit + 1 - (value >> bit & 1) for bit in range(3))),)
    for op in circuit:
        builder.add(
            op.kind, op.targets, op.controls, op.angles, condition if op.condition >= 0 else (), op.bit
        )
    prepared = prepare(builder.build(), "openqasm2")
    assert read(write(prepared, format="openqasm2")).circuit == prepared


@given(
    circuits(
        kinds=(Kind.X, Kind.Z, Kind.H, Kind.S, Kind.SDG, Kind.T, Kind.TDG, Kind.SX, Kind.SWAP),
        max_controls=0,
        conditional=False,
    )
)
def test_plain_reads_back_as_one_register(circuit: Circuit) -> None:
    prepared = prepare(circuit, "plain")
    text = write(prepared, format="plain", header=["left out"])
    without_bits = Circuit(
        prepared.registers, (), prepared.kind, prepared.offset, prepared.operand, prepared.condition,
        prepared.bit, prepared.angles, prepared.conditions,
    )  # fmt: skip
    assert read(text).circuit == one_register(without_bits)
    lines = text.splitlines()
    assert lines[:3] == ["OPENQASM 2.0;", 'include "qelib1.inc";', f"qreg q[{circuit.qubits}];"]
    assert all(line.split()[0] in NAMES_PLAIN.values() for line in lines[3:])


def small_circuit() -> CircuitBuilder:
    builder = CircuitBuilder()
    builder.add_register("a", 4)
    builder.add_register("work", 2)
    builder.add_bits("seen", 3)
    return builder


def test_the_text_of_openqasm3() -> None:
    builder = small_circuit()
    builder.x(0, (2, 5))
    builder.x(0, (2, 4, 6, 9, 11))
    builder.z(0, (2, 4))
    builder.z(0, (2,))
    builder.x(5, (0, 2))
    builder.s(1, inverse=True)
    builder.measure(5, 0)
    builder.z(1, (0,), condition=(Guard((0,)),))
    builder.x(1, condition=(Guard((0, 3)), Guard((2, 4), False)))
    builder.add(Kind.GPHASE, (), (), (math.pi,))
    builder.add(Kind.RZ, (2,), (), (-3 * math.pi / 4,))
    builder.add(Kind.U, (2,), (1,), (0.5, 0.25, math.pi))
    builder.add(Kind.U, (2,), (1, 6), (0.5, 0.25, math.pi))
    builder.add(Kind.RESET, (5,))
    text = write(
        prepare(builder.build(), "openqasm3"), format="openqasm3", header=["Night shift", "two\nlines"]
    )
    assert text.splitlines() == [
        "// Night shift",
        "// two lines",
        "OPENQASM 3.0;",
        'include "stdgates.inc";',
        "qubit[4] a;",
        "qubit[2] work;",
        "bit[3] seen;",
        "ctrl @ negctrl @ x a[1], a[2], a[0];",
        "ctrl(3) @ negctrl @ negctrl @ x a[1], a[2], a[3], work[0], work[1], a[0];",
        "ctrl(2) @ z a[1], a[2], a[0];",
        "cz a[1], a[0];",
        "ccx a[0], a[1], work[1];",
        "sdg a[1];",
        "seen[0] = measure work[1];",
        "if (seen[0]) { cz a[0], a[1]; }",
        "if (seen[0] && !seen[1] && !(seen[1] && seen[2])) { x a[1]; }",
        "gphase(pi);",
        "rz(-3*pi/4) a[2];",
        "negctrl @ U(0.5, 0.25, pi) a[0], a[2];",
        "negctrl @ cu(0.5, 0.25, pi, 0) a[0], a[3], a[2];",
        "reset work[1];",
    ]
    assert text.endswith(";\n")


def test_the_text_of_openqasm2_and_plain() -> None:
    builder = small_circuit()
    builder.z(0, (2, 4))
    builder.add(Kind.GPHASE, (), (), (math.pi,))
    prepared = prepare(builder.build(), "openqasm2")
    assert write(prepared, format="openqasm2", header=["t"]).splitlines() == [
        "// t",
        "OPENQASM 2.0;",
        'include "qelib1.inc";',
        "qreg a[4];",
        "qreg work[2];",
        "creg seen[3];",
        "h a[0];",
        "ccx a[1],a[2],a[0];".replace(",", ", "),
        "h a[0];",
        "x a[0];",
        "z a[0];",
        "x a[0];",
        "z a[0];",
    ]
    builder = small_circuit()
    builder.cx(0, 5)
    assert write(prepare(builder.build(), "plain"), format="plain").splitlines()[2:] == [
        "qreg q[6];",
        "cx q[0], q[5];",
    ]


@pytest.mark.parametrize(
    ("format", "kind", "controls", "message"),
    [
        ("openqasm2", Kind.X, (0, 2, 4), "operation 1 is X with 3 controls, which format 'openqasm2' has no"),
        ("openqasm2", Kind.X, (1,), "operation 1 has a negative control"),
        ("openqasm2", Kind.H, (0, 2), "operation 1 is H with 2 controls"),
        ("plain", Kind.X, (0, 2), "operation 1 is X with 2 controls, which format 'plain' has no gate for"),
        ("plain", Kind.Z, (0, 2), "operation 1 is Z with 2 controls, which format 'plain' has no gate for"),
        ("plain", Kind.RESET, (), "operation 1 is RESET, which format 'plain' has no gate for: use format"),
    ],
)  # fmt: skip
def test_what_a_format_cannot_hold_is_refused(
    format: str, kind: Kind, controls: tuple[int, ...], message: str
) -> None:
    builder = small_circuit()
    builder.add(kind, (5,), controls)
    with pytest.raises(UsageError, match=message):
        prepare(builder.build(), format)
    with pytest.raises(UsageError, match="operation 1"):
        write(builder.build(), format=format)


def test_conditions_that_openqasm2_cannot_say_are_refused() -> None:
    builder = small_circuit()
    builder.x(0, condition=(Guard((0,)),))
    several = small_circuit()
    several.x(0, condition=(Guard((0, 2, 4), False), Guard((2,))))
    with pytest.raises(UsageError, match="operation 1 has a condition that format"):
        prepare(several.build(), "openqasm2")
    for format in ("openqasm2", "plain"):
        with pytest.raises(UsageError, match="operation 1 has a condition that format"):
            prepare(builder.build(), format)
        with pytest.raises(UsageError, match="operation 1 has a condition that format"):
            write(builder.build(), format=format)


def test_a_condition_in_another_form_must_be_prepared_first() -> None:
    builder = small_circuit()
    builder.x(0, condition=(Guard((2,)), Guard((0,))))
    with pytest.raises(UsageError, match="prepare the circuit first"):
        write(builder.build())
    prepared = prepare(builder.build(), "openqasm3")
    assert prepared.conditions == ((Guard((0, 2)),),)


def test_operations_that_can_never_happen_are_left_out() -> None:
    builder = small_circuit()
    builder.x(0, condition=(Guard((0, 1)),))
    builder.x(1)
    assert [op.targets for op in prepare(builder.build(), "openqasm3")] == [(1,)]


@pytest.mark.parametrize(
    ("name", "format"),
    [("x", "openqasm3"), ("bit", "openqasm3"), ("a b", "openqasm3"), ("Q", "openqasm2"), ("cx", "openqasm2"),
     ("pi", "openqasm3"), ("a", "openqasm3")],
)  # fmt: skip
def test_register_names_that_readers_trip_over_are_refused(name: str, format: str) -> None:
    builder = CircuitBuilder()
    builder.add_register(name, 1)
    builder.add_register("a", 1)
    with pytest.raises(UsageError, match=f"cannot have a register called '{name if name != 'a' else 'a'}'"):
        write(builder.build(), format=format)


def test_empty_registers_are_refused() -> None:
    builder = CircuitBuilder()
    builder.add_register("a", 1)
    builder.add_bits("seen", 0)
    with pytest.raises(UsageError, match="no register of bits may be empty"):
        write(builder.build())
    builder.add_register("work", 0)
    with pytest.raises(UsageError, match="no register may be empty"):
        write(builder.build())


def test_a_circuit_without_qubits_is_refused() -> None:
    with pytest.raises(UsageError, match="at least one qubit"):
        write(CircuitBuilder().build())


@given(angles)
def test_angles_are_written_exactly(angle: float) -> None:
    read_back = read(f"rz({angle_text(angle)}) a;".join(("qubit a; ", ""))).circuit
    assert [op.angles[0] for op in read_back] == [angle]


@pytest.mark.parametrize(
    ("angle", "text"),
    [(math.pi, "pi"), (-math.pi / 4, "-pi/4"), (3 * math.pi / 8, "3*pi/8"), (math.pi / 3, "pi/3"), (0.0, "0"),
     (math.pi / 2**20, "pi/1048576"), (0.5, "0.5"), (1e-7, "1.0e-07"), (2 * math.pi, "2*pi")],
)  # fmt: skip
def test_angles_are_fractions_of_pi_where_exact(angle: float, text: str) -> None:
    assert angle_text(angle) == text


@pytest.mark.parametrize("angle", [math.inf, math.nan])
def test_angles_that_are_no_number_are_refused(angle: float) -> None:
    with pytest.raises(UsageError, match="cannot be written"):
        angle_text(angle)


@given(st.text())
def test_header_lines_are_one_line_of_printable_characters(text: str) -> None:
    line = comment_line(text)
    assert line.startswith("//")
    assert line.isprintable()
    assert len(line.splitlines()) == 1
    builder = small_circuit()
    written = write(builder.build(), header=[text, "last"])
    assert read(written).comments == (line[3:].rstrip() if len(line) > 2 else "", "last")
    written.encode("utf-8")


@given(conditions(3))
def test_the_form_of_a_condition_keeps_its_meaning(condition: tuple[Guard, ...]) -> None:
    form = canonical(condition)
    for bits in range(8):
        holds = [
            all(
                all((bits >> (entry >> 1) & 1) != (entry & 1) for entry in guard.bits) == guard.expected
                for guard in c
            )
            for c in (condition, form or ())
        ]
        assert holds[0] == (form is not None and holds[1])
    if form is not None:
        assert canonical(form) == form


def test_same_circuit_same_bytes_under_any_hash_seed() -> None:
    script = (
        "from revsynth.circuit.model import *; from revsynth.qasm import *\n"
        "b = CircuitBuilder(); b.add_register('a', 3); b.add_bits('seen', 3)\n"
        "b.x(0, (2, 5), condition=(Guard((4, 1, 2)), Guard((3, 0), False), Guard((5, 2), False)))\n"
        "print(write(prepare(b.build(), 'openqasm3'), format='openqasm3', header=['t']))\n"
    )
    outputs = {
        subprocess.run(
            [sys.executable, "-c", script], env={"PYTHONHASHSEED": seed}, capture_output=True, check=True
        ).stdout
        for seed in ("1", "2")
    }
    assert len(outputs) == 1
