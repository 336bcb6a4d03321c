"""What statements mean: broadcasting, indices, conditions, loops, constants, gate definitions, versions."""

from __future__ import annotations

import ast
import math

import pytest
from hypothesis import given
from hypothesis import strategies as st

from revsynth.circuit.model import Circuit, Guard, Kind
from revsynth.qasm import read
from tests.qasm.circuits import H2, H3, close, u_matrix
from tests.slow_simulator import unitary


def brief(text: str) -> list[tuple[object, ...]]:
    """Operations as (name, controls, targets, then angles, condition and bit where there are any)."""
    circuit = read(text).circuit
    return [
        (op.kind.name, op.controls, op.targets)
        + ((op.angles,) if op.angles else ())
        + ((circuit.conditions[op.condition],) if op.condition >= 0 else ())
        + ((op.bit,) if op.bit >= 0 else ())
        for op in circuit
    ]


def same(one: str, other: str) -> bool:
    return brief(one) == brief(other)


REGISTERS = f"{H3}qubit[3] a;\nqubit[3] b;\nqubit c;\nbit[3] m;\nbit w;\n"

EQUIVALENT_3 = [
    ("h a;", "h a[0]; h a[1]; h a[2];"),
    ("cx a, b;", "cx a[0], b[0]; cx a[1], b[1]; cx a[2], b[2];"),
    ("cx a, c;", "cx a[0], c; cx a[1], c; cx a[2], c;"),
    ("ccx a, b[1], c;", "ccx a[0], b[1], c; ccx a[1], b[1], c; ccx a[2], b[1], c;"),
    ("h a[-1];", "h a[2];"),
    ("h a[0:1];", "h a[0]; h a[1];"),
    ("h a[0:2:2];", "h a[0]; h a[2];"),
    ("h a[2:-1:0];", "h a[2]; h a[1]; h a[0];"),
    ("h a[:];", "h a;"),
    ("h a[1:];", "h a[1]; h a[2];"),
    ("h a[:1];", "h a[0]; h a[1];"),
    ("h a[-2:-1];", "h a[1]; h a[2];"),
    ("h a[{2, 0}];", "h a[2]; h a[0];"),
    ("h a[1:2][0];", "h a[1];"),
    ("h a[{2, 0}][-1];", "h a[0];"),
    ("cx a[0:1], b[{2, 0}];", "cx a[0], b[2]; cx a[1], b[0];"),
    ("let d = a[1:2]; x d[0]; x d;", "x a[1]; x a[1]; x a[2];"),
    ("let d = a[2] ++ b[0:1]; x d;", "x a[2]; x b[0]; x b[1];"),
    ("let d = a[1]; x d;", "x a[1];"),
    ("m = measure a;", "m[0] = measure a[0]; m[1] = measure a[1]; m[2] = measure a[2];"),
    ("measure a -> m;", "m = measure a;"),
    ("m[0:1] = measure b[1:2];", "m[0] = measure b[1]; m[1] = measure b[2];"),
    ("w = measure c;", "measure c -> w;"),
    ("m[1] = measure c;", "measure c -> m[1];"),
    ("reset a;", "reset a[0]; reset a[1]; reset a[2];"),
    ("barrier a, c; barrier; x c;", "x c;"),
    ("x c; /* a; b */ // y c;\nz c;", "x c; z c;"),
    ("for int i in [0:2] x a[i];", "x a;"),
    ("for uint[8] i in {2, 0} { x a[i]; h b[i]; }", "x a[2]; h b[2]; x a[0]; h b[0];"),
    ("for int i in [2:-1:0] x a[i];", "x a[2]; x a[1]; x a[0];"),
    ("for int i in [1:0] x a[i];", ""),
    ("for int i in [0:1] for int j in [i+1:2] cx a[i], a[j];", "cx a[0],a[1]; cx a[0],a[2]; cx a[1],a[2];"),
    ("for int i in [0:2] p(pi/2**i) a[i];", "p(pi) a[0]; p(pi/2) a[1]; p(pi/4) a[2];"),
    ("{ x c; { z c; } }", "x c; z c;"),
    ("const int n = 2; x a[n]; rz(n*pi/8) c;", "x a[2]; rz(pi/4) c;"),
    ("const float u_ = pi/3; const float v = u_/2; rz(v) c;", "rz(pi/6) c;"),
    ("const uint[4] n = 15; rz(n) c;", "rz(15) c;"),
    ("const angle w_ = π; rz(w_) c;", "rz(pi) c;"),
    ("const bool on = true; if (on) x c; else z c;", "x c;"),
    ("if (1 == 2) x c; else z c;", "z c;"),
    ("x() c;", "x c;"),
    ("x c,;", "x c;"),
    ("gate f(t,) q, r, { p(t) r; } f(1,) a[0], c,;", "p(1) c;"),
    ("gate f q { for int i in [1:3] p(i) q; { x q; } } f c;", "p(1) c; p(2) c; p(3) c; x c;"),
    ("gate f(l) q { p(l) q; } gate g(l) q,r { f(2*l) r; f(-l) q; } g(0.5) a[0],c;", "p(1) c; p(-0.5) a[0];"),
    ("gate f q { } f c;", ""),
    ("gate f q { barrier q; x q; } f a;", "x a;"),
    ("const int n = 3; gate f(n) q { p(n) q; } f(1) c; p(n) c;", "p(1) c; p(3) c;"),
    ("gate rzz(t) q, r { cx q, r; x q; } rzz(1) a[0], c;", "cx a[0], c; x a[0];"),
    ("rzz(1) a[0], c; gate rzz(t) q, r { x q; } rzz(1) a[0], c;", "cx a[0], c; rz(1) c; cx a[0], c; x a[0];"),
    ("@note anything at all !$\nx c;", "x c;"),
    ("id c;", ""),
    ("bit[2] e = \"00\"; bit f = 0; x c;", "x c;"),
    ("CX a[0], c; U(0, 0, pi) c;", "cx a[0], c; U(0, 0, pi) c;"),
]  # fmt: skip


