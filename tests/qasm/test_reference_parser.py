"""Agreement with the reference parser of OpenQASM 3 (PyPI package `openqasm3`), which knows syntax alone."""

from __future__ import annotations

import contextlib
import io
import random

import openqasm3
import pytest
from hypothesis import given

from revsynth.circuit.model import Circuit, CircuitBuilder, Guard, Kind
from revsynth.errors import CircuitFileError
from revsynth.qasm import prepare, read, write
from tests.qasm.circuits import circuits

HEADER = 'OPENQASM 3.0; include "stdgates.inc"; qubit[3] a; qubit c; bit[2] m; bit w;\n'

ACCEPTED = [
    "x c;",
    "U(0, 0, 0) c;",
    "h a;",
    "cx a[0], a[1];",
    "cx a, c;",
    "x a[-1];",
    "x a[0:1];",
    "x a[0:2:2];",
    "x a[{0, 2}];",
    "x a[:];",
    "x a[1:];",
    "x a[1:2][0];",
    "x c,;",
    "x() c;",
    "p(pi / 4,) c;",
    "ctrl @ x a[0], c;",
    "negctrl @ ctrl @ x a[0], a[1], c;",
    "ctrl(2) @ z a[0], a[1], c;",
    "inv @ s c;",
    "pow(2) @ s c;",
    "pow(1/2) @ x c;",
    "pow(-1) @ inv @ t c;",
    "gphase(pi);",
    "ctrl @ gphase(pi / 2) c;",
    "w = measure c;",
    "m[0] = measure a[0];",
    "m = measure a[0:1];",
    "measure c -> w;",
    "measure a[0:1] -> m;",
    "bit d = measure c;",
    'bit[2] d = "00";',
    "bit d;",
    "creg d[2];",
    "qreg d[2];",
    "qubit d;",
    "qubit[2] d;",
    "reset a;",
    "reset c;",
    "barrier a;",
    "barrier a[0], c;",
    "barrier;",
    "if (w) x c;",
    "if (m[0]) { x c; }",
    "if (m == 2) x c; else z c;",
    "if (m[0] == 1 && !m[1]) { x c; } else if (w) { z c; } else { h c; }",
    "if (bool(w)) x c;",
    "if (m[0:1] == 2) x c;",
    'if (m == "01") x c;',
    "if (int[2](m) == 1) x c;",
    "if ((m & 1) == 1 || ~w) x c;",
    "for int i in [0:2] x a[i];",
    "for uint[4] i in {0, 2} { x a[i]; }",
    "for int i in [2:-1:0] { x a[i]; }",
    "gate f q { x q; }",
    "gate f(t_, u_) q, r { p(t_ / u_) q; cx q, r; }",
    "gate f() q { }",
    "gate f q, { }",
    "gate f(t_,) q { }",
    "gate f q { gphase(pi); barrier q; }",
    "gate f q { for int i in [0:1] { x q; } }",
    "gate f(θ) q { p(θ) q; }",
    "let d = a[0:1];",
    "let d = a[0] ++ c;",
    "const int n = 3;",
    "const float t_ = 0x1F + 0b11 + 0o7 + 1_000 + 1e3 + .5 + 5.;",
    "const uint[8] n = 3;",
    "const angle t_ = π / 2;",
    "const bool b = true;",
    "const float[64] t_ = sin(pi) ** 2;",
    "p(-pi / 2 ** 3) c;",
    "p(--1) c;",
    "p(!true ? 1 : 2) c;".replace("!true ? 1 : 2", "int(!true)"),
    "p(1 << 2 | 3 ^ 4 & 5) c;",
    "p(7 % 4) c;",
    "p(arccos(0.5)) c;",
    "/* a */ x /* b */ c;",
    "x c; // π\n",
    "@note one two\nx c;",
    "{ x c; }",
    'include "stdgates.inc";',
    "x c;\r\ny c;",
    "x\n\tc\n;",
    "CX a[0], c;",
    "rz(τ) c; rz(ℇ) c; rz(tau) c;",
    "gate x2 q { pow(2) @ x q; }",
    "p(1.5e+2) c;",
    "p(1E-2) c;",
    "p(0XfF) c;",
    "if (true) { } else { }",
]
"""Accepted by both."""

