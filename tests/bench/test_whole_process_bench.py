"""Whole processes as a user waits for them: help, inspection, builds of 8 and 16 inputs. Asserts no time."""

from __future__ import annotations

import subprocess
import sys
from pathlib import Path
from typing import Any

import pytest

ROOT = Path(__file__).parent.parent.parent

CASES = {
    "help": ["--help"],
    "inspect 8 inputs": ["inspect", "specs/beacons.toml"],
    "build 8 inputs": ["build", "specs/beacons.toml", "-o", "/dev/null"],
    "build 8 inputs, measured": [
        "build",
        "specs/watch_rota.toml",
        "--uncompute",
        "measured",
        "-o",
        "/dev/null",
    ],
    "build 16 inputs": ["build", "specs/range_circle.toml", "-o", "/dev/null"],
    "build 16 inputs without structure": [
        *("build", "--where", "(a * b + a) % 251 < 97", "--input", "a=8", "--input", "b=8", "-o", "/dev/null")
    ],
    "build 16 inputs as 780,000 gates": [
        *("build", "--where", "(a * b + a) % 251 < 97", "--input", "a=8", "--input", "b=8"),
        *("--method", "products", "-o", "/dev/null"),
    ],
}


@pytest.mark.bench
@pytest.mark.parametrize("name", CASES)
def test_whole_process(benchmark: Any, name: str) -> None:
    def run() -> None:
        subprocess.run(
            [sys.executable, "-m", "revsynth", *CASES[name]], cwd=ROOT, check=True, capture_output=True
        )

    benchmark.pedantic(run, rounds=3, warmup_rounds=1)