@pytest.mark.parametrize(("one", "other"), EQUIVALENT_3)
def test_two_ways_to_say_the_same_in_openqasm3(one: str, other: str) -> None:
    assert same(REGISTERS + one, REGISTERS + other)


EQUIVALENT_2 = [
    ("h a;", "h a[0]; h a[1]; h a[2];"),
    ("cx a,b;", "cx a[0],b[0]; cx a[1],b[1]; cx a[2],b[2];"),
    ("measure a -> m;", "measure a[0]->m[0]; measure a[1]->m[1]; measure a[2]->m[2];"),
    ("gate f(t) q,r { cx q,r; u1(t/2) r; barrier q,r; } f(pi) a[1],b[1];", "cx a[1],b[1]; u1(pi/2) b[1];"),
    ("rz(2^3) a[0];", "u1(8) a[0];"),
    ("rz(-2^2) a[0];", "u1(-4) a[0];"),
    ("rz(2^3^0) a[0];", "u1(2) a[0];"),
    ("rz(ln(exp(1))+cos(0)) a[0];", "u1(2) a[0];"),
    ("rz(1/2) a[0];", "u1(0.5) a[0];"),
    ("opaque f(t) q,r; x a[0];", "x a[0];"),
    ("qreg in[2]; x in[1]; creg int[2]; measure in -> int;", "qreg d[2]; x d[1]; creg e[2]; measure d -> e;"),
    ("reset a[0]; barrier a,b[0]; x a[0];", "reset a[0]; x a[0];"),
    ("U(0,0,pi) a[0]; CX a[0],b[0];", "u3(0,0,pi) a[0]; cx a[0],b[0];"),
]


@pytest.mark.parametrize(("one", "other"), EQUIVALENT_2)
def test_two_ways_to_say_the_same_in_openqasm2(one: str, other: str) -> None:
    registers = f"{H2}qreg a[3];\nqreg b[3];\ncreg m[3];\n"
    assert same(registers + one, registers + other)


