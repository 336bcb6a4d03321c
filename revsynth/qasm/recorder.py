"""Collecting operations: each distinct one is kept once, the sequence as numbers, arrays at the end.

A file repeats its lines far more often than it invents new ones, so a million gates cost a million small
integers, and the flat arrays of the circuit model come from a few numpy gathers.
"""

from __future__ import annotations

from typing import TypeAlias

import numpy as np
from numpy.typing import NDArray

from revsynth.circuit.model import Circuit, Condition, Kind, Register

OpNumber: TypeAlias = int


class Recorder:
    """Registers and the sequence of operations of the circuit that is being read."""

    def __init__(self) -> None:
        self.sequence: list[OpNumber] = []
        self.registers: list[Register] = []
        self.bit_registers: list[Register] = []
        self.qubits = 0
        self.bits = 0
        self._known: dict[tuple[object, ...], OpNumber] = {}
        self._kind: list[Kind] = []
        self._operands: list[tuple[int, ...]] = []
        self._angles: list[tuple[float, ...]] = []
        self._condition: list[Condition] = []
        self._bit: list[int] = []

    def add_register(self, name: str, size: int) -> range:
        """Append a qubit register; gives its qubit numbers."""
        register = Register(name, size, self.qubits)
        self.registers.append(register)
        self.qubits += size
        return register.members

    def add_bits(self, name: str, size: int) -> range:
        """Append a register of classical bits; gives their numbers."""
        register = Register(name, size, self.bits)
        self.bit_registers.append(register)
        self.bits += size
        return register.members

    def number(
        self,
        kind: Kind,
        operands: tuple[int, ...],
        angles: tuple[float, ...] = (),
        condition: Condition = (),
        bit: int = -1,
    ) -> OpNumber:
        """The number of an operation (control literals first, then targets), for `sequence`."""
        key = (kind, operands, angles, condition, bit)
        found = self._known.get(key)
        if found is None:
            found = len(self._kind)
            self._known[key] = found
            self._kind.append(kind)
            self._operands.append(operands)
            self._angles.append(angles)
            self._condition.append(condition)
            self._bit.append(bit)
        return found

    def circuit(self) -> Circuit:
        """What has been recorded, as flat arrays."""
        order = np.array(self.sequence, dtype=np.int64)
        lengths = np.array([len(entry) for entry in self._operands], dtype=np.int64)
        flat = np.array([item for entry in self._operands for item in entry], dtype=np.int32)
        starts = np.concatenate(([0], np.cumsum(lengths)))[:-1].astype(np.int64)
        lengths_here = lengths[order]
        offset = np.concatenate(([0], np.cumsum(lengths_here))).astype(np.int64)
        gather = np.repeat(starts[order] - offset[:-1], lengths_here) + np.arange(offset[-1])
        numbers, conditions = self._number_conditions(order)
        return Circuit(
            self.registers,
            self.bit_registers,
            np.array(self._kind, dtype=np.uint8)[order],
            offset,
            flat[gather],
            numbers[order],
            np.array(self._bit, dtype=np.int32)[order],
            self._angles_by_index(order),
            conditions,
        )

    def _angles_by_index(self, order: NDArray[np.int64]) -> dict[int, tuple[float, ...]]:
        turned = np.array([bool(entry) for entry in self._angles], dtype=bool)
        places = np.flatnonzero(turned[order]) if len(order) else order
        return {
            index: self._angles[number]
            for index, number in zip(places.tolist(), order[places].tolist(), strict=True)
        }

    def _number_conditions(self, order: NDArray[np.int64]) -> tuple[NDArray[np.int32], list[Condition]]:
        """For each distinct operation the index of its condition (-1 for none); conditions by first use."""
        numbers = np.full(len(self._kind), -1, dtype=np.int32)
        found: dict[Condition, int] = {}
        for entry in dict.fromkeys(self.sequence) if any(self._condition) else ():
            condition = self._condition[entry]
            if condition:
                numbers[entry] = found.setdefault(condition, len(found))
        return numbers, list(found)
