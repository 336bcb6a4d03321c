"""A sheet on which constructions write their gates, and the template that is left when they have.

A template uses local qubit numbers: controls first, then the target, then clean and borrowed scratch. It may
hold *composite* gates on three qubits; `composites` says what they stand for in each gate set.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from enum import IntEnum

import numpy as np
from numpy.typing import NDArray

from revsynth.circuit.model import Kind


class Tip(IntEnum):
    """What a construction does to its target where all controls hold.

    FROM_ZERO and TO_ZERO are NOTs whose target is known to be 0 before, or 0 after: they have cheaper forms.
    """

    NOT = 0
    Z = 1
    FROM_ZERO = 2
    TO_ZERO = 3


class Composite(IntEnum):
    """Three-qubit gates, operands (a, b, target); numbered above every `Kind`.

    RELATIVE: a NOT with two controls up to a phase that depends on the three qubits alone; its own inverse.
    AND: the product a b written on a target in 0; ERASE: the same target brought back to 0.
    OPEN, CLOSE: two that together make RELATIVE(d, b, target) where a is changed by d in between.
    HALF_NOT, HALF_Z: with the same-named *_BACK they make the exact gate with controls d and b, where a is
    changed by d in between.
    """

    RELATIVE = 32
    AND = 33
    ERASE = 34
    OPEN = 35
    CLOSE = 36
    HALF_NOT = 37
    HALF_NOT_BACK = 38
    HALF_Z = 39
    HALF_Z_BACK = 40


@dataclass(frozen=True)
class Template:
    """Gates on local qubits, in flat arrays.

    kind:  uint8 (g,), a Kind or Composite; count: int64 (g,), operands of each gate; local: int64 (total,),
    local qubit of each operand; scale: int32 (total,), 2 for a control (its literal), 1 for a target;
    condition, bit: int32 (g,), local measured bits, -1 for none; bits: how many are measured.
    """

    kind: NDArray[np.uint8]
    count: NDArray[np.int64]
    local: NDArray[np.int64]
    scale: NDArray[np.int32]
    condition: NDArray[np.int32]
    bit: NDArray[np.int32]
    bits: int

    def __len__(self) -> int:
        return len(self.kind)


class Draft:
    """Collects gates on local qubits; controls wait for 1."""

    def __init__(self) -> None:
        self.gates: list[tuple[int, tuple[int, ...], int, int]] = []
        self.bits = 0

    def put(self, kind: int, qubits: Sequence[int], condition: int = -1, bit: int = -1) -> None:
        """One gate: all qubits but the last are controls."""
        self.gates.append((int(kind), tuple(qubits), condition, bit))

    def x(self, target: int, condition: int = -1) -> None:
        """NOT."""
        self.put(Kind.X, (target,), condition)

    def h(self, target: int) -> None:
        """Hadamard."""
        self.put(Kind.H, (target,))

    def t(self, target: int, inverse: bool = False) -> None:
        """T or its inverse."""
        self.put(Kind.TDG if inverse else Kind.T, (target,))

    def s(self, target: int, inverse: bool = False) -> None:
        """S or its inverse."""
        self.put(Kind.SDG if inverse else Kind.S, (target,))

    def cx(self, control: int, target: int) -> None:
        """CNOT."""
        self.put(Kind.X, (control, target))

    def cz(self, control: int, target: int, condition: int = -1) -> None:
        """Controlled Z."""
        self.put(Kind.Z, (control, target), condition)

    def measure(self, target: int) -> int:
        """Measure in the Z basis; returns the local number of the bit."""
        self.put(Kind.MEASURE, (target,), bit=self.bits)
        self.bits += 1
        return self.bits - 1

    def relative(self, a: int, b: int, target: int) -> None:
        """A NOT with two controls up to a relative phase: for use in pairs."""
        self.put(Composite.RELATIVE, (a, b, target))

    def compute_and(self, a: int, b: int, target: int) -> None:
        """target := a b, exactly, on a target in 0."""
        self.put(Composite.AND, (a, b, target))

    def erase_and(self, a: int, b: int, target: int) -> None:
        """A target that holds a b goes back to 0."""
        self.put(Composite.ERASE, (a, b, target))

    def open_pair(self, a: int, b: int, target: int) -> None:
        """The first of two that change the target by b times the change of a in between, up to a phase."""
        self.put(Composite.OPEN, (a, b, target))

    def close_pair(self, a: int, b: int, target: int) -> None:
        """The second of the two."""
        self.put(Composite.CLOSE, (a, b, target))

    def half(self, tip: Tip, line: int, b: int, target: int, inverse: bool) -> None:
        """One of two that do the tip with the controls b and the change of `line` in between, exactly."""
        first, back = (
            (Composite.HALF_Z, Composite.HALF_Z_BACK)
            if tip is Tip.Z
            else (Composite.HALF_NOT, Composite.HALF_NOT_BACK)
        )
        self.put(back if inverse else first, (line, b, target))

    def once(self, tip: Tip, control: int, target: int) -> None:
        """The tip with one control."""
        self.put(Kind.Z if tip is Tip.Z else Kind.X, (control, target))

    def twice(self, tip: Tip, a: int, b: int, target: int) -> None:
        """The tip with two controls."""
        kinds: dict[Tip, int] = {
            Tip.NOT: Kind.X,
            Tip.Z: Kind.Z,
            Tip.FROM_ZERO: Composite.AND,
            Tip.TO_ZERO: Composite.ERASE,
        }
        self.put(kinds[tip], (a, b, target))

    def template(self) -> Template:
        """Freeze."""
        local = [qubit for _, qubits, _, _ in self.gates for qubit in qubits]
        scale = [2 if i < len(q) - 1 else 1 for _, q, _, _ in self.gates for i in range(len(q))]
        return Template(
            kind=np.array([gate[0] for gate in self.gates], dtype=np.uint8),
            count=np.array([len(gate[1]) for gate in self.gates], dtype=np.int64),
            local=np.array(local, dtype=np.int64),
            scale=np.array(scale, dtype=np.int32),
            condition=np.array([gate[2] for gate in self.gates], dtype=np.int32),
            bit=np.array([gate[3] for gate in self.gates], dtype=np.int32),
            bits=self.bits,
        )