CONDITIONS = [
    ("w", lambda m, w: w == 1),
    ("!w", lambda m, w: w == 0),
    ("w == 1", lambda m, w: w == 1),
    ("w == true", lambda m, w: w == 1),
    ("0 == w", lambda m, w: w == 0),
    ("w != 1", lambda m, w: w == 0),
    ("bool(w)", lambda m, w: w == 1),
    ("m == 5", lambda m, w: m == 5),
    ("5 == m", lambda m, w: m == 5),
    ("m != 5", lambda m, w: m != 5),
    ("m == 9", lambda m, w: False),
    ("m", lambda m, w: m != 0),
    ("!m", lambda m, w: m == 0),
    ('m == "110"', lambda m, w: m == 6),
    ("m < 3", lambda m, w: m < 3),
    ("m <= 3", lambda m, w: m <= 3),
    ("m > 5", lambda m, w: m > 5),
    ("m >= 5", lambda m, w: m >= 5),
    ("2 < m", lambda m, w: m > 2),
    ("int[4](m) == 3", lambda m, w: m == 3),
    ("uint(m) == 7", lambda m, w: m == 7),
    ("m[0:1] == 2", lambda m, w: m & 3 == 2),
    ("m[{2, 0}] == 1", lambda m, w: m >> 2 & 1 == 1 and m & 1 == 0),
    ("m[0] == 1 && !m[1]", lambda m, w: m & 3 == 1),
    ("m[0] || w", lambda m, w: m & 1 == 1 or w == 1),
    ("(m[0] && m[1]) || (m[2] && w)", lambda m, w: m & 3 == 3 or (m >= 4 and w == 1)),
    ("m[0] ^ w", lambda m, w: (m & 1) != w),
    ("m[0] == m[1]", lambda m, w: (m & 1) == (m >> 1 & 1)),
    ("m[0] != w", lambda m, w: (m & 1) != w),
    ("(m & 5) == 4", lambda m, w: m & 5 == 4),
    ("(m | 3) == 7", lambda m, w: m | 3 == 7),
    ("(m ^ 3) == 0", lambda m, w: m == 3),
    ("~m[0]", lambda m, w: m & 1 == 0),
    ("~m == 2", lambda m, w: m ^ 7 == 2),
    ("m[0] & m[1] & m[2]", lambda m, w: m == 7),
    ("!(m == 2 || w) && true", lambda m, w: m != 2 and w == 0),
    ("m[0] < m[1:2]", lambda m, w: (m & 1) < m >> 1),
    ("false || m[0]", lambda m, w: m & 1 == 1),
    ("m == 4.0", lambda m, w: m == 4),
    ("m[0] == bool(1)", lambda m, w: m & 1 == 1),
    ("m == (1 << 2) + 1", lambda m, w: m == 5),
]


@pytest.mark.parametrize(("condition", "meaning"), CONDITIONS)
@pytest.mark.parametrize(
    "shape", ["if ({}) {{ x c; }}", "if ({}) x c; else {{ z c; }}", "if ({}) {{}} else z c;"]
)
def test_conditions_hold_for_exactly_the_right_bits(condition: str, meaning: object, shape: str) -> None:
    circuit = read(REGISTERS + shape.format(condition)).circuit
    for value in range(16):
        m, w = value & 7, value >> 3
        acting = {op.kind.name for op in circuit if holds(circuit, op.condition, value)}
        assert callable(meaning)
        wanted = {"X"} if meaning(m, w) else {"Z"}
        there = {"X"} if "x c" in shape else set()
        there |= {"Z"} if "z c" in shape else set()
        assert acting == wanted & there


def holds(circuit: Circuit, condition: int, value: int) -> bool:
    """Whether a condition holds, bit i of `value` being bit i."""
    return condition < 0 or all(
        all((value >> (entry >> 1) & 1) != (entry & 1) for entry in guard.bits) == guard.expected
        for guard in circuit.conditions[condition]
    )


def test_conditions_inside_conditions_are_joined() -> None:
    text = "if (m[0]) { if (!m[1]) x c; else { if (w) z c; } }"
    assert brief(REGISTERS + text) == [
        ("X", (), (6,), (Guard((0, 3)),)),
        ("Z", (), (6,), (Guard((0, 2, 6)),)),
    ]


