"""The fast path is taken where it should be, left where it must be, and never changes what a file means."""

from __future__ import annotations

import pytest
from hypothesis import given
from hypothesis import strategies as st

from revsynth.errors import CircuitFileError
from revsynth.qasm import read
from revsynth.qasm.fast_path import FastPath
from revsynth.qasm.parser import Parser
from tests.qasm.circuits import H2, H3


def statements_parsed(text: str, monkeypatch: pytest.MonkeyPatch) -> int:
    """How many statements of the file itself went to the parser."""
    count = 0
    original = Parser.top_level

    def counted(parser: Parser) -> object:
        nonlocal count
        count += parser.source.name == "whole"
        return original(parser)

    monkeypatch.setattr(Parser, "top_level", counted)
    read(text, source="whole")
    return count


LINES_3 = [
    "x a[0];", "cx a[0], a[1];", "ctrl @ negctrl @ x a[0], a[1], a[2];", "ctrl(2) @ z a[0], a[1], a[2];",
    "rz(-3*pi/4) a[1];", "U(0.1, pi, -2) a[1];", "  h a[2];", "m[0] = measure a[1];", "measure a[1] -> m[0];",
    "if (m[0]) { cz a[0], a[1]; }", "if (m[0] && !m[1] && !(m[0] && m[1])) { x a[0]; }", "x a[1]; // why",
    "mine a[0], a[1];",
]  # fmt: skip


@pytest.mark.parametrize("line", LINES_3)
def test_plain_lines_do_not_reach_the_parser(line: str, monkeypatch: pytest.MonkeyPatch) -> None:
    header = f"{H3}qubit[3] a;\nbit[2] m;\ngate mine q, r {{ cx q, r; h q; }}\n"
    assert statements_parsed(header + (line + "\n") * 50, monkeypatch) <= 5


def test_any_line_is_parsed_once(monkeypatch: pytest.MonkeyPatch) -> None:
    text = f"{H3}qubit[3] a;\n" + "for int i in [0:2] { h a[i]; }\nid a[0];\nh a;\n" * 50
    assert statements_parsed(text, monkeypatch) == 6


@pytest.mark.parametrize(
    ("text", "kinds"),
    [
        ("x a[0]; x a[1];\nx a[0]; x a[1];\n", ["X"] * 4),
        ("if (m[0]) { x a[0]; }\nelse { z a[0]; }\n", "XZ"),
        ("if (m[0]) { x a[0]; } // c\n// d\n/* e */ else z a[0];\n", "XZ"),
        ("/*\nx a[0];\n*/\nz a[0];\n", "Z"),
        ("x a[0]; /*\nx a[0];\n*/ z a[0];\n", "XZ"),
        ("x\na[0]\n;\nx a[0];\n", "XX"),
        ("rz(1 // x) a[0];\n) a[0];\n", ["RZ"]),
        ("\n\n  \t\nx a[0];\n\n", "X"),
        ("x a[0];", "X"),
        ("x a[0]; qubit b; x b;\nx a[0];\n", ["X"] * 3),
        ("rzz(1) a[0], a[1];\ngate rzz(t_) q, r { h q; }\nrzz(1) a[0], a[1];\n", ["X", "RZ", "X", "H"]),
        (
            "const float t_ = 1;\nrz(t_) a[0];\ngate f(t_) q { rz(t_) q; }\nf(2) a[0];\nrz(t_) a[0];\n",
            ["RZ"] * 3,
        ),
    ],
)
def test_lines_that_look_plain_and_are_not(text: str, kinds: str | list[str]) -> None:
    found = read(f"{H3}qubit[3] a;\nbit[2] m;\n{text}").circuit
    assert [op.kind.name for op in found] == list(kinds)


def test_the_else_of_a_remembered_if_is_not_lost() -> None:
    text = f"{H3}qubit[3] a;\nbit[2] m;\n" + "if (m[0]) { x a[0]; }\n" * 3 + "else { z a[0]; }\n"
    assert [op.kind.name for op in read(text).circuit] == ["X", "X", "X", "Z"]


def test_comment_lines_between_plain_lines_are_kept() -> None:
    lines = "// one\nx a[0];\n// two\n  // two\n\nx a[0]; // no\n/* no */ // no\nx a[0];\n// three"
    text = f"{H3}qubit[3] a;\n{lines}"
    program = read(text)
    assert program.comments == ("one", "two", "two", "three")
    assert len(program.circuit) == 3


def test_version_2_lines(monkeypatch: pytest.MonkeyPatch) -> None:
    text = (
        f"{H2}qreg a[3];\ncreg m[2];\n" + "cx a[0],a[1];\nmeasure a[0] -> m[1];\nu3(pi/2,0,-pi) a[2];\n" * 30
    )
    assert statements_parsed(text, monkeypatch) <= 4


def outcome(text: str) -> tuple[object, ...]:
    """What reading gives: operations and comments, or the complaint."""
    try:
        program = read(text)
    except CircuitFileError as error:
        return ("refused", str(error))
    conditions = program.circuit.conditions
    operations = [
        (op[:4], conditions[op.condition] if op.condition >= 0 else (), op.bit) for op in program.circuit
    ]
    return (program.circuit.registers, operations, program.comments)


LINES = [
    *LINES_3,
    "h a;",
    "id a[0];",
    "x a[3];",
    "cx a[1], a[1];",
    "foo a[0];",
    "else { x a[1]; }",
    "if (m[1]) x a[0];",
    "/* open",
    "close */",
    "// note",
    "",
    "x",
    "a[1];",
    "gate f q { x q; }",
    "f a[2];",
    "qubit b;",
    "x b;",
    "x a[0]; x a[1];",
    "if (m == 2) { x a[0]; }",
    "m[1] = measure b;",
    "let d = a[1:2];",
    "h d[0];",
    "}",
    "barrier a;",
    "gate rzz(t_) q, r { h q; }",
    "rzz(1) a[0], a[1];",
    "if (m[0]) { m[0] = measure a[1]; }",
]


@given(st.lists(st.sampled_from(LINES), max_size=12), st.booleans())
def test_reading_without_the_fast_path_gives_the_same(lines: list[str], version_2: bool) -> None:
    header = f"{H2}qreg a[3];\ncreg m[2];\n" if version_2 else f"{H3}qubit[3] a;\nbit[2] m;\n"
    text = header + "gate mine q, r { cx q, r; h q; }\n" + "\n".join(lines)
    fast = outcome(text)
    with pytest.MonkeyPatch.context() as patch:
        patch.setattr(FastPath, "run", lambda _: None)
        assert outcome(text) == fast


@pytest.mark.parametrize("text", ["m[0]", "m[2]", "k[0]", "m[3]", "a[0]", "m", "m[ 1 ]", "(m[1])", "!m[1]"])
def test_a_condition_on_one_bit_is_what_the_parser_makes_of_it(text: str) -> None:
    """Or refused by both."""
    head = f"{H3}qubit[3] a;\nbit k;\nbit[3] m;\n"
    told = []
    for line in (f"if ({text}) {{ x a[1]; }}", f"if ({text})\n{{ x a[1]; }}"):
        try:
            told.append(read(head + line + "\n").circuit)
        except CircuitFileError:
            told.append(None)
    assert told[0] == told[1]
