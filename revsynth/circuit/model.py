"""A quantum circuit as flat arrays: what is written to OpenQASM, read from it, counted, drawn, verified.

Gate kinds are the textbook matrices. Any unitary kind takes any number of positive and negative controls,
as literals (`2 * qubit`, or `2 * qubit + 1` where the control waits for 0). Qubits are numbered through the
registers in order, index 0 of a register first; bits likewise.
"""

from __future__ import annotations

from array import array
from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from enum import IntEnum
from typing import NamedTuple, TypeAlias

import numpy as np
from numpy.typing import NDArray

Qubit: TypeAlias = int
Bit: TypeAlias = int


class Kind(IntEnum):
    """What an operation does to its target; angles are in radians.

    P(a) = diag(1, exp(ia)); RZ(a) = diag(exp(-ia/2), exp(ia/2)); RX, RY = exp(-ia/2 X), exp(-ia/2 Y);
    U(t, p, l) = [[cos(t/2), -exp(il) sin(t/2)], [exp(ip) sin(t/2), exp(i(p+l)) cos(t/2)]];
    SX = sqrt(X) = (1/2)[[1+i, 1-i], [1-i, 1+i]]; GPHASE(a) = exp(ia), with controls a controlled phase.
    """

    X = 0
    Y = 1
    Z = 2
    H = 3
    S = 4
    SDG = 5
    T = 6
    TDG = 7
    SX = 8
    SXDG = 9
    P = 10
    RX = 11
    RY = 12
    RZ = 13
    U = 14
    SWAP = 15
    GPHASE = 16
    MEASURE = 17
    RESET = 18


TARGETS: dict[Kind, int] = dict.fromkeys(Kind, 1) | {Kind.SWAP: 2, Kind.GPHASE: 0}
"""How many target qubits a kind has."""
ANGLES: dict[Kind, int] = dict.fromkeys(Kind, 0) | {
    Kind.P: 1,
    Kind.RX: 1,
    Kind.RY: 1,
    Kind.RZ: 1,
    Kind.U: 3,
    Kind.GPHASE: 1,
}
"""How many angles a kind has."""


class Guard(NamedTuple):
    """One clause of an `if`: whether all `bits` hold is `expected`. Literals: 2 * bit, + 1 waits for 0."""

    bits: tuple[int, ...]
    expected: bool = True


Condition: TypeAlias = tuple[Guard, ...]
"""All guards must hold; the empty condition is no condition."""


class Op(NamedTuple):
    """One operation. `condition` indexes `Circuit.conditions` (-1: always); `bit` holds a measured result."""

    kind: Kind
    controls: tuple[int, ...]
    targets: tuple[Qubit, ...]
    angles: tuple[float, ...] = ()
    condition: int = -1
    bit: Bit = -1

    @property
    def qubits(self) -> tuple[Qubit, ...]:
        """Every qubit touched, controls first."""
        return (*(control >> 1 for control in self.controls), *self.targets)


@dataclass(frozen=True)
class Register:
    """A register of `size` qubits (or bits) starting at number `start`."""

    name: str
    size: int
    start: int

    @property
    def members(self) -> range:
        """The qubit (or bit) numbers, index 0 of the register first."""
        return range(self.start, self.start + self.size)


class Circuit:
    """An immutable circuit in flat arrays.

    kind: uint8 (g,); offset: int64 (g+1,); operand: int32 (total,), control literals first, then targets;
    condition: int32 (g,), -1 for none; bit: int32 (g,), -1 but for measurements; angles: by operation index.
    """

    __slots__ = (
        "angles",
        "bit",
        "bit_registers",
        "condition",
        "conditions",
        "kind",
        "offset",
        "operand",
        "registers",
    )

    def __init__(
        self,
        registers: Sequence[Register],
        bit_registers: Sequence[Register],
        kind: NDArray[np.uint8],
        offset: NDArray[np.int64],
        operand: NDArray[np.int32],
        condition: NDArray[np.int32],
        bit: NDArray[np.int32],
        angles: dict[int, tuple[float, ...]],
        conditions: Sequence[Condition],
    ) -> None:
        self.registers = tuple(registers)
        self.bit_registers = tuple(bit_registers)
        self.kind = kind
        self.offset = offset
        self.operand = operand
        self.condition = condition
        self.bit = bit
        self.angles = angles
        self.conditions = tuple(conditions)

    @property
    def qubits(self) -> int:
        """Number of qubits over all registers."""
        return sum(register.size for register in self.registers)

    @property
    def bits(self) -> int:
        """Number of classical bits over all bit registers."""
        return sum(register.size for register in self.bit_registers)

    def register(self, name: str) -> Register | None:
        """The qubit register of that name, or None."""
        return next((register for register in self.registers if register.name == name), None)

    def __len__(self) -> int:
        return len(self.kind)

    def __iter__(self) -> Iterator[Op]:
        operand = self.operand.tolist()
        offset = self.offset.tolist()
        condition = self.condition.tolist()
        bit = self.bit.tolist()
        for index, code in enumerate(self.kind.tolist()):
            kind = _KINDS[code]
            end = offset[index + 1]
            split = end - _TARGET_COUNT[code]
            yield Op(
                kind,
                tuple(operand[offset[index] : split]),
                tuple(operand[split:end]),
                self.angles.get(index, ()),
                condition[index],
                bit[index],
            )

    def __eq__(self, other: object) -> bool:
        """Gate for gate the same, registers and conditions included."""
        if not isinstance(other, Circuit):
            return NotImplemented
        return (
            self.registers == other.registers
            and self.bit_registers == other.bit_registers
            and self.angles == other.angles
            and self._resolved_conditions() == other._resolved_conditions()
            and all(
                np.array_equal(getattr(self, name), getattr(other, name))
                for name in ("kind", "offset", "operand", "bit")
            )
        )

    __hash__ = None  # type: ignore[assignment]

    def _resolved_conditions(self) -> dict[int, Condition]:
        return {
            int(index): self.conditions[int(self.condition[index])]
            for index in np.flatnonzero(self.condition >= 0)
        }

    def __repr__(self) -> str:
        return f"<Circuit of {len(self)} operations on {self.qubits} qubits>"

    def _repr_svg_(self) -> str | None:
        """The drawing that a notebook shows, if it is not too large; else the text form stands for it."""
        from revsynth.report.circuit_svg import MOST_DRAWN, draw_svg

        return draw_svg(self) if len(self) <= MOST_DRAWN else None


