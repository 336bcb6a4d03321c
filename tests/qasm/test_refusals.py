"""Everything refused is refused in one line, by line and column, with a reason; hostile files included."""

from __future__ import annotations

import re
import time
from pathlib import Path

import pytest

from revsynth.errors import CircuitFileError
from revsynth.qasm import budget, read, read_file
from tests.qasm.bad_files import BAD_2, BAD_3, BAD_WHOLE, REGISTERS_2, REGISTERS_3
from tests.qasm.circuits import H2, H3

CASES = (
    [(message, REGISTERS_3 + text) for message, text in BAD_3]
    + [(message, REGISTERS_2 + text) for message, text in BAD_2]
    + list(BAD_WHOLE)
)


@pytest.mark.parametrize(("message", "text"), CASES)
def test_refusals(message: str, text: str) -> None:
    with pytest.raises(CircuitFileError) as caught:
        read(text, source="beacons.qasm")
    assert str(caught.value).startswith(f"beacons.qasm: {message}")
    assert str(caught.value).isprintable()
    assert re.fullmatch(r"line \d+, column \d+", f"line {caught.value.line}, column {caught.value.column}")
    lines = text.split("\n")
    assert 1 <= caught.value.line <= len(lines)
    assert 1 <= caught.value.column <= len(lines[caught.value.line - 1]) + 1


@pytest.mark.parametrize(("message", "text"), CASES)
def test_refusals_are_the_same_behind_lines_of_the_fast_path(message: str, text: str) -> None:
    """A thousand plain lines in front move the line of the complaint and nothing else."""
    if not text.startswith(REGISTERS_3) or "1048576" in text:
        return
    with pytest.raises(CircuitFileError) as plain:
        read(text)
    if plain.value.line < 4:
        return
    head, rest = text[: len(REGISTERS_3)], text[len(REGISTERS_3) :]
    with pytest.raises(CircuitFileError) as caught:
        read(head + "cx a[0], a[1];\n" * 1000 + rest)
    assert (caught.value.line, caught.value.column) == (plain.value.line + 1000, plain.value.column)
    assert caught.value.reason == plain.value.reason


def bomb(levels: int, body: str = "g{0} q; g{0} q;") -> str:
    gates = ["gate g0 q { x q; }"]
    gates += [f"gate g{level + 1} q {{ {body.format(level)} }}" for level in range(levels)]
    return H3 + "qubit q;\n" + "\n".join(gates) + f"\ng{levels} q;\n"


