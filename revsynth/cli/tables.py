"""Cost and verdict as plain lines for the terminal."""

from __future__ import annotations

import re
from collections.abc import Mapping
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from revsynth.verification.evidence import Evidence

_ROWS = (
    ("qubits", (("qubits", "in all"), ("work", "scratch"))),
    (
        "T",
        (
            ("t", "T gates"),
            ("t_depth", "T layers"),
            ("rotations", "rotations"),
            ("other", "other gates beyond Clifford"),
        ),
    ),
    (
        "gates",
        (("gates", "in all"), ("toffoli", "Toffoli"), ("cx", "CX"), ("cz", "CZ"), ("measured", "measured")),
    ),
    ("depth", (("depth", "layers"), ("toffoli_depth", "Toffoli layers"))),
    ("plan", (("cascade", "cascade gates"), ("ands", "ANDs"))),
)


def _counted(count: int | None, unit: str) -> str:
    """`2 cascade gates`, `1 cascade gate`."""
    return f"{count:,} " + (re.sub(r"s\b", "", unit, count=1) if count == 1 else unit)


def cost_lines(cost: Mapping[str, int | None]) -> list[str]:
    """The counts in words, zeros left out except where they are the point."""
    lines = []
    for label, entries in _ROWS:
        shown = [
            _counted(cost[key], unit)
            for key, unit in entries
            if cost.get(key) is not None and (cost[key] or key in ("qubits", "t", "gates", "depth"))
        ]
        if shown:
            lines.append(f"  {label:<10} {', '.join(shown)}")
    return lines


def checked(evidence: Evidence) -> str:
    """How many inputs stand behind a verdict; behind a proof they all do, some of them tried besides."""
    count = f"{evidence.inputs_checked:,} inputs"
    return f"every input, by proof; {count} tried besides" if evidence.level == "proved" else count
