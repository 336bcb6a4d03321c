"""Cost and verdict as plain lines for the terminal."""

from __future__ import annotations

from collections.abc import Mapping

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


def cost_lines(cost: Mapping[str, int | None]) -> list[str]:
    """The counts in words, zeros left out except where they are the point."""
    lines = []
    for label, entries in _ROWS:
        shown = [
            f"{cost[key]:,} {unit}"
            for key, unit in entries
            if cost.get(key) is not None and (cost[key] or key in ("qubits", "t", "gates", "depth"))
        ]
        if shown:
            lines.append(f"  {label:<10} {', '.join(shown)}")
    return lines
