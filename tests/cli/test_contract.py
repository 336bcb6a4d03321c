"""The promises of the command line, tried in this process wherever a process of its own adds nothing."""

from __future__ import annotations

import io
import json
import os
import subprocess
import sys
from pathlib import Path

import pytest

import revsynth
from revsynth.cli.main import main

SMALL = ["--where", "a * b == 6", "--input", "a=3", "--input", "b=2"]

Capture = pytest.CaptureFixture[str]


def run(capsys: Capture, *words: str | Path) -> tuple[int, str, str]:
    """Exit status, standard output, standard error."""
    status = main(list(map(str, words)))
    captured = capsys.readouterr()
    return status, captured.out, captured.err


def refused(capsys: Capture, *words: str | Path, status: int = 2) -> str:
    """The one line that a refused command writes."""
    found, out, error = run(capsys, *words)
    assert (found, out) == (status, "")
    assert error.count("\n") == 1
    return error


def write_spec(folder: Path, text: str, name: str = "spec.toml") -> Path:
    place = folder / name
    place.write_text(text)
    return place


def on_standard_input(monkeypatch: pytest.MonkeyPatch, text: str) -> None:
    monkeypatch.setattr(sys, "stdin", io.TextIOWrapper(io.BytesIO(text.encode())))


def made_by(text: str) -> str:
    return next(line for line in text.splitlines() if line.startswith("// made by: ")).removeprefix(
        "// made by: "
    )


def test_a_bare_call_shows_the_help_and_is_bad_usage(capsys: Capture) -> None:
    status, out, error = run(capsys)
    assert (status, out) == (2, "")
    assert error.startswith("Usage: revsynth [OPTIONS] COMMAND")


@pytest.mark.parametrize(
    ("words", "text"),
    [
        (["--seed", "-1"], "seed -1: a seed is a whole number"),
        (["--time-limit", "nan"], "time limit nan: a number of seconds"),
        (["--time-limit", "inf"], "time limit inf: a number of seconds"),
        (["--time-limit", "0"], "time limit 0.0: a number of seconds"),
        (["--t", "-2"], "t -2: a budget is a whole number"),
        (["-o", ""], "the name of the file to write is empty"),
        (["-o", "no\nwhere/x.qasm"], "no where/x.qasm: cannot be written"),
    ],
)
def test_options_out_of_range_are_refused_in_one_line(capsys: Capture, words: list[str], text: str) -> None:
    assert text in refused(capsys, "build", *SMALL, *words)


@pytest.mark.parametrize(
    ("words", "text"),
    [
        (["--input", "work=2", "--where", "work == 1"], "command line: the word 'work' would be"),
        (["--input", "x=1", "--input", "x_=1", "--where", "x == x_"], "command line: the words 'x' and 'x_'"),
    ],
)
def test_names_that_collide_are_refused_with_the_name_of_the_spec(
    capsys: Capture, tmp_path: Path, words: list[str], text: str
) -> None:
    assert text in refused(capsys, "build", *words)
    circuit = tmp_path / "any.qasm"
    circuit.write_text("OPENQASM 3.0;\nqubit[2] a;\n")
    assert text in refused(capsys, "verify", *words, circuit)


def test_an_empty_file_name_is_no_folder(capsys: Capture) -> None:
    assert "the name of the spec file is empty" in refused(capsys, "build", "")


def test_a_title_of_any_characters_is_one_printable_line_on_the_terminal(
    capsys: Capture, tmp_path: Path
) -> None:
    title = "tide\\n\\u001b[31mgate\\u202e"
    spec = write_spec(tmp_path, f'title = "{title}"\n[inputs]\na = 1\n[predicate]\nwhere = "a"\n')
    _, out, _ = run(capsys, "build", spec, "-o", tmp_path / "x.qasm")
    assert out.startswith("tide ?[31mgate?\n  marked")
    assert (tmp_path / "x.qasm").read_text().startswith("// tide ?[31mgate?\n// oracle")
    described = json.loads(run(capsys, "build", spec, "--json")[1])
    assert described["title"] == "tide\n\x1b[31mgate\u202e"


