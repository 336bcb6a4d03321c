"""The commands as a user runs them: whole processes, exit statuses, standard output and error apart."""

from __future__ import annotations

import json
import os
import signal
import subprocess
import sys
import time
from pathlib import Path

import pytest

ROOT = Path(__file__).parent.parent.parent
SMALL = ["--where", "a * b == 35", "--input", "a=4", "--input", "b=4"]


def revsynth(*words: str | Path, stdin: str = "", cwd: Path = ROOT) -> subprocess.CompletedProcess[str]:
    return subprocess.run(
        [sys.executable, "-m", "revsynth", *map(str, words)],
        input=stdin,
        capture_output=True,
        text=True,
        cwd=cwd,
        check=False,
        env={**os.environ, "PYTHONPATH": str(ROOT)},
    )


def test_help_names_every_command_and_each_has_an_example() -> None:
    top = revsynth("--help")
    assert top.returncode == 0
    for command in ("inspect", "build", "verify", "cost", "draw"):
        assert command in top.stdout
        shown = revsynth(command, "--help")
        assert shown.returncode == 0
        assert f"  revsynth {command} " in shown.stdout


def test_build_verify_cost_draw_in_turn(tmp_path: Path) -> None:
    out = tmp_path / "pairs.qasm"
    built = revsynth("build", *SMALL, "-o", out)
    assert (built.returncode, built.stderr) == (0, "")
    assert "2 of 256 inputs" in built.stdout
    assert "exhaustive" in built.stdout
    held = revsynth("verify", *SMALL, out)
    assert (held.returncode, held.stderr) == (0, "")
    assert "does what the spec says" in held.stdout
    counted = json.loads(revsynth("cost", out, "--json").stdout)
    described = json.loads(revsynth("build", *SMALL, "-o", out, "--json").stdout)
    assert {**described["cost"], "ands": None, "cascade": None} == counted
    drawn = revsynth("draw", out, "--ascii", "--width", "80")
    assert drawn.returncode == 0
    assert drawn.stdout.isascii()
    for ending in ("svg", "png", "pdf"):
        picture = tmp_path / f"p.{ending}"
        assert revsynth("draw", out, "-o", picture).returncode == 0
        assert picture.stat().st_size > 1000


def test_without_a_file_the_circuit_is_standard_output_alone(tmp_path: Path) -> None:
    built = revsynth("build", *SMALL)
    assert built.returncode == 0
    assert "OPENQASM 3" in built.stdout
    assert "evidence" in built.stderr
    place = tmp_path / "x.qasm"
    place.write_text(built.stdout)
    assert revsynth("verify", *SMALL, place).returncode == 0
    as_json = revsynth("build", *SMALL, "--json")
    assert json.loads(as_json.stdout)["circuit"] is None
    assert as_json.stderr == ""


def test_a_spec_on_standard_input() -> None:
    spec = '[inputs]\nv = 3\n[predicate]\nformula = "v[0] & (v[1] | ~v[2])"\n'
    assert json.loads(revsynth("build", "-", "--json", stdin=spec).stdout)["marked"] == 3
    assert revsynth("inspect", "-", stdin=spec).returncode == 0


def test_a_wrong_circuit_is_answered_with_status_1_and_an_input(tmp_path: Path) -> None:
    out = tmp_path / "pairs.qasm"
    revsynth("build", *SMALL, "-o", out)
    text = out.read_text()
    lines = text.splitlines()
    last = max(index for index, line in enumerate(lines) if line.endswith(";"))
    out.write_text("\n".join(lines[:last] + lines[last + 1 :]) + "\n")
    failed = revsynth("verify", *SMALL, out)
    assert failed.returncode == 1
    assert "does not do what the spec says" in failed.stdout
    found = json.loads(revsynth("verify", *SMALL, out, "--json").stdout)
    assert found["holds"] is False
    assert set(found["counterexample"]["inputs"]) == {"a", "b"}


def test_the_wrong_spec_is_told_apart() -> None:
    text = revsynth("build", *SMALL).stdout
    other = ["--where", "a * b == 33", "--input", "a=4", "--input", "b=4"]
    verdict = json.loads(revsynth("verify", *other, "-", "--json", stdin=text).stdout)
    assert verdict["holds"] is False
    assert verdict["counterexample"]["kind"] == "phase"


def test_plain_writes_the_map_beside_it(tmp_path: Path) -> None:
    out = tmp_path / "plain.qasm"
    built = revsynth("build", *SMALL, "--format", "plain", "-o", out, "--json")
    described = json.loads(built.stdout)
    beside = json.loads((tmp_path / "plain.qasm.json").read_text())
    assert beside["qubits"] == described["qubits"]
    assert beside["qubits"]["a"] == [0, 1, 2, 3]
    words = {line.split()[0] for line in out.read_text().splitlines()[3:]}
    assert words <= {"h", "x", "z", "s", "sdg", "t", "tdg", "cx", "cz"}


@pytest.mark.parametrize(
    ("words", "status", "text"),
    [
        (["build"], 2, "name a spec file"),
        (["build", "nowhere.toml"], 2, "nowhere.toml"),
        (["build", "--input", "a=4"], 2, "--input"),
        (["build", "--where", "a = 3", "--input", "a=4"], 2, "write == to compare"),
        (["build", "--where", "1 // a == 3", "--input", "a=4"], 2, "a = 0"),
        (["build", "--where", "b == 3", "--input", "a=4"], 2, "b"),
        (["build", *SMALL, "--gates", "wires"], 2, "wires"),
        (["build", "--where", "a == 9", "--input", "a=4", "--qubits", "4"], 1, "needs"),
        (["build", *SMALL, "--oracle", "inplace"], 2, "does not go with a predicate"),
        (["build", *SMALL, "-o", "/nowhere/at/all.qasm"], 2, "cannot be written"),
        (["verify", *SMALL], 2, "FILE"),
        (["verify", *SMALL, "nowhere.qasm"], 2, "nowhere.qasm"),
        (["cost", "pyproject.toml"], 2, "line 1"),
        (["draw", "nowhere.qasm", "-o", "x.gif"], 2, "nowhere.qasm"),
        (["inspect", "--where", "a == 1", "--input", "a=70000"], 2, "up to 65536 are allowed"),
        (["fly"], 2, "fly"),
    ],
)
def test_what_the_user_can_mend_is_one_line_and_no_traceback(
    words: list[str], status: int, text: str
) -> None:
    found = revsynth(*words)
    assert found.returncode == status
    assert found.stdout == ""
    assert len(found.stderr.strip().splitlines()) == 1
    assert text in found.stderr


def test_an_interrupt_leaves_nothing_behind(tmp_path: Path) -> None:
    out = tmp_path / "big.qasm"
    words = [
        "build",
        "--where",
        "(a * b * b + a) % 251 < 97",
        "--input",
        "a=8",
        "--input",
        "b=8",
        "-o",
        str(out),
    ]
    process = subprocess.Popen(
        [sys.executable, "-m", "revsynth", *words],
        stdout=subprocess.PIPE,
        stderr=subprocess.PIPE,
        env={**os.environ, "PYTHONPATH": str(ROOT)},
    )
    time.sleep(1.5)
    process.send_signal(signal.SIGINT)
    _, errors = process.communicate(timeout=60)
    assert process.returncode == 130
    assert b"Traceback" not in errors
    assert os.listdir(tmp_path) == []