def test_a_measurement_into_a_bit_of_the_condition_may_come_last() -> None:
    assert brief(REGISTERS + "if (m[0]) { x c; m[0] = measure c; } x c;")[1] == (
        "MEASURE", (), (6,), (Guard((0,)),), 0,
    )  # fmt: skip


def test_version_2_compares_a_whole_register() -> None:
    text = f"{H2}qreg a[1]; creg c[2]; creg d[1];\nif(c==2) x a[0];\nif (d == 1) measure a[0] -> c[0];\n"
    assert brief(text) == [
        ("X", (), (0,), (Guard((1, 2)),)),
        ("MEASURE", (), (0,), (Guard((4,)),), 0),
    ]


@pytest.mark.parametrize(
    ("text", "version"),
    [
        (H2, "2.0"),
        (H3, "3.0"),
        ("OPENQASM 2;\n", "2.0"),
        ("OPENQASM 3;\n", "3.0"),
        ("OPENQASM 3.1;\n", "3.0"),
        ("", "3.0"),
        ('include "qelib1.inc";\n', "2.0"),
        ('include "stdgates.inc";\n', "3.0"),
    ],
)
def test_versions(text: str, version: str) -> None:
    program = read("// first\n" + text + "qreg a[2];\n")
    assert program.version == version
    assert program.circuit.qubits == 2
    assert program.comments == ("first",)


def test_a_file_without_a_version_has_the_standard_gates() -> None:
    assert brief("qubit a; x a; gate h q { z q; } h a;") == [("X", (), (0,)), ("Z", (), (0,))]


def test_registers_are_numbered_in_order_even_between_gates() -> None:
    circuit = read(
        f"{H3}qubit[2] a; x a[1]; bit m; qubit[3] b; qubit c; x b[2]; m = measure c; bit[2] n;"
    ).circuit
    assert [(r.name, r.size, r.start) for r in circuit.registers] == [("a", 2, 0), ("b", 3, 2), ("c", 1, 5)]
    assert [(r.name, r.size, r.start) for r in circuit.bit_registers] == [("m", 1, 0), ("n", 2, 1)]
    assert [op.targets for op in circuit] == [(1,), (4,), (5,)]


def test_comment_lines_are_kept_in_order() -> None:
    text = (
        "// one\n//two\n  //   three  \n//\nOPENQASM 3.0;\nqubit a; // not a line\n/* // nor\n */\n// four\n"
    )
    assert read(text).comments == ("one", "two", "  three", "", "four")
    assert read(text + "// five").comments[-1] == "five"


@pytest.mark.parametrize("ending", ["\n", "\r\n", "\r"])
def test_line_ends_of_all_systems(ending: str) -> None:
    text = ending.join(
        ["\ufeff// one", "OPENQASM 3.0;", "// two", "qubit a;", "U(0,0,1) a; // x", "U(0,0,1) a;", ""]
    )
    program = read(text)
    assert len(program.circuit) == 2
    assert program.comments == ("one", "two")


NUMBERS = [
    ("pi", math.pi), ("π", math.pi), ("tau", math.tau), ("τ", math.tau), ("euler", math.e), ("ℇ", math.e),
    ("pi/2", math.pi / 2), ("-pi/4", -math.pi / 4), ("3*pi/4", 3 * math.pi / 4), ("1e-3", 1e-3), (".5", 0.5),
    ("5.", 5.0), ("1_000", 1000.0), ("0x1F", 31.0), ("0b101", 5.0), ("0o17", 15.0), ("1.5e+2", 150.0),
    ("2**3**2", 512.0), ("-2**2", -4.0), ("2**-1", 0.5), ("(1+2)*3", 9.0), ("1-2-3", -4.0), ("8/2/2", 2.0),
    ("7 % 3", 1.0), ("-7 % 3", -1.0), ("7.5 % 2", 1.5), ("1/2", 0.5), ("3/2*pi", 1.5 * math.pi), ("--1", 1.0),
    ("sin(pi/6)", math.sin(math.pi / 6)), ("cos(0)", 1.0), ("tan(1)", math.tan(1)), ("exp(1)", math.e),
    ("log(euler)", 1.0), ("sqrt(2)", math.sqrt(2)), ("arccos(0)", math.acos(0)), ("arcsin(1)", math.asin(1)),
    ("arctan(1)", math.atan(1)), ("ceiling(1.2)", 2.0), ("floor(1.8)", 1.0), ("mod(7, 4)", 3.0),
    ("pow(2, 5)", 32.0), ("6 & 3", 2.0), ("6 | 3", 7.0), ("6 ^ 3", 5.0), ("1 << 4", 16.0), ("16 >> 3", 2.0),
    ("float(3)", 3.0), ("int(3.9)", 3.0), ("int[8](2)", 2.0), ("1 + 2 * 3", 7.0), ("2 * sin(0) + 1", 1.0),
    ("sqrt(pow(3, 2) + pow(4, 2))", 5.0),
]  # fmt: skip


