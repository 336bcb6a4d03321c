"""The statements that the parser makes and the interpreter runs. Positions are offsets into the text."""

from __future__ import annotations

from dataclasses import dataclass, field
from typing import TYPE_CHECKING, Literal, NamedTuple, TypeAlias

if TYPE_CHECKING:
    from revsynth.qasm.gate_table import Gate

Number: TypeAlias = bool | int | float
VersionNumber = Literal[2, 3]


class Step(NamedTuple):
    """One step of an expression in postfix order.

    what: number, name, bits (an Operand of classical bits), text (a bit string), unary, binary, call or cast.
    """

    what: str
    value: object
    position: int
    arguments: int = 0


class Expression(NamedTuple):
    """A constant expression or a condition, in postfix order: no recursion is needed to evaluate it."""

    steps: tuple[Step, ...]
    position: int


class Span(NamedTuple):
    """`start : step : stop`, both ends included; None where left out."""

    start: Expression | None
    step: Expression | None
    stop: Expression | None
    position: int


Selector: TypeAlias = Expression | Span | tuple[Expression, ...]
"""What stands in brackets: an index, a range, or a set of indices."""


class Operand(NamedTuple):
    """A named register, qubit or bit with its selectors from left to right."""

    name: str
    selectors: tuple[Selector, ...]
    position: int


class Modifier(NamedTuple):
    """`ctrl`, `negctrl`, `inv` or `pow`, with the argument where one is written."""

    name: str
    argument: Expression | None
    position: int


@dataclass
class GateCall:
    """A gate on operands. Inside gate bodies `gate` is bound when the body is checked."""

    name: str
    modifiers: tuple[Modifier, ...]
    parameters: tuple[Expression, ...]
    operands: tuple[Operand, ...]
    position: int
    gate: Gate | None = field(default=None, repr=False)


@dataclass(frozen=True)
class Measurement:
    """`measure source -> into`."""

    source: Operand
    into: Operand
    position: int


@dataclass(frozen=True)
class Reset:
    """`reset what`."""

    what: Operand
    position: int


@dataclass(frozen=True)
class Barrier:
    """`barrier operands`: checked and dropped."""

    operands: tuple[Operand, ...]
    position: int


@dataclass(frozen=True)
class Branch:
    """`if (condition) { then } else { otherwise }`."""

    condition: Expression
    then: tuple[Statement, ...]
    otherwise: tuple[Statement, ...]
    position: int


@dataclass(frozen=True)
class Loop:
    """`for type name in over { body }`."""

    name: str
    over: Span | tuple[Expression, ...]
    body: tuple[Statement, ...]
    position: int


@dataclass(frozen=True)
class Block:
    """Statements in braces."""

    body: tuple[Statement, ...]
    position: int


Statement: TypeAlias = GateCall | Measurement | Reset | Barrier | Branch | Loop | Block
"""What may stand inside blocks."""


@dataclass(frozen=True)
class Header:
    """`OPENQASM version;`."""

    version: VersionNumber
    position: int


@dataclass(frozen=True)
class Include:
    """`include "name";`."""

    name: str
    position: int


@dataclass(frozen=True)
class QubitDeclaration:
    """A register of qubits; `size` None is a single qubit."""

    name: str
    size: Expression | None
    position: int


@dataclass(frozen=True)
class BitDeclaration:
    """A register of bits, measured into or set to zero at once where `source` or `value` says so."""

    name: str
    size: Expression | None
    position: int
    source: Operand | None = None
    value: Expression | None = None


@dataclass(frozen=True)
class ConstantDeclaration:
    """`const type name = value;`."""

    type: str
    width: Expression | None
    name: str
    value: Expression
    position: int


@dataclass(frozen=True)
class Alias:
    """`let name = part ++ part ...;`."""

    name: str
    parts: tuple[Operand, ...]
    position: int


@dataclass(frozen=True)
class GateDeclaration:
    """`gate name(parameters) qubits { body }`; body None for `opaque`."""

    name: str
    parameters: tuple[str, ...]
    qubits: tuple[str, ...]
    body: tuple[Statement, ...] | None
    position: int


Declaration: TypeAlias = (
    Header | Include | QubitDeclaration | BitDeclaration | ConstantDeclaration | Alias | GateDeclaration
)
"""What may stand at the top level only."""