_KINDS = tuple(Kind)
_TARGET_COUNT = tuple(TARGETS[kind] for kind in Kind)


class CircuitBuilder:
    """Collects operations; `build()` freezes them. Qubits are checked for range and repetition."""

    def __init__(self) -> None:
        self._registers: list[Register] = []
        self._bit_registers: list[Register] = []
        self._kind = array("B")
        self._operand = array("i")
        self._offset = array("q", [0])
        self._condition = array("i")
        self._bit = array("i")
        self._angles: dict[int, tuple[float, ...]] = {}
        self._conditions: dict[Condition, int] = {}
        self.qubits = 0
        self.bits = 0

    def add_register(self, name: str, size: int) -> Register:
        """Append a qubit register."""
        register = Register(name, size, self.qubits)
        self._registers.append(register)
        self.qubits += size
        return register

    def add_bits(self, name: str, size: int) -> Register:
        """Append a register of classical bits."""
        register = Register(name, size, self.bits)
        self._bit_registers.append(register)
        self.bits += size
        return register

    def __len__(self) -> int:
        return len(self._kind)

    def add(
        self,
        kind: Kind,
        targets: Sequence[Qubit],
        controls: Sequence[int] = (),
        angles: tuple[float, ...] = (),
        condition: Condition = (),
        bit: Bit = -1,
    ) -> None:
        """Append one operation; raises ValueError for a qubit out of range or used twice."""
        touched = [*(control >> 1 for control in controls), *targets]
        if len(set(touched)) != len(touched) or any(not 0 <= qubit < self.qubits for qubit in touched):
            raise ValueError(f"{kind.name} on qubits {touched} of {self.qubits}: out of range or repeated")
        if len(targets) != _TARGET_COUNT[kind]:
            raise ValueError(f"{kind.name} takes {_TARGET_COUNT[kind]} targets, not {len(targets)}")
        if angles:
            self._angles[len(self._kind)] = angles
        self._kind.append(kind)
        self._operand.extend(controls)
        self._operand.extend(targets)
        self._offset.append(len(self._operand))
        self._condition.append(
            self._conditions.setdefault(condition, len(self._conditions)) if condition else -1
        )
        self._bit.append(bit)

    def x(self, target: Qubit, controls: Sequence[int] = (), condition: Condition = ()) -> None:
        """NOT on `target` where all control literals hold."""
        self.add(Kind.X, (target,), controls, condition=condition)

    def cx(self, control: Qubit, target: Qubit, condition: Condition = ()) -> None:
        """CNOT with a positive control."""
        self.add(Kind.X, (target,), (2 * control,), condition=condition)

    def z(self, target: Qubit, controls: Sequence[int] = (), condition: Condition = ()) -> None:
        """Z on `target` where all control literals hold."""
        self.add(Kind.Z, (target,), controls, condition=condition)

    def h(self, target: Qubit, condition: Condition = ()) -> None:
        """Hadamard."""
        self.add(Kind.H, (target,), condition=condition)

    def s(self, target: Qubit, inverse: bool = False) -> None:
        """S = diag(1, i), or its inverse."""
        self.add(Kind.SDG if inverse else Kind.S, (target,))

    def t(self, target: Qubit, inverse: bool = False) -> None:
        """T = diag(1, exp(i pi/4)), or its inverse."""
        self.add(Kind.TDG if inverse else Kind.T, (target,))

    def measure(self, target: Qubit, bit: Bit) -> None:
        """Measure in the Z basis into classical bit `bit`."""
        self.add(Kind.MEASURE, (target,), bit=bit)

    def build(self) -> Circuit:
        """Freeze what has been collected."""
        return Circuit(
            self._registers,
            self._bit_registers,
            np.frombuffer(self._kind, dtype=np.uint8).copy() if self._kind else np.zeros(0, np.uint8),
            np.array(self._offset, dtype=np.int64),
            np.array(self._operand, dtype=np.int32),
            np.array(self._condition, dtype=np.int32),
            np.array(self._bit, dtype=np.int32),
            dict(self._angles),
            list(self._conditions),
        )
