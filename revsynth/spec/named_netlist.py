"""Netlists of named signals, collected line by line in any order, as BLIF and bench files give them."""

from __future__ import annotations

from collections.abc import Iterable
from typing import NamedTuple

from revsynth.errors import SpecError
from revsynth.spec.model import Spec
from revsynth.spec.netlist import FALSE, TRUE, GateKind, LoopError, Netlist, NetlistGate, Signal, in_order
from revsynth.spec.netlist_words import check_size, netlist_spec

SHOWN = 30
"""Characters of a name that a message shows."""


class Definition(NamedTuple):
    """How a signal is made: a gate over names, `inverted` or not, and the line that says so."""

    kind: GateKind
    operands: tuple[str, ...]
    rows: tuple[str, ...]
    inverted: bool
    line: int


def shown(name: str) -> str:
    """A name in quotes, cut where it is long."""
    return repr(name if len(name) <= SHOWN else name[:SHOWN] + "...")


class NamedNetlist:
    """Collects inputs, outputs and gates; `finish` puts them in order and makes the spec."""

    def __init__(self, source: str) -> None:
        self.source = source
        self.inputs: dict[str, int] = {}
        self.outputs: list[tuple[str, int]] = []
        self.gates: dict[str, Definition] = {}

    def add_input(self, name: str, line: int) -> None:
        """Declare an input. Raises SpecError where it has been declared or made already."""
        if name in self.inputs:
            raise self.error(line, f"{shown(name)} is an input already (line {self.inputs[name]})")
        self._refuse_second_maker(name, line)
        self.inputs[name] = line

    def add_output(self, name: str, line: int) -> None:
        """Declare an output; its gate may come later."""
        self.outputs.append((name, line))

    def define(
        self,
        name: str,
        kind: GateKind,
        operands: Iterable[str],
        line: int,
        *,
        rows: Iterable[str] = (),
        inverted: bool = False,
    ) -> None:
        """Make a signal by a gate. Raises SpecError where it is an input or made already."""
        if name in self.inputs:
            raise self.error(
                line, f"{shown(name)} is an input (line {self.inputs[name]}): no gate may make it"
            )
        self._refuse_second_maker(name, line)
        self.gates[name] = Definition(kind, tuple(operands), tuple(rows), inverted, line)

    def finish(self) -> Spec:
        """The spec. Raises SpecError for signals that nothing makes, loops, and no inputs or outputs."""
        check_size(len(self.inputs), len(self.outputs), self.source)
        signals: dict[str, Signal] = {name: 2 * (i + 1) for i, name in enumerate(self.inputs)}
        gates: list[NetlistGate] = []
        for name in self._order():
            kind, operands, rows, inverted, line = self.gates[name]
            for operand in operands:
                if operand not in signals:
                    raise self._nothing_makes(operand, line)
            found = _gate(kind, tuple(signals[operand] for operand in operands), rows)
            if isinstance(found, NetlistGate):
                gates.append(found)
                found = 2 * (len(self.inputs) + len(gates))
            signals[name] = found ^ inverted
        for name, line in self.outputs:
            if name not in signals:
                raise self._nothing_makes(name, line)
        names = [name for name, _ in self.outputs]
        netlist = Netlist(len(self.inputs), tuple(gates), tuple(signals[name] for name in names))
        return netlist_spec(netlist, list(self.inputs), names, self.source)

    def _order(self) -> list[str]:
        try:
            return in_order({name: gate.operands for name, gate in self.gates.items()})
        except LoopError as loop:
            first = str(loop.names[0])
            path = " <- ".join(shown(str(name)) for name in loop.names[:6])
            path += " <- ..." if len(loop.names) > 6 else ""
            raise self.error(
                self.gates[first].line, f"a loop: {path}; combinational netlists have none"
            ) from None

    def _refuse_second_maker(self, name: str, line: int) -> None:
        if name in self.gates:
            raise self.error(line, f"{shown(name)} is made already (line {self.gates[name].line})")

    def _nothing_makes(self, name: str, line: int) -> SpecError:
        return self.error(line, f"nothing makes {shown(name)}: an input or a gate of that name is wanted")

    def error(self, line: int, message: str) -> SpecError:
        """A SpecError at a line (from 1)."""
        return SpecError(message, source=self.source, place=f"line {line}")


def _gate(kind: GateKind, operands: tuple[Signal, ...], rows: tuple[str, ...]) -> NetlistGate | Signal:
    """The gate, or the signal where it is a constant or one operand or its complement."""
    if kind != "cover":
        if len(operands) == 1:
            return operands[0]
        return NetlistGate(kind, operands) if operands else (TRUE if kind == "and" else FALSE)
    if not rows:
        return FALSE
    if any(row.strip("-") == "" for row in rows):
        return TRUE
    if len(rows) == 1:
        used = [(operand, digit) for operand, digit in zip(operands, rows[0], strict=True) if digit != "-"]
        return _gate("and", tuple(operand ^ (digit == "0") for operand, digit in used), ())
    return NetlistGate(kind, operands, rows)
