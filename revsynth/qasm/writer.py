"""Writing circuits as OpenQASM 3.0, OpenQASM 2.0 and `plain` OpenQASM 2.

In OpenQASM 3 controls without a gate of their own are modifiers, one `negctrl @` each and `ctrl(n) @` for
n positive ones in a row, in the order of the operands, which come controls first and target last.
"""

from __future__ import annotations

import math
import re
from collections.abc import Sequence
from fractions import Fraction
from functools import lru_cache

from revsynth.circuit.model import TARGETS, Circuit, Condition, Kind
from revsynth.errors import UsageError
from revsynth.one_line import one_line
from revsynth.options import Format
from revsynth.qasm.dialects import NAMES, GateNames, misfit, whole_register
from revsynth.qasm.formula import canonical
from revsynth.qasm.vocabulary import KEYWORDS_2, KEYWORDS_3, QELIB1, STDGATES

_NAME_2 = re.compile(r"[a-z][A-Za-z0-9_]*")
_NAME_3 = re.compile(r"[A-Za-z_][A-Za-z0-9_]*")
_SMALL = 1024
_FINE = 1 << 32


def write(circuit: Circuit, *, format: Format = "openqasm3", header: Sequence[str] = ()) -> str:
    """The circuit as text that ends in a newline; the same circuit always gives the same text.

    Args:
        circuit: as `prepare` gives it for this format.
        header: comment lines to open with, made printable whatever they hold; `plain` has none.

    Raises:
        UsageError: for what the format cannot hold (see `prepare`), and for register names it reserves.
    """
    problem = misfit(circuit, format)
    if problem is not None:
        raise UsageError(problem)
    _check_registers(circuit, format)
    lines: list[str] = []
    if format == "openqasm3":
        lines += ["OPENQASM 3.0;", 'include "stdgates.inc";']
        lines += [f"qubit[{register.size}] {register.name};" for register in circuit.registers]
        lines += [f"bit[{register.size}] {register.name};" for register in circuit.bit_registers]
    else:
        lines += ["OPENQASM 2.0;", 'include "qelib1.inc";']
        if format == "plain":
            lines.append(f"qreg q[{circuit.qubits}];")
        else:
            lines += [f"qreg {register.name}[{register.size}];" for register in circuit.registers]
            lines += [f"creg {register.name}[{register.size}];" for register in circuit.bit_registers]
    lines += _Lines(circuit, format).all()
    lines.append("")
    return with_header("\n".join(lines), header, format=format)


def with_header(text: str, header: Sequence[str], *, format: Format) -> str:
    """A text that `write` gave without a header, with one: what `write` gives at once."""
    opening = [] if format == "plain" else [comment_line(line) + "\n" for line in header]
    return "".join([*opening, text])


def comment_line(text: str) -> str:
    """One comment line of printable characters: white space becomes blanks, what cannot be shown `?`."""
    return f"// {one_line(text)}".rstrip()


def _check_registers(circuit: Circuit, format: Format) -> None:
    if not circuit.registers or any(register.size < 1 for register in circuit.registers):
        raise UsageError("a circuit file needs at least one qubit, and no register may be empty")
    if format == "plain":
        return
    if any(register.size < 1 for register in circuit.bit_registers):
        raise UsageError("no register of bits may be empty")
    pattern, words = (
        (_NAME_3, KEYWORDS_3 | STDGATES) if format == "openqasm3" else (_NAME_2, KEYWORDS_2 | QELIB1)
    )
    seen: set[str] = {"U", "pi", "tau", "euler"}
    for register in (*circuit.registers, *circuit.bit_registers):
        if pattern.fullmatch(register.name) is None or register.name in words or register.name in seen:
            raise UsageError(f"format '{format}' cannot have a register called {register.name!r} here")
        seen.add(register.name)


