"""The ISCAS-85 netlists from their Verilog, evaluated gate by gate, and written out in every format that is
read.
"""

from __future__ import annotations

import re
from dataclasses import dataclass

_PORTS = re.compile(r"\b(input|output)\s+([^;]+);")
_GATE = re.compile(r"\b(and|or|nand|nor|xor|xnor|not|buf)\s+\w+\s*\(([^)]*)\)\s*;")
_ASSIGN = re.compile(r"\bassign\s+(\w+)\s*=\s*([\w']+)\s*;")
COVERS = {
    "and": lambda n: ["1" * n + " 1"],
    "nand": lambda n: ["1" * n + " 0"],
    "or": lambda n: ["0" * n + " 0"],
    "nor": lambda n: ["0" * n + " 1"],
    "xor": lambda n: [f"{x:0{n}b} 1" for x in range(1 << n) if x.bit_count() % 2],
    "xnor": lambda n: [f"{x:0{n}b} 1" for x in range(1 << n) if not x.bit_count() % 2],
    "not": lambda n: ["0 1"],
    "buf": lambda n: ["1 1"],
    "0": lambda n: [],
    "1": lambda n: ["1"],
}


@dataclass(frozen=True)
class Gates:
    """Named ports, and gates (name, kind, operands) in topological order; kinds "0" and "1" are constants."""

    inputs: list[str]
    outputs: list[str]
    gates: list[tuple[str, str, list[str]]]


def read_verilog(text: str) -> Gates:
    """The gates of a flat structural module."""
    text = re.sub(r"//[^\n]*", "", text)
    ports: dict[str, list[str]] = {"input": [], "output": []}
    for kind, names in _PORTS.findall(text):
        ports[kind] += re.split(r"[\s,]+", names.strip())
    made: dict[str, tuple[str, list[str]]] = {}
    for kind, names in _GATE.findall(text):
        name, *operands = re.split(r"[\s,]+", names.strip())
        made[name] = (kind, operands)
    for name, value in _ASSIGN.findall(text):
        made[name] = ("01"[value.endswith("1")], []) if "'" in value else ("buf", [value])
    done = dict.fromkeys(ports["input"])
    gates = []
    while made:
        ready = [name for name, (_, operands) in made.items() if all(operand in done for operand in operands)]
        assert ready, "a loop"
        for name in ready:
            kind, operands = made.pop(name)
            gates.append((name, kind, operands))
            done[name] = None
    return Gates(ports["input"], ports["output"], gates)


def evaluate(netlist: Gates, lanes: dict[str, int], everywhere: int) -> list[int]:
    """The outputs, each an integer of one bit a lane; `lanes` holds the inputs in the same way."""
    values = dict(lanes)
    for name, kind, operands in netlist.gates:
        bits = [values[operand] for operand in operands]
        total = everywhere if kind in ("and", "nand", "1") else 0
        for value in bits:
            if kind in ("and", "nand"):
                total &= value
            elif kind in ("or", "nor"):
                total |= value
            else:
                total ^= value
        values[name] = total ^ (everywhere if kind in ("nand", "nor", "xnor", "not") else 0)
    return [values[name] for name in netlist.outputs]


def bench(netlist: Gates) -> str:
    """As bench; its outputs first, gates from last to first."""
    lines = [f"OUTPUT({name})" for name in netlist.outputs] + [f"INPUT({name})" for name in netlist.inputs]
    for name, kind, operands in reversed(netlist.gates):
        first = netlist.inputs[0]
        if kind in ("0", "1"):
            kind, operands = ("xor" if kind == "0" else "xnor"), [first, first]
        lines.append(f"{name} = {kind.upper()}({', '.join(operands)})")
    return "\n".join(lines)


