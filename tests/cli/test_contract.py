"""The promises of the command line, tried in this process wherever a process of its own adds nothing."""

from __future__ import annotations

import io
import json
import math
import os
import subprocess
import sys
from importlib import import_module
from pathlib import Path

import click
import pytest

import revsynth
from revsynth.cli.main import COMMANDS, main
from revsynth.verification.evidence import Evidence, Level, Verdict

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


def build(capsys: Capture, folder: Path, *words: str | Path) -> Path:
    out = folder / "built.qasm"
    assert run(capsys, "build", *words, "-o", out)[0] == 0
    return out


PLA = ".i 2\n.o 2\n.ilb door lamp\n.ob bell horn\n11 01\n-1 10\n.e\n"


def test_names_in_a_pla_label_bits_wherever_they_are_shown(capsys: Capture, tmp_path: Path) -> None:
    spec = write_spec(tmp_path, PLA, "rules.pla")
    out = build(capsys, tmp_path, spec)
    assert "// bit v[0] is door\n// bit v[1] is lamp\n// bit f[0] is bell\n" in out.read_text()
    assert "v[0] is door, v[1] is lamp" in run(capsys, "inspect", spec)[1]
    described = json.loads(run(capsys, "inspect", spec, "--json")[1])
    assert described["labels"] == {"v[0]": "door", "v[1]": "lamp", "f[0]": "bell", "f[1]": "horn"}
    out.write_text(out.read_text() + "cx v[0], f[1];\n")
    found = json.loads(run(capsys, "verify", spec, out, "--json")[1])["counterexample"]
    assert found["inputs"]["v"] & 1
    assert found["bits"] == {"door": 1, "lamp": found["inputs"]["v"] >> 1}
    assert found["why"].startswith("f[1] (horn) ends in ")
    assert "  that is    door = 1, lamp = " in run(capsys, "verify", spec, out)[1]


def test_a_warning_of_inspect_is_on_standard_error_alone(capsys: Capture) -> None:
    _, out, error = run(capsys, "inspect", "--where", "~a == 1", "--input", "a=2")
    assert "never true" not in out
    assert error.startswith("warning: command line: [predicate] where: column 1: '~a == 1' is never true")


def test_a_failing_file_is_told_which_form_was_taken_for_granted(capsys: Capture, tmp_path: Path) -> None:
    spec = write_spec(tmp_path, '[inputs]\na = 3\n[outputs]\nf = { value = "a * a % 8" }\n')
    out = build(capsys, tmp_path, spec, "--oracle", "compute", "--method", "transform")
    text = out.read_text().replace("keep", "k")
    out.write_text(text + ("" if " k;" in text else "qubit k;\ncx a[0], k;\n"))
    status, shown, _ = run(capsys, "verify", spec, out)
    assert status == 1
    assert "  form       bit, by its registers (--oracle names another)\n" in shown
    assert json.loads(run(capsys, "verify", spec, out, "--json")[1])["oracle"] == "bit"
    assert "--oracle names another" not in run(capsys, "verify", spec, out, "--oracle", "fresh")[1]