def test_the_options_of_the_header_name_the_format_where_the_file_does_not(
    capsys: Capture, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    text = "p cnf 2 1\n1 -2 0\n"
    plain, named = write_spec(tmp_path, text, "rule.txt"), write_spec(tmp_path, text, "rule.cnf")
    ending = " --oracle phase"
    assert (
        made_by(run(capsys, "build", "--from", "CNF", plain)[1])
        == "revsynth build rule.txt --from cnf" + ending
    )
    assert made_by(run(capsys, "build", "--from", "cnf", named)[1]) == "revsynth build rule.cnf" + ending
    on_standard_input(monkeypatch, text)
    assert made_by(run(capsys, "build", "--from", "cnf", "-")[1]) == "revsynth build - --from cnf" + ending


def test_the_cascade_gate_set_takes_both_erasures(capsys: Capture, tmp_path: Path) -> None:
    out = tmp_path / "x.qasm"
    for oracle in ("phase", "bit", "fresh", "compute", "embedded"):
        words = ["--gates", "cascade", "--uncompute", "measured", "--oracle", oracle]
        assert run(capsys, "build", *SMALL, *words, "-o", out)[0] == 0
        assert run(capsys, "verify", *SMALL, out, "--oracle", oracle, "--exact-phase")[0] == 0


def test_plain_says_where_the_registers_are_and_writes_nothing_beside_a_device(
    capsys: Capture, tmp_path: Path
) -> None:
    status, _, error = run(capsys, "build", *SMALL, "--format", "plain")
    assert status == 0
    assert "  in q       a 0-2, b 3-4" in error
    pipe = tmp_path / "pipe"
    pipe.symlink_to("/dev/null")
    assert run(capsys, "build", *SMALL, "--format", "plain", "-o", pipe)[0] == 0
    assert os.listdir(tmp_path) == ["pipe"]


def test_plain_keeps_the_placement_of_an_embedded_block_beside_it(capsys: Capture, tmp_path: Path) -> None:
    out = tmp_path / "x.qasm"
    words = ["--oracle", "embedded", "--format", "plain", "--json", "-o", str(out)]
    described = json.loads(run(capsys, "build", *SMALL, *words)[1])
    beside = json.loads((tmp_path / "x.qasm.json").read_text())
    assert beside == {"qubits": described["qubits"], "placement": described["placement"]}


def in_a_shell(command: str) -> subprocess.CompletedProcess[str]:
    words = " ".join(f"'{word}'" for word in SMALL)
    root = Path(revsynth.__file__).parent.parent
    return subprocess.run(
        ["sh", "-c", command.replace("BUILD", f"'{sys.executable}' -m revsynth build {words}")],
        capture_output=True,
        text=True,
        check=False,
        env={**os.environ, "PYTHONPATH": str(root)},
    )


def test_a_full_disk_behind_standard_output_is_one_line() -> None:
    found = in_a_shell("BUILD --json > /dev/full")
    assert (found.returncode, found.stderr) == (2, "revsynth: standard output: No space left on device\n")


def test_names_of_standard_output_hold_the_circuit_alone() -> None:
    found = in_a_shell("BUILD -o /dev/stdout | cat; BUILD --json -o /dev/fd/3 3>&1 > /dev/null | cat")
    assert found.returncode == 0
    assert found.stdout.count("OPENQASM 3.0;") == 2
    assert "evidence   " not in found.stdout


def test_counts_of_one_are_in_the_singular(capsys: Capture) -> None:
    _, _, error = run(capsys, "build", "--where", "a == 3", "--input", "a=2")
    assert "  depth      1 layer\n  plan       1 cascade gate, 1 AND\n" in error