class _Lines:
    """Makes the operation lines; equal operations share one."""

    def __init__(self, circuit: Circuit, format: Format) -> None:
        self._circuit = circuit
        self._format = format
        self._names: GateNames = NAMES[format]
        if format == "plain":
            self._qubits = [f"q[{index}]" for index in range(circuit.qubits)]
        else:
            self._qubits = [
                f"{register.name}[{index}]"
                for register in circuit.registers
                for index in range(register.size)
            ]
        self._bits = [
            f"{register.name}[{index}]"
            for register in circuit.bit_registers
            for index in range(register.size)
        ]
        self._prefixes = [self._prefix(condition) for condition in circuit.conditions]

    def all(self) -> list[str]:
        """One line an operation."""
        circuit = self._circuit
        operand = circuit.operand.tolist()
        offset = circuit.offset.tolist()
        condition = circuit.condition.tolist()
        bit = circuit.bit.tolist()
        angles = circuit.angles
        known: dict[tuple[object, ...], str] = {}
        lines: list[str] = []
        start = 0
        for index, kind in enumerate(circuit.kind.tolist()):
            end = offset[index + 1]
            operands = tuple(operand[start:end])
            key = (kind, operands, condition[index], bit[index], angles.get(index))
            line = known.get(key)
            if line is None:
                line = self._line(Kind(kind), operands, angles.get(index, ()), condition[index], bit[index])
                known[key] = line
            lines.append(line)
            start = end
        return lines

    def _line(
        self, kind: Kind, operands: tuple[int, ...], angles: tuple[float, ...], condition: int, bit: int
    ) -> str:
        text = self._statement(kind, operands, angles, bit)
        if condition < 0 or not self._circuit.conditions[condition]:
            return text
        prefix = self._prefixes[condition]
        return f"{prefix} {{ {text} }}" if self._format == "openqasm3" else f"{prefix} {text}"

    def _statement(self, kind: Kind, operands: tuple[int, ...], angles: tuple[float, ...], bit: int) -> str:
        if kind is Kind.MEASURE:
            source, into = self._qubits[operands[0]], self._bits[bit]
            if self._format == "openqasm3":
                return f"{into} = measure {source};"
            return f"measure {source} -> {into};"
        if kind is Kind.RESET:
            return f"reset {self._qubits[operands[0]]};"
        split = len(operands) - TARGETS[kind]
        controls, targets = operands[:split], operands[split:]
        where = [self._qubits[control >> 1] for control in controls]
        where += [self._qubits[target] for target in targets]
        head = self._head(kind, [control & 1 for control in controls], angles)
        return f"{head} {', '.join(where)};" if where else f"{head};"

    def _head(self, kind: Kind, polarities: list[int], angles: tuple[float, ...]) -> str:
        """Modifiers, name and parameters; `cu` stands in where U has a positive control next to it.

        Texts of the standard differ by a phase of U that a control would make visible, and agree on cu.
        """
        count = len(polarities)
        if any(polarities) or (kind, count) not in self._names:
            count = 1 if kind is Kind.U and count and not polarities[-1] else 0
        outer = polarities[: len(polarities) - count]
        if kind is Kind.U and count:
            angles = (*angles, 0.0)
        parameters = f"({', '.join(angle_text(angle) for angle in angles)})" if angles else ""
        return modifiers(outer) + self._names[kind, count] + parameters

    def _prefix(self, condition: Condition) -> str:
        """`if (...)` for a condition in the reader's form."""
        if canonical(condition) != condition:
            raise UsageError("a condition is not in the form that files hold: prepare the circuit first")
        if self._format != "openqasm3":
            found = whole_register(self._circuit, condition)
            return f"if ({found[0]} == {found[1]})" if found else ""
        parts: list[str] = []
        for guard in condition:
            bits = [("!" if entry & 1 else "") + self._bits[entry >> 1] for entry in guard.bits]
            parts.extend(bits if guard.expected else [f"!({' && '.join(bits)})"])
        return f"if ({' && '.join(parts)})"


def modifiers(polarities: Sequence[int]) -> str:
    """`ctrl @`, `ctrl(n) @` and `negctrl @` for controls in this order (0: fires at 1)."""
    parts: list[str] = []
    run = 0
    for polarity in (*polarities, 1):
        if polarity == 0:
            run += 1
            continue
        if run:
            parts.append("ctrl @ " if run == 1 else f"ctrl({run}) @ ")
            run = 0
        parts.append("negctrl @ ")
    return "".join(parts[:-1])


@lru_cache(maxsize=65536)
def angle_text(angle: float) -> str:
    """An angle as a fraction of pi where that gives exactly this number again, else in decimals.

    Raises:
        UsageError: for an angle that is not finite.
    """
    if not math.isfinite(angle):
        raise UsageError(f"an angle of {angle} cannot be written")
    if angle == 0:
        return "0"
    for bound in (_SMALL, _FINE):
        part = Fraction(angle / math.pi).limit_denominator(bound)
        top, bottom = part.numerator, part.denominator
        if bound == _FINE and bottom & (bottom - 1):
            continue
        if top and abs(top) < 1 << 30 and top * math.pi / bottom == angle:
            sign = "-" if top < 0 else ""
            times = "" if abs(top) == 1 else f"{abs(top)}*"
            return f"{sign}{times}pi" + (f"/{bottom}" if bottom != 1 else "")
    text = repr(angle)
    mantissa, mark, exponent = text.partition("e")
    return text if not mark or "." in mantissa else f"{mantissa}.0e{exponent}"