REFUSED = [
    "x c",
    "x ,c;",
    "x c c;",
    "x c; y",
    "x a[0",
    "x a]0[;",
    "cx a[0] a[1];",
    ";",
    "3",
    "x $;",
    "x c\\;",
    "ctrl(2)@x a;",
    "ctrl x c;",
    "ctrl @@ x c;",
    "@ x c;",
    "pow @ x c;",
    "inv(2) @ x c;",
    "gate f q { x q }",
    "gate f { x q; }",
    "gate ctrl q { }",
    "gate f q { reset q; }",
    "gate f q { measure q; }",
    "gate f(q) { }",
    "opaque f q;",
    "opaque f(t_) q, r;",
    "measure c -> w",
    "measure a[0], a[1] -> m;",
    "reset a, c;",
    "qubit d[2];",
    "qubit[2] d, e;",
    "qubit[] d;",
    "bit[2 d;",
    "qreg[2] d;",
    "creg;",
    "if m x c;",
    "if (m x c;",
    "if () x c;",
    "else x c;",
    "if (w) gate f q { }",
    "for i in [0:2] x a[i];",
    "for int i in 0:2 x a[i];",
    "for int i in [0:2] ",
    "let d a;",
    "const n = 3;",
    "const int n;",
    "p(1 c;",
    "p(1 +) c;",
    "p(+1) c;",
    "p(1e) c;",
    "p(1.5.2) c;",
    "p(0O7) c;",
    "p(1__0) c;",
    "p(1_) c;",
    "p(1 2) c;",
    "/* x c;",
    'include "a',
    "include x;",
    "OPENQASM 3.0;",
    "x c;\0",
    "x c;\f",
    "x c;\v",
    "x\u00a0c;",
    "x c;\u2028",
    "return;",
    "break;",
    "continue;",
    "@note",
    "{ x c;",
    "} x c;",
    "m[0] = ;",
    "= measure c;",
    "bit d = ;",
    "x a[0,;",
    "x {a};",
]
"""Refused by both."""

REFUSED_FOR_THEIR_MEANING = [
    "x;",
    "x d;",
    "foo c;",
    "cx c, c;",
    "cx c;",
    "p c;",
    "x a[3];",
    "x a[0, 1];",
    "x c[0];",
    "x (c);",
    "x m;",
    "qubit a;",
    "qubit x;",
    "gate x q { }",
    "gate f q { f q; }",
    "gate f q { x r; }",
    "gate U q { }",
    "qubit[0] d;",
    "def f(int n) { }",
    "extern f(int) -> int;",
    "defcal x q { }",
    "box { x c; }",
    "delay[1ns] c;",
    "stretch d;",
    "input float t_;",
    "output bit d;",
    "int n = 1;",
    'bit[2] d = "01";',
    "m[0] = 1;",
    "end;",
    "while (w) { }",
    "switch (m) { case 0 { x c; } }",
    "x $0;",
    "#pragma a",
    "pragma a",
    "negctrl(2) @ x a[0], a[1], c;",
    "ctrl(0) @ x c;",
    "measure c;",
    'include "other.inc";',
    "array[int[8], 2] d;",
    "complex d;",
    "p(1ns) c;",
    "p(2im) c;",
    "p(1/0) c;",
    "1 + 2;",
    "p(true) c;",
    "if (c) x c;",
    "let d = a ++ a;",
    "const int n = 1.5;",
    "gphase(pi) c;",
    "duration d = 1ns;",
    "p(08) c;".replace("08", "1 / (2 - 2)"),
    "qreg d; qreg d;",
    "m ^= measure a;",
]
"""Syntax that the reference parser takes (it checks no meaning), and that no circuit can be made of."""


