"""All of specs/, built at every level, parses with the reference OpenQASM parser (`openqasm3`, PyPI)."""

from __future__ import annotations

from pathlib import Path

import openqasm3
import pytest

import revsynth
from revsynth.spec.model import Spec

SPECS = sorted(path for path in (Path(__file__).parents[2] / "specs").iterdir() if path.is_file())
LEVELS = [
    (gates, uncompute)
    for gates in ("cascade", "toffoli", "clifford+t")
    for uncompute in ("unitary", "measured")
]
ORACLES: dict[str, tuple[str, ...]] = {
    "predicate": ("phase", "bit", "fresh", "compute", "embedded"),
    "outputs": ("bit", "fresh", "compute", "embedded"),
    "permutation": ("inplace",),
}
MOST_LINES = 5000
"""The reference parser reads some 1,500 lines a second, and takes much memory for more: it gets so many, of
which every one below the head is a statement of its own."""


@pytest.mark.parametrize(("gates", "uncompute"), LEVELS)
@pytest.mark.parametrize("path", SPECS, ids=lambda path: path.name)
def test_the_natural_form_parses(path: Path, gates: str, uncompute: str) -> None:
    spec = revsynth.read_spec(path)
    assert parses(spec, ORACLES[spec.kind][0], gates, uncompute) > 0


@pytest.mark.slow
@pytest.mark.parametrize(("gates", "uncompute"), LEVELS)
@pytest.mark.parametrize("path", SPECS, ids=lambda path: path.name)
def test_every_other_form_parses(path: Path, gates: str, uncompute: str) -> None:
    spec = revsynth.read_spec(path)
    for oracle in ORACLES[spec.kind][1:]:
        if oracle == "embedded" and spec.input_bits > 24:
            continue  # lines that hold garbage are found from tables
        parses(spec, oracle, gates, uncompute)


def parses(spec: Spec, oracle: str, gates: str, uncompute: str) -> int:
    """Build and parse; every operation of the circuit is one statement behind the declarations."""
    built = revsynth.build(spec, oracle=oracle, gates=gates, uncompute=uncompute, effort="low")  # type: ignore[arg-type]
    lines = built.text().splitlines(keepends=True)
    left = max(len(lines) - MOST_LINES, 0)
    program = openqasm3.parse("".join(lines[: len(lines) - left]))
    declared = 1 + len(built.circuit.registers) + len(built.circuit.bit_registers)
    assert program.version == "3.0"
    assert len(program.statements) == declared + len(built.circuit) - left
    return len(built.circuit)
