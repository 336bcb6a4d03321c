"""Written files with one fault in their text: what a slip of a hand or of a program may do to a line."""

from __future__ import annotations

import re
from collections.abc import Iterator
from random import Random

_LINE = re.compile(r"(if \(seen\[\d+\]\) \{ )?((?:(?:neg)?ctrl(?:\(\d+\))? @ )*)(\w+) ([^;]*);( \})?")
_DECLARED = re.compile(r"qubit\[(\d+)\] (\w+);|qreg (\w+)\[(\d+)\];")
_HEAD = re.compile(r"//|OPENQASM|include|qubit|qreg|bit")
_OTHERS = {
    "t": ("tdg", "s"), "tdg": ("t", "sdg"), "s": ("sdg", "t"), "sdg": ("s", "tdg"), "x": ("z",),
    "z": ("x", "s"), "h": ("x",), "cx": ("cz",), "cz": ("cx",), "ccx": (),
}  # fmt: skip
Fault = tuple[str, str]
"""What was done, and the text with it done."""


def faults(text: str, rng: Random) -> Iterator[Fault]:
    """Every kind of fault at every line, the places of wrong lines and new gates drawn from `rng`."""
    lines = text.split("\n")
    qubits = [
        f"{match[2] or match[3]}[{index}]"
        for match in map(_DECLARED.fullmatch, lines)
        if match
        for index in range(int(match[1] or match[4]))
    ]
    for number, line in enumerate(lines):
        if not line or _HEAD.match(line):
            continue
        for fault, new in _at(line, qubits, rng):
            yield f"{fault} at {line!r}", "\n".join([*lines[:number], *new, *lines[number + 1 :]])


def _at(line: str, qubits: list[str], rng: Random) -> Iterator[tuple[str, list[str]]]:
    yield "left out", []
    yield "doubled", [line, line]
    yield "inserted", [f"{rng.choice(['x', 'z', 'h', 's', 't', 'tdg'])} {rng.choice(qubits)};", line]
    if len(qubits) > 1:
        pair = ", ".join(rng.sample(qubits, 2))
        yield "inserted", [f"{rng.choice(['cx', 'cz'])} {pair};", line]
    match = _LINE.fullmatch(line)
    if "measure" in line or match is None:
        return
    before, modifiers, name, after = match[1] or "", match[2], match[3], match[5] or ""
    operands = match[4].split(", ")

    def gate(name: str, operands: list[str], modifiers: str = modifiers) -> list[str]:
        return [f"{before}{modifiers}{name} {', '.join(operands)};{after}"]

    for other in () if modifiers else _OTHERS[name]:
        yield f"{name} to {other}", gate(other, operands)
    free = [qubit for qubit in qubits if qubit not in operands]
    if free:
        wrong = list(operands)
        wrong[rng.randrange(len(wrong))] = rng.choice(free)
        yield "wrong line", gate(name, wrong)
    if len(operands) > 1:
        place = rng.randrange(len(operands) - 1)
        swapped = list(operands)
        swapped[place], swapped[-1] = swapped[-1], swapped[place]
        yield "operands exchanged", gate(name, swapped)
        yield "polarity", [f"x {operands[place]};", line, f"x {operands[place]};"]
    for one, two in (("negctrl @", "ctrl @"), ("ctrl(2) @", "ctrl @ negctrl @")):
        if one in modifiers:
            yield "polarity", gate(name, operands, modifiers.replace(one, two, 1))
    if before:
        yield "condition dropped", [line[len(before) : -len(after)]]