def reference_accepts(text: str) -> bool:
    with contextlib.redirect_stderr(io.StringIO()):
        try:
            openqasm3.parse(text)
        except openqasm3.parser.QASM3ParsingError:
            return False
    return True


def reader_accepts(text: str) -> bool:
    try:
        read(text)
    except CircuitFileError:
        return False
    return True


@pytest.mark.parametrize("text", ACCEPTED)
def test_both_accept(text: str) -> None:
    assert reference_accepts(HEADER + text)
    read(HEADER + text)


@pytest.mark.parametrize("text", REFUSED)
def test_both_refuse(text: str) -> None:
    assert not reference_accepts(HEADER + text)
    assert not reader_accepts(HEADER + text)


@pytest.mark.parametrize("text", REFUSED_FOR_THEIR_MEANING)
def test_only_the_reader_refuses(text: str) -> None:
    assert reference_accepts(HEADER + text)
    assert not reader_accepts(HEADER + text)


@given(circuits(max_gates=15))
def test_everything_written_parses(circuit: Circuit) -> None:
    text = write(prepare(circuit, "openqasm3"), header=["Night shift: π ≤ 4", "*/ /* //"])
    program = openqasm3.parse(text)
    assert program.version == "3.0"
    kinds = [type(statement).__name__ for statement in program.statements]
    declared = 1 + len(circuit.registers) + len(circuit.bit_registers)
    assert len(kinds) == declared + len(prepare(circuit, "openqasm3"))


def test_a_written_file_of_two_thousand_lines_means_the_same_to_the_reference_parser() -> None:
    """Names, modifiers and operands of the reference syntax tree, statement by statement."""
    rng = random.Random(7)
    builder = CircuitBuilder()
    builder.add_register("a", 6)
    builder.add_register("work", 6)
    builder.add_bits("seen", 4)
    for _ in range(2000):
        qubits = rng.sample(range(12), 4)
        controls = [2 * qubit + rng.randrange(2) for qubit in qubits[1 : 1 + rng.randrange(4)]]
        builder.add(rng.choice([Kind.X, Kind.Z, Kind.H]), qubits[:1], controls)
    circuit = builder.build()
    statements = openqasm3.parse(write(prepare(circuit, "openqasm3"))).statements[4:]
    starts = {register.name: register.start for register in circuit.registers}
    base = {"x": 0, "cx": 1, "ccx": 2, "z": 0, "cz": 1, "h": 0, "ch": 1}
    for op, statement in zip(circuit, statements, strict=True):
        assert isinstance(statement, openqasm3.ast.QuantumGate)
        name = statement.name.name
        polarities: list[int] = []
        for modifier in statement.modifiers:
            count = 1 if modifier.argument is None else modifier.argument.value
            polarities += [int(modifier.modifier.name == "negctrl")] * count
        polarities += [0] * base[name]
        qubits = [starts[q.name.name] + q.indices[0][0].value for q in statement.qubits]
        assert tuple(2 * q + p for q, p in zip(qubits, polarities, strict=False)) == op.controls
        assert (qubits[-1],) == op.targets
        assert name.lstrip("c") == op.kind.name.lower()


def test_conditional_and_measuring_lines_parse_as_meant() -> None:
    builder = CircuitBuilder()
    builder.add_register("a", 2)
    builder.add_bits("seen", 2)
    builder.measure(1, 1)
    builder.z(1, (0,), condition=(Guard((2,)),))
    measure, branch = openqasm3.parse(write(builder.build())).statements[-2:]
    assert isinstance(measure, openqasm3.ast.QuantumMeasurementStatement)
    assert isinstance(branch, openqasm3.ast.BranchingStatement)
    assert [type(statement) for statement in branch.if_block] == [openqasm3.ast.QuantumGate]
    assert branch.else_block == []