def test_standard_input_is_called_so(
    capsys: Capture, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    text = build(capsys, tmp_path, *SMALL).read_text()
    for words, start in (
        (["verify", *SMALL, "-"], "standard input: does what the spec says\n"),
        (["cost", "-"], "standard input\n  qubits "),
    ):
        on_standard_input(monkeypatch, text)
        assert run(capsys, *words)[1].startswith(start)


def test_draw_has_json_and_refuses_what_only_the_terminal_has(capsys: Capture, tmp_path: Path) -> None:
    circuit = build(capsys, tmp_path, *SMALL, "--gates", "cascade", "--method", "products")
    found = json.loads(run(capsys, "draw", circuit, "--json", "--title", "Pairs")[1])
    assert (found["circuit"], found["drawing"], found["qubits"]) == (str(circuit), None, 5)
    assert found["text"][0] == "Pairs"
    picture = tmp_path / "p.svg"
    found = json.loads(run(capsys, "draw", circuit, "--json", "-o", picture)[1])
    assert (found["drawing"], found["text"]) == (str(picture), None)
    assert "are for the terminal" in refused(capsys, "draw", circuit, "--ascii", "-o", picture)


def test_one_constant_phase_of_minus_one_is_plus_pi(capsys: Capture, tmp_path: Path) -> None:
    circuit = tmp_path / "x.qasm"
    for where, gates in (("True", ""), ("False", "gphase(pi);"), ("False", "gphase(-pi);")):
        circuit.write_text(f"OPENQASM 3.0;\nqubit[1] a;\n{gates}\n")
        words = ["--where", where, "--input", "a=1", circuit, "--json"]
        assert json.loads(run(capsys, "verify", *words)[1])["global_phase"] == pytest.approx(math.pi)
        assert run(capsys, "verify", *words, "--exact-phase")[0] == 1


def test_an_output_word_may_be_called_leftover(capsys: Capture, tmp_path: Path) -> None:
    text = '[inputs]\na = 2\n[outputs]\nleftover = { value = "a == 3" }\n'
    spec = write_spec(tmp_path, text)
    out = build(capsys, tmp_path, spec, "--oracle", "embedded")
    assert out.read_text().count("(leftover) after") == 2
    assert run(capsys, "verify", spec, out)[0] == 0


@pytest.mark.parametrize("level", ["none", "sampled"])
def test_what_could_not_be_verified_is_not_written_unless_asked_for(
    capsys: Capture, tmp_path: Path, monkeypatch: pytest.MonkeyPatch, level: Level
) -> None:
    from revsynth import pipeline

    undecided = Verdict(None, Evidence(level, 3, (), "out of reach"))
    monkeypatch.setattr(pipeline, "verify_program", lambda *_, **__: undecided)
    out = tmp_path / "x.qasm"
    error = refused(capsys, "build", *SMALL, "-o", out, status=3)
    assert "verification could not finish: out of reach; nothing was written" in error
    assert not out.exists()
    status, shown, _ = run(capsys, "build", *SMALL, "-o", out, "--unverified", "--json")
    assert (status, json.loads(shown)["evidence"]["level"]) == (0, level)
    said = {"none": "evidence: not verified", "sampled": "evidence: 3 inputs sampled: not a proof"}[level]
    assert f"// {said}\n" in out.read_text()
    assert made_by(out.read_text()).endswith("--unverified")


@pytest.mark.parametrize("name", list(COMMANDS))
def test_every_option_of_every_command_is_explained(capsys: Capture, name: str) -> None:
    command = import_module(f"revsynth.cli.{name}_command").COMMAND
    for parameter in command.params:
        if isinstance(parameter, click.Option):
            assert parameter.help, parameter.name
            one_of_some = isinstance(parameter.type, click.Choice) and parameter.name != "negctrl"
            assert not one_of_some or "Default: " in parameter.help, parameter.name
    assert f"  revsynth {name} " in run(capsys, name, "--help")[1]


LATER = {
    "build": [
        "--borrow 1", "--controlled", "--inverse", "--wrap f", "--angle pi/8",
        "--free-inputs", "--gates cx+rz",
    ],
    "verify": [
        "--same", "--inverse", "--controlled", "--wrapped f", "--map a=q", "--clean q", "--msb-first",
        "--evidence f", "--against f", "--proof f",
    ],
}  # fmt: skip


@pytest.mark.parametrize(("command", "words"), [(c, words) for c, found in LATER.items() for words in found])
def test_what_is_not_there_yet_is_refused_by_name(capsys: Capture, command: str, words: str) -> None:
    option, _, value = words.partition(" ")
    refusal = refused(capsys, command, *SMALL, *words.split())
    assert option in refusal
    assert value in refusal or "No such option" in refusal


def test_a_build_does_not_write_over_its_own_spec(capsys: Capture, tmp_path: Path) -> None:
    text = '[inputs]\na = 2\n[predicate]\nwhere = "a == 3"\n'
    spec = write_spec(tmp_path, text)
    link = tmp_path / "link.toml"
    link.symlink_to(spec)
    for output in (spec, link):
        assert "this is the spec itself" in refused(capsys, "build", spec, "-o", output)
    assert spec.read_text() == text


def test_very_many_warnings_are_counted(capsys: pytest.CaptureFixture[str]) -> None:
    where = " and ".join(f"a != {number}" for number in range(16, 36))
    assert main(["inspect", "--where", where, "--input", "a=4"]) == 0
    warnings = capsys.readouterr().err.splitlines()
    assert len(warnings) == 9
    assert warnings[-1] == "warning: and 12 more"
