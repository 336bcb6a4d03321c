"""Combinational AIGER files, ascii (`aag`) and binary (`aig`).

The format is that of Biere, "The AIGER And-Inverter Graph (AIG) Format Version 20071012" (FMV report,
2007), and Biere, Heljanko, Wieringa, "AIGER 1.9 And Beyond" (technical report, 2011; both from memory).
Ascii files may list ANDs in any order and leave numbers out. Latches, and the properties of sequential
models that 1.9 adds to the header (B C J F), are refused unless there are none. Symbols `i0 name` and `o0
name` name inputs and outputs.
"""

from __future__ import annotations

import re

from revsynth.errors import SpecError
from revsynth.spec.model import Spec
from revsynth.spec.netlist import LoopError, Netlist, NetlistGate, Signal, in_order
from revsynth.spec.netlist_words import check_size, netlist_spec

_NUMBER = re.compile(rb"[0-9]{1,10}")
_SYMBOL = re.compile(rb"([iolbcjf])([0-9]{1,10}) (.+)")
_HEADER = "'aag M I L O A' or 'aig M I L O A', numbers of variables, inputs, latches, outputs and ANDs,"
_REFUSED = (
    "latches (L): only combinational netlists have a function; cut each into an input and an output",
    "bad-state properties (B): they are of sequential models; list those literals as outputs",
    "constraints (C): list those literals as outputs, or write a [domain]",
    "justice properties (J): they are of sequential models",
    "fairness constraints (F): they are of sequential models",
)


def parse_aiger(data: bytes, source: str = "netlist.aag") -> Spec:
    """The predicate (one output) or outputs of an AIGER file of either kind.

    Raises SpecError with the line (or, behind the lines of a binary file, the byte) where the file is no
    AIGER, is not combinational, or does not hang together.
    """
    return _Reader(data, source).read()