@pytest.mark.parametrize(("text", "value"), NUMBERS)
def test_constant_expressions(text: str, value: float) -> None:
    (op,) = read(f"{H3}qubit a;\np({text}) a;\n").circuit
    assert op.angles == (pytest.approx(value, abs=1e-15, rel=1e-15),)


@st.composite
def sums(draw: st.DrawFn, depth: int = 3) -> str:
    """An arithmetic expression that Python writes the same way."""
    if depth == 0 or draw(st.booleans()):
        return str(draw(st.integers(0, 20)))
    left, right = draw(sums(depth - 1)), draw(sums(depth - 1))
    text = f"{left} {draw(st.sampled_from(['+', '-', '*', '&', '|', '^', '<<']))} {right}"
    return draw(st.sampled_from([text, f"({text})", f"-({text})"]))


@given(sums())
def test_integer_expressions_bind_as_in_c(text: str) -> None:
    """Python binds these operators as C and the standard do: << under + -, then & ^ |."""

    def value(node: ast.expr) -> int:
        if isinstance(node, ast.Constant):
            assert isinstance(node.value, int)
            return node.value
        if isinstance(node, ast.UnaryOp):
            return -value(node.operand)
        assert isinstance(node, ast.BinOp)
        left, right = value(node.left), value(node.right)
        if isinstance(node.op, ast.LShift):
            if not 0 <= right <= 4096:
                raise ValueError
            return left << right
        return {
            ast.Add: left + right, ast.Sub: left - right, ast.Mult: left * right,
            ast.BitAnd: left & right, ast.BitOr: left | right, ast.BitXor: left ^ right,
        }[type(node.op)]  # fmt: skip

    try:
        expected = value(ast.parse(text, mode="eval").body)
        float(expected)
    except (ValueError, OverflowError):
        return
    if abs(expected).bit_length() > 900:
        return
    (op,) = read(f"{H3}qubit a;\np({text}) a;\n").circuit
    assert op.angles == (float(expected),)


def test_u_is_the_textbook_matrix() -> None:
    assert close(unitary(read("qubit a; U(0.3, 0.4, 0.5) a;").circuit), u_matrix(0.3, 0.4, 0.5))


def test_a_gate_definition_is_applied_under_control() -> None:
    assert brief(REGISTERS + "gate f q, r { cx q, r; h r; } ctrl @ f a[0], a[1], c;") == [
        ("X", (0, 2), (6,)),
        ("H", (0,), (6,)),
    ]


def test_kinds_of_plain_gates() -> None:
    gates = "ccx a[0],a[1],a[2]; ctrl(2) @ z a[0],a[1],a[2]; swap a[0],a[1]; cswap a[0],a[1],a[2]; sx a[0];"
    text = f"{H3}qubit[4] a;\n{gates}"
    assert [(op.kind, op.controls, op.targets) for op in read(text).circuit] == [
        (Kind.X, (0, 2), (2,)),
        (Kind.Z, (0, 2), (2,)),
        (Kind.SWAP, (), (0, 1)),
        (Kind.SWAP, (0,), (1, 2)),
        (Kind.SX, (), (0,)),
    ]
