"""Combinational BLIF: one `.model` of `.names` tables over named signals.

The format is that of "Berkeley Logic Interchange Format (BLIF)", University of California, Berkeley, 1992
(from memory): `#` starts a comment, a backslash at the end continues a line, the rows of `.names` say where
the output is 1 (or, all of them, where it is 0), and a table without rows is 0. `.inputs` and `.outputs`
may be given in several lines; left out, they are the signals that no table makes, and those that no table
reads.
"""

from __future__ import annotations

import re
from collections.abc import Iterator

from revsynth.errors import SpecError
from revsynth.spec.model import Spec
from revsynth.spec.named_netlist import NamedNetlist, shown

_REFUSED = {
    ".latch": "a latch: only combinational netlists have a function; cut it into an input and an output",
    ".mlatch": "a latch: only combinational netlists have a function; cut it into an input and an output",
    ".clock": "a clock: only combinational netlists have a function",
    ".subckt": "a part of another model: flatten the hierarchy into one model of .names",
    ".search": "another file: flatten the hierarchy into one model of .names",
    ".gate": "a gate of a cell library: write its table with .names",
    ".exdc": "a network of don't-cares: write the free values as a PLA or a [domain]",
    ".start_kiss": "a state machine: only combinational netlists have a function",
    ".mv": "a variable of many values: 0/1 signals only",
}
_IGNORED = frozenset(
    (
        ".area",
        ".delay",
        ".wire",
        ".wire_load_slope",
        ".input_arrival",
        ".output_required",
        ".default_input_arrival",
        ".default_output_required",
        ".input_drive",
        ".default_input_drive",
        ".max_input_load",
        ".default_max_input_load",
        ".output_load",
        ".default_output_load",
    )
)
"""Timing and area: they change nothing of the function."""
_KNOWN = ".model .inputs .outputs .names .end"
_ROW = re.compile(r"[01-]+", re.ASCII)


def parse_blif(text: str, source: str = "netlist.blif") -> Spec:
    """The predicate (one output) or outputs of a BLIF text.

    Raises SpecError with the line where the text is no BLIF, is not combinational or does not hang together.
    """
    reader = _Reader(source)
    for number, tokens in _lines(text):
        reader.take(number, tokens)
    return reader.finish()


def _lines(text: str) -> Iterator[tuple[int, list[str]]]:
    """Lines as tokens, without comments, continued ones joined under the number of their first."""
    begun: list[str] = []
    first = 0
    for number, line in enumerate(text.split("\n"), 1):
        code = line.partition("#")[0].rstrip()
        goes_on = code.endswith("\\")
        first = first or number
        begun += (code[:-1] if goes_on else code).split()
        if not goes_on:
            if begun:
                yield first, begun
            begun, first = [], 0
    if begun:
        yield first, begun


class _Reader:
    def __init__(self, source: str) -> None:
        self.netlist = NamedNetlist(source)
        self.declared = {".model": False, ".inputs": False, ".outputs": False}
        self.ended = False
        self.table: list[str] | None = None
        self.table_line = 0
        self.rows: list[str] = []
        self.value = ""

    def take(self, number: int, tokens: list[str]) -> None:
        """Read one line's tokens."""
        if not tokens[0].startswith("."):
            self.row(number, tokens)
            return
        self.close()
        keyword, arguments = tokens[0], tokens[1:]
        if keyword in _REFUSED:
            raise self.error(number, f"{keyword} is {_REFUSED[keyword]}")
        if self.ended and keyword != ".end":
            what = (
                "a second model: flatten the hierarchy into one"
                if keyword == ".model"
                else "more behind .end"
            )
            raise self.error(number, f"{what}; a file holds one model")
        if keyword == ".model":
            if self.declared[".model"] or self.netlist.gates:
                raise self.error(number, "a second .model: flatten the hierarchy into one model of .names")
            self.declared[".model"] = True
        elif keyword == ".inputs":
            self.declared[".inputs"] = True
            for name in arguments:
                self.netlist.add_input(name, number)
        elif keyword == ".outputs":
            self.declared[".outputs"] = True
            for name in arguments:
                self.netlist.add_output(name, number)
        elif keyword == ".names":
            if not arguments:
                raise self.error(number, ".names wants the name of its output, behind those of its inputs")
            self.table, self.table_line = arguments, number
        elif keyword == ".end":
            self.ended = True
        elif keyword not in _IGNORED:
            raise self.error(number, f"{shown(keyword)} is unknown: {_KNOWN} are known")

    def row(self, number: int, tokens: list[str]) -> None:
        """Read one row of a table: what the inputs are, and the output there."""
        if self.table is None:
            raise self.error(number, f"{shown(tokens[0])} belongs to no .names: {_KNOWN} are known")
        inputs = len(self.table) - 1
        wanted = "an input part and 0 or 1" if inputs else "0 or 1"
        if len(tokens) != (2 if inputs else 1) or tokens[-1] not in ("0", "1"):
            raise self.error(number, f"a row of {wanted} is wanted, not {shown(' '.join(tokens))}")
        part = tokens[0] if inputs else ""
        if len(part) != inputs:
            raise self.error(number, f"the input part has {len(part)} columns, and {inputs} are wanted")
        if part and not _ROW.fullmatch(part):
            raise self.error(number, f"the input part {shown(part)}: 0, 1 and - are allowed")
        if self.value and tokens[-1] != self.value:
            raise self.error(number, "the rows of one .names give all 1 or all 0, not both")
        self.value = tokens[-1]
        self.rows.append(part)

    def close(self) -> None:
        """End the table that is open, if one is."""
        if self.table is None:
            return
        *operands, name = self.table
        inverted = self.value == "0"
        self.netlist.define(name, "cover", operands, self.table_line, rows=self.rows, inverted=inverted)
        self.table, self.rows, self.value = None, [], ""

    def finish(self) -> Spec:
        self.close()
        netlist = self.netlist
        if not netlist.gates and not any(self.declared.values()):
            raise SpecError(f"this is no BLIF: {_KNOWN} are wanted", source=netlist.source)
        read = {name: gate.line for gate in netlist.gates.values() for name in gate.operands}
        if not self.declared[".inputs"]:
            for name, line in read.items():
                if name not in netlist.gates:
                    netlist.add_input(name, line)
        if not self.declared[".outputs"]:
            for name, gate in netlist.gates.items():
                if name not in read:
                    netlist.add_output(name, gate.line)
        return netlist.finish()

    def error(self, number: int, message: str) -> SpecError:
        return self.netlist.error(number, message)