class _Reader:
    def __init__(self, data: bytes, source: str) -> None:
        self.data = data
        self.source = source
        self.position = 0
        self.number = 0
        self.names: dict[str, dict[int, str]] = {"i": {}, "o": {}}

    def read(self) -> Spec:
        binary, variables, inputs, outputs, ands = self.header()
        check_size(inputs, outputs, self.source)
        if binary:
            if variables != inputs + ands:
                raise self.error(f"M is {variables}, but a binary file without latches has M = I + A")
            netlist = self.binary_body(inputs, outputs, ands)
        else:
            netlist = self.ascii_body(variables, inputs, outputs, ands)
        self.symbols(inputs, outputs)
        named = [[self.names[kind].get(i) for i in range(n)] for kind, n in (("i", inputs), ("o", outputs))]
        return netlist_spec(netlist, named[0], named[1], self.source)

    def header(self) -> tuple[bool, int, int, int, int]:
        tokens = self.line().split()
        numbers = tokens[1:]
        if (
            tokens[:1] not in ([b"aag"], [b"aig"])
            or not 5 <= len(numbers) <= 9
            or not all(map(_NUMBER.fullmatch, numbers))
        ):
            raise self.error(f"{_HEADER} is wanted, not {_shown(b' '.join(tokens))}")
        variables, inputs, latches, outputs, ands, *more = map(int, numbers)
        for count, reason in zip((latches, *more), _REFUSED, strict=False):
            if count:
                raise self.error(f"{count} {reason}")
        if variables < inputs + ands:
            raise self.error(f"M is {variables}, but {inputs} inputs and {ands} ANDs are more")
        return tokens[0] == b"aig", variables, inputs, outputs, ands

    def line(self) -> bytes:
        """The next line, without its end."""
        self.number += 1
        if self.position >= len(self.data):
            raise self.error("the file ends here: it is cut off, or its header promises too much")
        end = self.data.find(b"\n", self.position)
        end = len(self.data) if end < 0 else end
        line = self.data[self.position : end]
        self.position = end + 1
        return line.removesuffix(b"\r")

    def literals(self, count: int, most: int, what: str) -> list[int]:
        """The literals of the next line, each at most `most`."""
        tokens = self.line().split()
        if len(tokens) != count or not all(map(_NUMBER.fullmatch, tokens)):
            raise self.error(f"{what} is wanted, not {_shown(b' '.join(tokens))}")
        found = list(map(int, tokens))
        if max(found) > most:
            raise self.error(f"literal {max(found)} is beyond the {most >> 1} variables of the header")
        return found

    def ascii_body(self, variables: int, inputs: int, outputs: int, ands: int) -> Netlist:
        most = 2 * variables + 1
        made: dict[int, int] = {}
        for place in range(inputs):
            (literal,) = self.literals(1, most, f"input {place}, one literal,")
            self.make(literal, made, "an input")
        wanted = [
            (self.literals(1, most, f"output {i}, one literal,")[0], self.number) for i in range(outputs)
        ]
        operands: dict[int, tuple[int, int]] = {}
        for place in range(ands):
            literal, left, right = self.literals(3, most, f"AND {place}, three literals,")
            self.make(literal, made, "an AND")
            operands[literal >> 1] = (left, right)
        signals = {variable: place + 1 for place, variable in enumerate(made) if variable not in operands}
        signals[0] = 0
        gates = []
        for variable in self.order(operands, made):
            pair = operands[variable]
            for literal in pair:
                if literal >> 1 not in signals:
                    raise self.nothing_makes(literal, made[variable])
            gates.append(NetlistGate("and", (_moved(pair[0], signals), _moved(pair[1], signals))))
            signals[variable] = inputs + len(gates)
        for literal, number in wanted:
            if literal >> 1 not in signals:
                raise self.nothing_makes(literal, number)
        return Netlist(inputs, tuple(gates), tuple(_moved(literal, signals) for literal, _ in wanted))

    def make(self, literal: int, made: dict[int, int], what: str) -> None:
        """Note the line at which a variable is made."""
        if literal < 2 or literal & 1:
            raise self.error(f"literal {literal} cannot be {what}: an even one from 2 on is wanted")
        if literal >> 1 in made:
            raise self.error(f"literal {literal} is made already (line {made[literal >> 1]})")
        made[literal >> 1] = self.number

    def order(self, operands: dict[int, tuple[int, int]], made: dict[int, int]) -> list[int]:
        try:
            return in_order({v: (pair[0] >> 1, pair[1] >> 1) for v, pair in operands.items()})
        except LoopError as loop:
            path = " <- ".join(str(2 * int(str(name))) for name in loop.names[:6])
            path += " <- ..." if len(loop.names) > 6 else ""
            self.number = made[int(str(loop.names[0]))]
            raise self.error(f"a loop: {path}; combinational netlists have none") from None

    def nothing_makes(self, literal: int, number: int) -> SpecError:
        self.number = number
        return self.error(f"nothing makes literal {literal & -2}: an input or an AND is wanted")

    def binary_body(self, inputs: int, outputs: int, ands: int) -> Netlist:
        most = 2 * (inputs + ands) + 1
        wanted = [self.literals(1, most, f"output {i}, one literal,")[0] for i in range(outputs)]
        gates = []
        for place in range(ands):
            literal = 2 * (inputs + place + 1)
            right = literal - self.delta(place)
            left = right - self.delta(place)
            if right == literal or left < 0:
                raise self.at_byte(f"AND {place} reads a literal that is not below its own, {literal}")
            gates.append(NetlistGate("and", (left, right)))
        return Netlist(inputs, tuple(gates), tuple(wanted))

    def delta(self, place: int) -> int:
        """A number in groups of seven bits, the lowest first; the top bit says that more follow."""
        value = shift = 0
        while True:
            if self.position >= len(self.data):
                raise self.at_byte(f"the file ends within AND {place}: it is cut off")
            byte = self.data[self.position]
            self.position += 1
            value |= (byte & 0x7F) << shift
            if byte < 0x80:
                return value
            shift += 7
            if shift > 35:
                raise self.at_byte(f"AND {place} holds a number of more than 42 bits")

    def symbols(self, inputs: int, outputs: int) -> None:
        """The symbol table, up to the comments."""
        while self.position < len(self.data):
            line = self.line()
            if not line.strip():
                continue
            symbol = _SYMBOL.fullmatch(line)
            if symbol is None:
                if line.startswith(b"c"):
                    return
                raise self.error(
                    f"a symbol 'i0 name' or the comments behind 'c' are wanted, not {_shown(line)}"
                )
            kind, place = symbol[1].decode(), int(symbol[2])
            count = {"i": inputs, "o": outputs}.get(kind, 0)
            if place >= count:
                raise self.error(f"there is no {kind}{place}: the header says {count}")
            if place in self.names[kind]:
                raise self.error(f"{kind}{place} has a name already")
            self.names[kind][place] = symbol[3].decode("utf-8", errors="replace").strip()

    def error(self, message: str) -> SpecError:
        return SpecError(message, source=self.source, place=f"line {self.number}")

    def at_byte(self, message: str) -> SpecError:
        return SpecError(message, source=self.source, place=f"byte {self.position}")


def _moved(literal: int, signals: dict[int, int]) -> Signal:
    return 2 * signals[literal >> 1] + (literal & 1)


def _shown(text: bytes, most: int = 40) -> str:
    """Bytes of the file in quotes, cut where they are long."""
    return repr(text[:most].decode("ascii", errors="replace")) if text else "an empty line"
