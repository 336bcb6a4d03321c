"""Whatever the reader is given, it gives a program or a CircuitFileError of one line."""

from __future__ import annotations

from hypothesis import given
from hypothesis import strategies as st

from revsynth.circuit.model import Circuit
from revsynth.errors import CircuitFileError
from revsynth.qasm import prepare, read, write
from tests.qasm.bad_files import REGISTERS_2, REGISTERS_3
from tests.qasm.circuits import circuits

PIECES = [
    "x",
    "cx",
    "a",
    "m",
    "c",
    "[",
    "]",
    "(",
    ")",
    "{",
    "}",
    ";",
    ",",
    "@",
    "ctrl",
    "negctrl",
    "inv",
    "pow",
    "gate",
    "f",
    "q",
    "if",
    "else",
    "for",
    "int",
    "in",
    "measure",
    "->",
    "=",
    "==",
    "let",
    "++",
    "const",
    "bit",
    "qubit",
    "qreg",
    "creg",
    "0",
    "1",
    "2",
    "-",
    "*",
    "**",
    "/",
    "%",
    "pi",
    "sin",
    ":",
    "&&",
    "||",
    "!",
    "~",
    "<",
    "^",
    "gphase",
    "p",
    "U",
    "reset",
    "barrier",
    "opaque",
    "include",
    '"stdgates.inc"',
    '"01"',
    "OPENQASM",
    "3.0",
    "2.0",
    "//",
    "/*",
    "*/",
    "\n",
    " ",
    "true",
    "float",
    "1e9",
    "99999999999",
    "\0",
    "é",
    "$0",
    "#pragma",
    "def",
    "2**",
    "uint[4](",
]


def survives(text: str) -> None:
    found: CircuitFileError | None = None
    try:
        read(text, negctrl="all-zero")
    except CircuitFileError as error:
        found = error
    if found is not None:
        assert str(found).isprintable()
        assert 1 <= found.line <= text.count("\n") + text.count("\r") + 1


@given(st.text())
def test_any_text(text: str) -> None:
    survives(text)


@given(
    st.sampled_from(["", REGISTERS_3, REGISTERS_2]),
    st.lists(st.sampled_from(PIECES), max_size=30),
    st.booleans(),
)
def test_any_words_of_the_language(header: str, pieces: list[str], spaced: bool) -> None:
    survives(header + (" " if spaced else "").join(pieces))


STATEMENTS = """\
gate f(t) q, r { cx q, r; rz(t / 2) r; ctrl @ gphase(t) q; }
f(pi / 3) a[0], c;
ctrl @ negctrl @ f(-1) a[0], a[1], a[2], c;
pow(3) @ inv @ s a;
let d = a[0:1] ++ c;
m = measure d[0:1];
if (m[0] == 1 && !m[1]) { x c; } else if (m == 2) { z c; } else { h c; }
for int i in [0:2] { p(pi / 2 ** i) a[i]; }
const float t_ = sin(pi / 5) + 2 % 3;
reset a[{0, 2}]; barrier a, c;
"""


@given(st.data())
def test_mutated_valid_files(data: st.DataObject) -> None:
    text = REGISTERS_3 + STATEMENTS
    read(text)
    for _ in range(data.draw(st.integers(1, 4))):
        place = data.draw(st.integers(0, len(text)))
        length = data.draw(st.integers(0, 5))
        piece = data.draw(st.one_of(st.just(""), st.sampled_from(PIECES), st.text(max_size=2)))
        text = text[:place] + piece + text[place + length :]
    survives(text)


@given(circuits(max_gates=8), st.data())
def test_mutated_written_files(circuit: Circuit, data: st.DataObject) -> None:
    text = write(prepare(circuit, "openqasm3"))
    place = data.draw(st.integers(0, len(text)))
    survives(text[:place] + data.draw(st.sampled_from(PIECES)) + text[place + data.draw(st.integers(0, 3)) :])


@given(circuits(max_gates=6), st.data())
def test_layout_does_not_matter(circuit: Circuit, data: st.DataObject) -> None:
    """Blanks, line ends and comments between tokens change nothing, fast path or not."""
    prepared = prepare(circuit, "openqasm3")
    gap = st.sampled_from([" ", "  ", "\n", "\t", " // x\n", "/* y; */", "\r\n"])
    text = "".join(data.draw(gap) if piece == " " else piece for piece in split_blanks(write(prepared)))
    assert read(text).circuit == prepared


def split_blanks(text: str) -> list[str]:
    parts = text.split(" ")
    return [piece for part in parts[:-1] for piece in (part, " ")] + parts[-1:]
