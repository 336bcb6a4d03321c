"""Hostile input through the command line: one line and a status, soon, no traceback, no file left behind."""

from __future__ import annotations

import json
import time
from pathlib import Path

import pytest

from revsynth.cli.main import main

IN = "[inputs]\na = 2\n"
PREDICATE = '[predicate]\nwhere = "a == 1"\n'
Capture = pytest.CaptureFixture[str]


def where(text: str) -> str:
    return f"{IN}[predicate]\nwhere = {json.dumps(text)}\n"


def formula(text: str) -> str:
    return f"{IN}[predicate]\nformula = {json.dumps(text)}\n"


def named(name: str) -> str:
    return f"[inputs]\n{name} = 2\n[predicate]\ntable = '0110'\n"


BAD: dict[str, str | bytes] = {
    "nothing": "",
    "zeros": b"\x00" * 10,
    "another encoding": (IN + PREDICATE).encode("utf-16"),
    "a word of no bits": "[inputs]\na = 0\n" + PREDICATE,
    "too many bits": "[inputs]\na = 70000\n" + PREDICATE,
    "10**9 words": "[inputs]\na = { bits = 1, count = 1000000000 }\n" + PREDICATE,
    "a huge width": f"[inputs]\na = {'9' * 30}\n" + PREDICATE,
    "a huge number": f"[constants]\nc = {'9' * 5000}\n" + IN + PREDICATE,
    "a huge literal": where(f"a == {'9' * 5000}"),
    "a tower of powers": where("a ** a ** a ** a == 1"),
    "a long shift": where("a << 5000 == 0"),
    "a long loop": where("all(i == 0 for i in range(10 ** 9))"),
    "a long loop in a loop": where("any(any(i == j for i in range(999)) for j in range(999))"),
    "deep brackets": where("(" * 5000 + "a" + ")" * 5000 + " == 1"),
    "deep signs": where("-" * 5000 + "a == 1"),
    "deep choices": where("1 if a else " * 3000 + "0"),
    "a long chain": where("a + " * 20_000 + "a == 1"),
    "a long text": where("a == 1 or " * 30_000 + "False"),
    "deep lists": "a = " + "[" * 100_000,
    "deep tables": "x = " + "{a=" * 3000 + "1" + "}" * 3000,
    "deep constants": IN + "[constants]\nc = " + "[" * 500 + "1" + "]" * 500 + "\n" + PREDICATE,
    "a function's name": named("popcount"),
    "a keyword": named("if"),
    "a name of 65 characters": named("a" * 65),
    "an endless name": named("a" * 100_000),
    "no name": named('""'),
    "a name with a line feed": named('"a\\nb"'),
    "a table too long": IN + f"[predicate]\ntable = '{'0' * (1 << 20)}'\n",
    "digits of another script": IN + "[predicate]\ntable = '٠١١٠'\n",
    "an empty domain": IN + "[domain]\nwhere = 'a > 9'\n" + PREDICATE,
    "wide outputs": IN + "[outputs]\nb = { value = 'a', bits = 5000 }\n",
    "a formula's index": formula("a[99999999999999999999]"),
    "a formula's endless index": formula(f"a[{'9' * 5000}]"),
}
GOOD: dict[str, str | bytes] = {
    "one input": "[inputs]\na = 1\n" + PREDICATE,
    "24 inputs": "[inputs]\na = 24\n" + PREDICATE,
    "ends of lines of another system": (IN + PREDICATE).replace("\n", "\r\n"),
    "a mark at the start": b"\xef\xbb\xbf" + (IN + PREDICATE).encode(),
    "always": where("True"),
    "never": where("False"),
    "all free": IN + "[predicate]\ntable = '----'\n",
    "no image fixed": "[permutation]\nvalues = ['-', '-', '-', '-']\n",
    "a title of control characters": f'title = "a\\u0000\\u001b[31m\\nx a[0];\\u2028{"-" * 999}"\n'
    + IN
    + PREDICATE,
    "a gate's name": named("x"),
    "a constant's name": named("pi"),
    "the longest name": named("a" * 64),
    "deep formula brackets": formula("(" * 5000 + "a[0]" + ")" * 5000),
    "deep formula signs": formula("~" * 5000 + "a[0]"),
    "a long formula": formula("a[0]" + " ^ a[1]" * 20_000),
    "deep formula choices": formula("a[0] ? " * 3000 + "1" + " : 0" * 3000),
}


@pytest.fixture
def in_folder(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    monkeypatch.chdir(tmp_path)
    return tmp_path


def write(folder: Path, text: str | bytes) -> None:
    (folder / "plan.toml").write_bytes(text if isinstance(text, bytes) else text.encode())


@pytest.mark.parametrize("name", BAD)
@pytest.mark.parametrize("command", [["inspect", "plan.toml"], ["build", "plan.toml", "-o", "out.qasm"]])
def test_bad_input_is_one_line(name: str, command: list[str], in_folder: Path, capsys: Capture) -> None:
    write(in_folder, BAD[name])
    started = time.monotonic()
    assert main(command) == 2
    assert time.monotonic() - started < 10
    shown = capsys.readouterr()
    assert shown.out == ""
    assert shown.err.startswith("revsynth: plan.toml: ")
    assert shown.err.count("\n") == 1
    assert shown.err.rstrip("\n").isprintable()
    assert len(shown.err) < 400
    assert [path.name for path in in_folder.iterdir()] == ["plan.toml"]


NAMES = [name for name in GOOD if name.endswith("name")]


@pytest.mark.parametrize(
    ("name", "format"), [(name, "openqasm3") for name in GOOD] + [(name, "openqasm2") for name in NAMES]
)
def test_what_looks_bad_and_is_not(name: str, format: str, in_folder: Path, capsys: Capture) -> None:
    write(in_folder, GOOD[name])
    assert main(["build", "plan.toml", "-o", "out.qasm", "--format", format]) == 0
    assert main(["verify", "plan.toml", "out.qasm"]) == 0
    shown = capsys.readouterr()
    text = (in_folder / "out.qasm").read_text(encoding="utf-8")
    assert all(line.isprintable() for line in (text + shown.out + shown.err).split("\n"))
    assert sorted(path.name for path in in_folder.iterdir()) == ["out.qasm", "plan.toml"]


@pytest.mark.parametrize(
    "text",
    [
        "h rest;\nseen = measure rest;\nif (seen[0]) x a[0];\n",
        "h rest;\nreset rest;\n",
        "h rest;\nrx(0.3) rest;\nh rest;\n",
    ],
)
def test_what_cannot_be_followed_is_said_soon(text: str, in_folder: Path, capsys: Capture) -> None:
    write(in_folder, IN + PREDICATE)
    head = 'OPENQASM 3.0;\ninclude "stdgates.inc";\nqubit[2] a;\nqubit[60] rest;\nbit[60] seen;\n'
    (in_folder / "c.qasm").write_text(head + text)
    started = time.monotonic()
    assert main(["verify", "plan.toml", "c.qasm"]) in (1, 3)
    assert time.monotonic() - started < 15
    assert "Traceback" not in capsys.readouterr().err