HOSTILE = [
    ("expand to more than", bomb(60)),
    ("expand to more than", bomb(30, "g{0} q; pow(11) @ g{0} q;")),
    ("expand to more than", bomb(1, "pow(1000000000) @ g0 q;").replace("x q;", "x q; h q;")),
    ("expand to more than", f"{H3}qubit[1000000] q;\nfor int i in [0:999] h q;\n"),
    ("expand to more than", f"{H3}qubit[1000000] q;\n" + "h q;\n" * 20),
    ("expand to more than", f"{H3}qubit[100] q; gate f a {{ for int i in [0:99999] h a; }}\nf q;\n"),
    ("the loops run more than", f"{H3}qubit q;\n" + "for int i in [0:999] " * 4 + "h q;\n"),
    ("the loops run more than", f"{H3}qubit q; gate f a {{ for int i in [0:10**12] {{ }} }}\nf q;\n"),
    ("more than 150 deep", bomb(400, "g{0} q;")),
    ("nested deeper than 40 levels", f"{H3}qubit q;\n" + "{" * 100_000),
    ("nested deeper than 40 levels", f"{H3}qubit q;\n" + "if (true) " * 100_000 + "x q;"),
    ("nested deeper than 40 levels", f"{H3}qubit[2] q;\nx " + "q[" * 100_000),
    ("nested deeper than 40 levels", f"{H3}bit[2] m;\nqubit q;\nif (" + "m[" * 100_000),
    ("found the end of the file where a value is needed", f"{H3}qubit q;\np(" + "(" * 100_000),
    ("this bracket is never closed: ')' is missing", f"{H3}qubit q;\np(" + "(" * 100_000 + "1;"),
    ("found the end of the file where a value is needed", f"{H3}qubit q;\np(" + "-" * 100_000),
    ("this condition is too long", f"{H3}bit[9] m; qubit q;\nif (" + "m[0] ^ " * 100_000 + "m[0]) x q;"),
    ("too many combina", f"{H3}bit[40] m; qubit q;\nif ({' ^ '.join(f'm[{i}]' for i in range(40))}) x q;"),
    ("a condition on more than 4096 bits", f"{H3}bit[5000] m; qubit q;\nif (m == 0) x q;"),
    ("is read for up to 64 bits", f"{H3}bit[100] m; qubit q;\nif (m < 5) x q;"),
    ("ctrl with this number of controls", f"{H3}qubit[4] q;\nctrl(1000000000) @ x q;"),
    ("this value is too large", f"{H3}qubit q;\np(2**(2**(2**40))) q;"),
    ("this value is too large", f"{H3}qubit q;\np(" + "9**9*" * 2000 + "1) q;"),
    ("a number of 300000 digits is too long", f"{H3}qubit q;\np(" + "1" * 300_000 + ") q;"),
    ("never closed: '*/' is missing", H3 + "/*" + "*" * 1_000_000),
    ("this string is not closed", H3 + 'include "' + "x" * 1_000_000),
    ("has no meaning here", "\0" * 1_000_000),
    ("a name of 1000000 characters is too long", H2 + "x" * 1_000_000 + " q;"),
    ("is not read: only the standard", H3 + 'include "' + "x" * 1_000_000 + '";'),
]  # fmt: skip


@pytest.mark.parametrize(("message", "text"), HOSTILE)
def test_hostile_files_get_one_clear_line_and_soon(
    message: str, text: str, monkeypatch: pytest.MonkeyPatch
) -> None:
    """With a tenth of the room for expansion, to be quick; the full limits are a matter of seconds."""
    monkeypatch.setattr(budget, "MAX_EXPANDED", budget.MAX_EXPANDED // 10)
    start = time.monotonic()
    with pytest.raises(CircuitFileError) as caught:
        read(text)
    assert message in str(caught.value)
    assert len(str(caught.value)) < 250
    assert time.monotonic() - start < 20


def test_long_sums_and_chains_are_fine() -> None:
    sums = [f"{'1+' * 50_000}1", f"{'--' * 50_000}1", f"{'(' * 20_000}1{')' * 20_000}"]
    text = f"{H3}qubit q; bit m;\n" + "".join(f"p({entry}) q;\n" for entry in sums)
    assert [op.angles for op in read(text).circuit] == [(50_001.0,), (1.0,), (1.0,)]


def test_many_statements_on_one_line_take_linear_time() -> None:
    start = time.monotonic()
    assert len(read(f"{H3}qubit q; " + "h q; " * 50_000).circuit) == 50_000
    assert time.monotonic() - start < 20


def test_files_that_are_no_text(tmp_path: Path) -> None:
    path = tmp_path / "lamp.qasm"
    path.write_bytes(b"OPENQASM 3.0;\nqubit a;\n// \xff\n")
    with pytest.raises(CircuitFileError, match=r"lamp.qasm: line 3, column 4: the byte 0xff is not UTF-8"):
        read_file(path)
    with pytest.raises(CircuitFileError, match=r"none.qasm: cannot be read: No such file or directory"):
        read_file(tmp_path / "none.qasm")
    with pytest.raises(CircuitFileError, match=r"cannot be read: Is a directory"):
        read_file(tmp_path)
    path.write_bytes("// π\nqubit a; U(0, 0, π) a;\n".encode())
    assert len(read_file(path).circuit) == 1
    path.write_text("\nx b;")
    with pytest.raises(CircuitFileError, match=r"lamp.qasm: line 2, column 3"):
        read_file(path)