def blif(netlist: Gates) -> str:
    """As BLIF, ports over many lines."""
    ports = " \\\n ".join(netlist.inputs), " \\\n ".join(netlist.outputs)
    lines = [".model net", f".inputs {ports[0]}", f".outputs {ports[1]}"]
    for name, kind, operands in netlist.gates:
        lines += [" ".join([".names", *operands, name]), *COVERS[kind](len(operands))]
    return "\n".join([*lines, ".end", ""])


def _literals(netlist: Gates) -> tuple[list[tuple[int, int]], list[int]]:
    """(operands of each AND, outputs) as AIGER literals; ANDs in order behind the inputs."""
    literal = {name: 2 * (place + 1) for place, name in enumerate(netlist.inputs)}
    ands: list[tuple[int, int]] = []

    def and_(a: int, b: int) -> int:
        ands.append((max(a, b), min(a, b)))
        return 2 * (len(netlist.inputs) + len(ands))

    for name, kind, operands in netlist.gates:
        bits = [literal[operand] for operand in operands]
        inverted = kind in ("nand", "or", "xnor", "not", "1")
        if kind in ("0", "1"):
            bits = [0]
        elif kind in ("or", "nor"):
            bits = [bit ^ 1 for bit in bits]
        total = bits[0]
        for bit in bits[1:]:
            if kind in ("xor", "xnor"):
                total = and_(and_(total, bit) ^ 1, and_(total ^ 1, bit ^ 1) ^ 1)
            else:
                total = and_(total, bit)
        literal[name] = total ^ inverted
    return ands, [literal[name] for name in netlist.outputs]


def aag(netlist: Gates) -> bytes:
    """As ascii AIGER, the ANDs from last to first."""
    ands, outputs = _literals(netlist)
    inputs = len(netlist.inputs)
    lines = [f"aag {inputs + len(ands)} {inputs} 0 {len(outputs)} {len(ands)}"]
    lines += [str(2 * (place + 1)) for place in range(inputs)] + [str(output) for output in outputs]
    lines += [f"{2 * (inputs + i + 1)} {a} {b}" for i, (a, b) in reversed(list(enumerate(ands)))]
    lines += [f"i{place} {name}" for place, name in enumerate(netlist.inputs)]
    return "\n".join([*lines, "c", ""]).encode()


def aig(netlist: Gates) -> bytes:
    """As binary AIGER."""
    ands, outputs = _literals(netlist)
    inputs = len(netlist.inputs)
    head = [f"aig {inputs + len(ands)} {inputs} 0 {len(outputs)} {len(ands)}", *map(str, outputs)]
    body = bytearray("\n".join(head).encode() + b"\n")
    for place, (a, b) in enumerate(ands):
        for delta in (2 * (inputs + place + 1) - a, a - b):
            while delta >= 0x80:
                body.append(delta & 0x7F | 0x80)
                delta >>= 7
            body.append(delta)
    return bytes(body)


def bristol(netlist: Gates) -> str:
    """As Bristol Fashion: one input value and one output value."""
    ands, outputs = _literals(netlist)
    inputs = len(netlist.inputs)
    lines: list[str] = []
    wires = inputs
    wire_of: dict[int, int] = {2 * (place + 1): place for place in range(inputs)}

    def wire(literal: int) -> int:
        nonlocal wires
        if literal not in wire_of:
            if literal < 2:
                lines.append(f"1 1 {literal} {wires} EQ")
            else:
                lines.append(f"1 1 {wire_of[literal ^ 1]} {wires} INV")
            wire_of[literal] = wires
            wires += 1
        return wire_of[literal]

    for place, (a, b) in enumerate(ands):
        pair = wire(a), wire(b)
        lines.append(f"2 1 {pair[0]} {pair[1]} {wires} AND")
        wire_of[2 * (inputs + place + 1)] = wires
        wires += 1
    last = [wire(output) for output in outputs]
    for source in last:
        lines.append(f"1 1 {source} {wires} EQW")
        wires += 1
    return "\n".join([f"{len(lines)} {wires}", f"1 {inputs}", f"1 {len(outputs)}", "", *lines, ""])
