"""ISCAS bench files: `INPUT(a)`, `OUTPUT(f)`, `f = NAND(a, b)`, one a line in any order, `#` comments.

The format is that of Brglez and Fujiwara, "A neutral netlist of 10 combinational benchmark circuits", ISCAS
1985 (from memory). Gates: AND OR NAND NOR XOR XNOR of one or more operands (XNOR is the complement of the
parity), NOT, BUF or BUFF of one; in capitals or not. Flip-flops are refused.
"""

from __future__ import annotations

import re

from revsynth.spec.model import Spec
from revsynth.spec.named_netlist import NamedNetlist, shown
from revsynth.spec.netlist import GateKind

_PORT = re.compile(r"(?i:(INPUT|OUTPUT))\s*\(\s*([^\s(),=]+)\s*\)")
_GATE = re.compile(r"([^\s(),=]+)\s*=\s*([A-Za-z0-9_]+)\s*\(([^()]*)\)")
_GATES: dict[str, tuple[GateKind, bool]] = {
    "AND": ("and", False),
    "NAND": ("and", True),
    "OR": ("or", False),
    "NOR": ("or", True),
    "XOR": ("xor", False),
    "XNOR": ("xor", True),
    "NOT": ("and", True),
    "BUF": ("and", False),
    "BUFF": ("and", False),
}
_OF_ONE = ("NOT", "BUF", "BUFF")
_FLIP_FLOPS = ("DFF", "DFFSR", "DFFR", "DFFS", "LATCH", "DLATCH", "SDFF")


def parse_bench(text: str, source: str = "netlist.bench") -> Spec:
    """The predicate (one output) or outputs of a bench text.

    Raises SpecError with the line where the text is no bench netlist, is not combinational, or does not hang
    together.
    """
    netlist = NamedNetlist(source)
    for number, line in enumerate(text.split("\n"), 1):
        code = line.partition("#")[0].strip()
        if code:
            _take(netlist, number, code)
    return netlist.finish()


def _take(netlist: NamedNetlist, number: int, code: str) -> None:
    port = _PORT.fullmatch(code)
    if port is not None:
        add = netlist.add_input if port[1].upper() == "INPUT" else netlist.add_output
        add(port[2], number)
        return
    gate = _GATE.fullmatch(code)
    if gate is None:
        raise netlist.error(number, f"INPUT(a), OUTPUT(a) or a = GATE(b, c) is wanted, not {shown(code)}")
    name, word = gate[1], gate[2].upper()
    if word in _FLIP_FLOPS:
        reason = "only combinational netlists have a function; cut it into an input and an output"
        raise netlist.error(number, f"{word} is a flip-flop: {reason}")
    if word not in _GATES:
        raise netlist.error(number, f"{shown(gate[2])} is unknown: {' '.join(_GATES)} are known")
    operands = [operand.strip() for operand in gate[3].split(",")]
    for operand in operands:
        if not operand or len(operand.split()) > 1:
            raise netlist.error(number, f"names with commas between are wanted in {word}(...)")
    if word in _OF_ONE and len(operands) != 1:
        raise netlist.error(number, f"{word} takes one operand, not {len(operands)}")
    kind, inverted = _GATES[word]
    netlist.define(name, kind, operands, number, inverted=inverted)
