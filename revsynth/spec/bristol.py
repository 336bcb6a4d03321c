"""Bristol Fashion circuits: values `in_0`, `in_1`, ... and `out_0`, `out_1`, ... of wires, bit 0 first.

The format is that of the page "'Bristol Fashion' MPC Circuits" by Archer, Abril, Lu, Maene, Mertens,
Sijacic and Smart (from memory): the numbers of gates and wires; the number of input values and the width of
each; the same of output values; then one gate a line, `2 1 a b c XOR`: how many wires it reads and makes,
which, and its name. Inputs are the first wires, outputs the last. XOR, AND and INV; EQ makes a wire the
constant 0 or 1, EQW copies a wire, and MAND is many ANDs at once: of the first half of its operands with
the second, one by one.
"""

from __future__ import annotations

import re
from collections.abc import Iterator

from revsynth.errors import SpecError
from revsynth.spec.model import Output, Outputs, Predicate, Spec, Word
from revsynth.spec.named_netlist import shown
from revsynth.spec.netlist import FALSE, GateKind, Netlist, NetlistGate, Signal
from revsynth.spec.netlist_words import check_size

_NUMBER = re.compile(r"[0-9]{1,10}", re.ASCII)
_SHAPES = {"XOR": (2, 1), "AND": (2, 1), "INV": (1, 1), "NOT": (1, 1), "EQ": (1, 1), "EQW": (1, 1)}
_KNOWN = "XOR AND INV EQ EQW and MAND"


def parse_bristol(text: str, source: str = "netlist.bristol") -> Spec:
    """The predicate (one output bit) or outputs of a Bristol Fashion text.

    Raises SpecError with the line where the text is none, contradicts its header or does not hang together.
    """
    return _Reader(text, source).read()


