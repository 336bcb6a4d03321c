"""The README tells the truth: its sessions, Python, spec, picture and test command are run."""

from __future__ import annotations

import os
import re
import shutil
import subprocess
import sys
from pathlib import Path

import revsynth
from revsynth.report.circuit_svg import draw_svg

ROOT = Path(__file__).parent.parent
README = (ROOT / "README.md").read_text()


def blocks(language: str) -> list[str]:
    return re.findall(rf"```{language}\n(.*?)```", README, flags=re.S)


def test_the_sessions_give_the_output_shown(tmp_path: Path) -> None:
    shutil.copytree(ROOT / "specs", tmp_path / "specs")
    shim = tmp_path / "bin" / "revsynth"
    shim.parent.mkdir()
    shim.write_text(f'#!/bin/sh\nexec "{sys.executable}" -m revsynth "$@"\n')
    shim.chmod(0o755)
    env = {**os.environ, "PATH": f"{shim.parent}:{os.environ['PATH']}", "PYTHONPATH": str(ROOT)}
    sessions = blocks("console")
    assert sessions
    for session in sessions:
        for part in re.split(r"^\$ ", session, flags=re.M)[1:]:
            command, _, shown = part.partition("\n")
            run = subprocess.run(
                command, shell=True, cwd=tmp_path, env=env, capture_output=True, text=True, check=False
            )
            assert (run.stdout + run.stderr).strip() == shown.strip(), command


def test_the_spec_shown_is_the_one_in_the_folder() -> None:
    (shown,) = blocks("toml")
    kept = [line for line in (ROOT / "specs/beacons.toml").read_text().splitlines() if line[:1] != "#"]
    assert shown.split() == " ".join(kept).split()


def test_the_python_shown_runs() -> None:
    (shown,) = blocks("python")
    run = subprocess.run(
        [sys.executable, "-c", shown],
        cwd=ROOT,
        capture_output=True,
        text=True,
        check=False,
    )
    assert (run.returncode, run.stderr) == (0, "")
    assert "exhaustive" in run.stdout


def test_the_picture_is_the_one_that_draw_makes() -> None:
    built = revsynth.build(revsynth.read_spec(ROOT / "specs/beacons.toml"), gates="toffoli")
    assert (ROOT / "examples/beacons.svg").read_text() == draw_svg(built.circuit, title=built.spec.title)


def test_ci_calls_the_test_command() -> None:
    command = next(line for line in blocks("sh")[1].splitlines() if "pytest" in line)
    assert command in (ROOT / ".ci/run").read_text().splitlines()


def test_the_examples_run() -> None:
    scripts = sorted((ROOT / "examples").glob("*.py"))
    assert len(scripts) >= 2
    for script in scripts:
        run = subprocess.run([sys.executable, script], cwd=ROOT, capture_output=True, text=True, check=False)
        assert (run.returncode, run.stderr) == (0, ""), script.name
        assert "exhaustive" in run.stdout, script.name