class _Reader:
    def __init__(self, text: str, source: str) -> None:
        self.source = source
        self.number = 0
        self.lines = self.tokens(text)
        self.wires = self.bits = 0
        self.signals: dict[int, Signal] = {}
        self.gates: list[NetlistGate] = []

    def tokens(self, text: str) -> Iterator[list[str]]:
        """The tokens of each line that holds some; its number is noted."""
        for number, line in enumerate(text.split("\n"), 1):
            tokens = line.split()
            if tokens:
                self.number = number
                yield tokens

    def read(self) -> Spec:
        gates, self.wires = self.counts("the numbers of gates and wires", 2)
        inputs = self.widths("input")
        outputs = self.widths("output")
        self.bits, wanted = sum(inputs), sum(outputs)
        check_size(self.bits, wanted, self.source)
        if self.wires < max(self.bits, wanted):
            raise self.error(f"the first line says {self.wires} wires, but the values have more")
        self.signals = {wire: 2 * (wire + 1) for wire in range(self.bits)}
        found = 0
        for tokens in self.lines:
            if not self.plain_gate(tokens):
                self.gate(tokens)
            found += 1
        if found != gates:
            raise SpecError(
                f"the first line says {gates} gates, but the file has {found}", source=self.source
            )
        netlist = Netlist(self.bits, tuple(self.gates), tuple(self.output_signals(wanted)))
        return _spec(netlist, inputs, outputs, self.source)

    def counts(self, what: str, wanted: int | None = None) -> list[int]:
        tokens = next(self.lines, [])
        if not tokens:
            raise SpecError(f"{what} are missing: this is no Bristol Fashion circuit", source=self.source)
        right = wanted is None or len(tokens) == wanted
        if not right or not all(map(_NUMBER.fullmatch, tokens)):
            raise self.error(f"{what} are wanted, not {shown(' '.join(tokens[:8]))}")
        return list(map(int, tokens))

    def widths(self, what: str) -> list[int]:
        """The widths of the input or output values."""
        count, *widths = self.counts(f"the number of {what} values and the width of each")
        if count != len(widths):
            raise self.error(
                f"{count} {what} values, but {len(widths)} widths behind the number: 'COUNT WIDTH ...' is "
                "wanted (circuits of the older Bristol format have no COUNT)"
            )
        if 0 in widths:
            raise self.error(f"{what} value {widths.index(0)} has no wires: a width from 1 on is wanted")
        return widths

    def plain_gate(self, tokens: list[str]) -> bool:
        """Read an XOR or AND in which nothing is wrong, as nearly all lines are: it takes half the time."""
        if len(tokens) != 6 or tokens[:2] != ["2", "1"] or tokens[5] not in ("XOR", "AND"):
            return False
        digits = "".join(tokens[2:5])
        if not (digits.isascii() and digits.isdigit() and len(digits) <= 30):
            return False
        left, right = self.signals.get(int(tokens[2])), self.signals.get(int(tokens[3]))
        made = int(tokens[4])
        if left is None or right is None or made >= self.wires or made in self.signals:
            return False
        self.signals[made] = self.add("xor" if tokens[5] == "XOR" else "and", (left, right))
        return True

    def gate(self, tokens: list[str]) -> None:
        """Read any gate.

        Raises SpecError where something is wrong.
        """
        *numbers, name = tokens
        name = name.upper()
        if name not in _SHAPES and name != "MAND":
            raise self.error(f"the gate {shown(tokens[-1])} is unknown: {_KNOWN} are known")
        if len(numbers) < 2 or not all(map(_NUMBER.fullmatch, numbers)):
            raise self.error(
                "a gate such as '2 1 0 1 5 AND' is wanted: wires read, wires made, which, and the name"
            )
        reads, makes, *wires = map(int, numbers)
        shape = _SHAPES.get(name, (2 * makes, makes))
        if (reads, makes) != shape or makes == 0:
            wanted = f"{shape[0]} {shape[1]}" if name != "MAND" else "twice as many wires read as made"
            raise self.error(f"{name} wants {wanted}, not {reads} {makes}")
        if len(wires) != reads + makes:
            raise self.error(f"{reads} wires read and {makes} made are {reads + makes}, not {len(wires)}")
        for made, signal in zip(wires[reads:], self.made(name, wires[:reads]), strict=True):
            if made >= self.wires:
                raise self.error(f"wire {made} is beyond the {self.wires} of the first line")
            if made in self.signals:
                what = "an input" if made < self.bits else "made by two gates"
                raise self.error(f"wire {made} is {what}: each other wire has one gate")
            self.signals[made] = signal

    def made(self, name: str, wires: list[int]) -> list[Signal]:
        """What a gate makes of the wires that it reads."""
        if name == "EQ":
            if wires[0] > 1:
                raise self.error(f"EQ makes a wire 0 or 1, not {wires[0]}: EQW copies a wire")
            return [FALSE ^ wires[0]]
        for wire in wires:
            if wire not in self.signals:
                raise self.error(f"wire {wire} is read before a gate makes it: gates come in order")
        operands = [self.signals[wire] for wire in wires]
        if name == "EQW":
            return operands
        if name in ("INV", "NOT"):
            return [operands[0] ^ 1]
        half = len(operands) // 2
        pairs = zip(operands[:half], operands[half:], strict=True)
        return [self.add("xor" if name == "XOR" else "and", pair) for pair in pairs]

    def add(self, kind: GateKind, operands: tuple[Signal, Signal]) -> Signal:
        self.gates.append(NetlistGate(kind, operands))
        return 2 * (self.bits + len(self.gates))

    def output_signals(self, wanted: int) -> Iterator[Signal]:
        for wire in range(self.wires - wanted, self.wires):
            if wire not in self.signals:
                raise SpecError(
                    f"nothing makes wire {wire}, but the last {wanted} of {self.wires} wires are outputs",
                    source=self.source,
                )
            yield self.signals[wire]

    def error(self, message: str) -> SpecError:
        return SpecError(message, source=self.source, place=f"line {self.number}")


def _spec(netlist: Netlist, inputs: list[int], outputs: list[int], source: str) -> Spec:
    words = tuple(Word(f"in_{place}", width) for place, width in enumerate(inputs))
    if sum(outputs) == 1:
        return Spec(words, Predicate(netlist=netlist), source=source)
    made = tuple(Output(f"out_{place}", bits=width) for place, width in enumerate(outputs))
    return Spec(words, Outputs(made, netlist=netlist), source=source)
