"""What each oracle form demands of every qubit and phase, for a set of inputs at once.

The inputs of a run are numbered by the combined index in the low n bits; above them come the bits of
outputs and lent qubits whose starting value is enumerated. A *lane* is one such number, and the last lane of
every set is the reference: the first input at which everything is demanded. Lanes at which nothing is
demanded (free inputs of `inplace` and `embedded` blocks) run the reference input instead.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from functools import lru_cache
from typing import Protocol

import numpy as np
from numpy.typing import NDArray

from revsynth.circuit.model import Qubit
from revsynth.logic.function import Function
from revsynth.logic.truth_table import Column as PackedColumn
from revsynth.logic.truth_table import first_inputs
from revsynth.verification.classical import Column
from revsynth.verification.evidence import FaultKind
from revsynth.verification.matching import Roles


@dataclass(frozen=True)
class Wanted:
    """In the lanes of `care` the qubit must end in `value`."""

    qubit: Qubit
    kind: FaultKind
    value: Column
    care: Column


@dataclass(frozen=True)
class Free:
    """In the lanes of `lanes` the qubit's end XOR `base` is free, but is to depend on the input alone."""

    qubit: Qubit
    base: Column
    lanes: Column


@dataclass(frozen=True)
class Chunk:
    """The demands on one set of lanes, the reference lane last.

    sign: 1 where the phase must be -1, in the lanes of sign_care; elsewhere it may be 1 or -1.
    numbers: the run number of each lane but the reference (a range, or an array of them).
    """

    start: list[Column]
    wanted: list[Wanted]
    free: list[Free]
    sign: Column
    sign_care: Column
    ones: Column
    active: Column
    numbers: range | NDArray[np.int64]

    @property
    def lanes(self) -> int:
        """Lanes without the reference."""
        return len(self.numbers)


class Demand:
    """The demands of one oracle form on one circuit.

    enumerated: outputs of a `bit` block and lent qubits that start in both values; others of them start in 0.
    """

    def __init__(
        self, roles: Roles, function: Function, qubits: int, enumerated: Sequence[Qubit] = ()
    ) -> None:
        self.roles = roles
        self.function = function
        self.qubits = qubits
        self.enumerated = tuple(enumerated)
        self.inputs = function.inputs
        self.bits = function.inputs + len(self.enumerated)
        self.everywhere = roles.oracle not in ("inplace", "embedded")
        self._active = self._active_inputs()
        self.reference = self._reference()

    def _active_inputs(self) -> PackedColumn | None:
        """The inputs at which something is demanded, None for all."""
        if self.everywhere or self.function.is_complete:
            return None
        active = np.zeros_like(self.function.domain)
        for row in self.function.care:
            active |= row
        return active

    def _reference(self) -> int | None:
        if self.roles.oracle == "phase":
            fixed = first_inputs(self.function.care[0], 1)
            return fixed[0] if fixed else 0
        if self._active is None:
            return 0
        first = first_inputs(self._active, 1)
        return first[0] if first else None

    def active_count(self) -> int:
        """How many inputs something is demanded of."""
        if self._active is None:
            return 1 << self.inputs
        return int(np.bitwise_count(self._active).sum())

    def block(self, base: int, bits: int) -> Chunk:
        """The lanes base ... base + 2**bits - 1 (base a multiple of 2**bits)."""
        size = 1 << bits
        tables = _Block(base, bits, self.inputs)
        variables = [
            _variable(v, bits) if v < bits else ((1 << size) - 1) * (base >> v & 1) for v in range(self.bits)
        ]
        return self._chunk(range(base, base + size), variables, tables)

    def chosen(self, numbers: Sequence[int]) -> Chunk:
        """Any run numbers as lanes."""
        array = np.asarray(numbers, dtype=np.int64)
        variables = [_packed(array >> v & 1) for v in range(self.bits)]
        return self._chunk(array, variables, _Chosen(array & ((1 << self.inputs) - 1)))

    def _chunk(
        self, numbers: range | NDArray[np.int64], variables: Sequence[Column], tables: _Tables
    ) -> Chunk:
        reference = self.reference
        assert reference is not None
        lanes = len(numbers)
        every = (1 << lanes) - 1
        ones = every | (1 << lanes)
        active = every if self._active is None else tables.column(self._active)

        def with_reference(column: Column, at_reference: int) -> Column:
            return column | (at_reference << lanes)

        def table(row: PackedColumn) -> Column:
            return with_reference(tables.column(row), _entry(row, reference))

        columns = []
        for number, variable in enumerate(variables):
            bit = reference >> number & 1
            filled = variable if active == every else (variable & active) | (bit * (every ^ active))
            columns.append(with_reference(filled, bit))
        active = with_reference(active, 1)
        roles = self.roles
        start = [0] * self.qubits
        for qubit, value in roles.preset:
            start[qubit] = ones * value
        for qubit, column in zip((*roles.inputs, *self.enumerated), columns, strict=True):
            start[qubit] = column
        values = [table(row) for row in self.function.values]
        cares = [table(row) for row in self.function.care]
        wanted, free = self._ends(start, values, cares, ones, active)
        phase = roles.oracle == "phase"
        return Chunk(
            start,
            wanted,
            free,
            sign=values[0] if phase else 0,
            sign_care=cares[0] if phase else active,
            ones=ones,
            active=active,
            numbers=numbers,
        )

    def _ends(
        self,
        start: Sequence[Column],
        values: Sequence[Column],
        cares: Sequence[Column],
        ones: Column,
        active: Column,
    ) -> tuple[list[Wanted], list[Free]]:
        """What every qubit must end in, in the order in which faults are reported."""
        roles = self.roles
        wanted: list[Wanted] = []
        free: list[Free] = []
        for number, qubit in enumerate(roles.outputs):
            base = start[qubit] if roles.oracle == "bit" else 0
            wanted.append(Wanted(qubit, "output", values[number] ^ base, cares[number]))
            if self.everywhere and cares[number] != ones:
                free.append(Free(qubit, base, ones ^ cares[number]))
            elif not self.everywhere and cares[number] != active:
                free.append(Free(qubit, 0, active & ~cares[number]))
        if roles.oracle not in ("inplace", "embedded"):
            wanted.extend(Wanted(qubit, "input", start[qubit], ones) for qubit in roles.inputs)
        loose = {*roles.outputs, *roles.inputs, *roles.kept, *roles.lent, *roles.leftover}
        scratch = (qubit for qubit in range(self.qubits) if qubit not in loose)
        wanted.extend(Wanted(qubit, "scratch", start[qubit], active) for qubit in (*scratch, *roles.lent))
        free.extend(Free(qubit, 0, active) for qubit in (*roles.kept, *roles.leftover))
        return wanted, free


class _Tables(Protocol):
    """Reads packed tables of the function at the lanes of a chunk."""

    def column(self, table: PackedColumn) -> Column: ...


class _Block:
    """Lanes in a row."""

    def __init__(self, base: int, bits: int, inputs: int) -> None:
        self._bits = min(bits, inputs)
        self._first = base & ((1 << inputs) - 1)
        self._copies = _repeated(self._bits, bits)

    def column(self, table: PackedColumn) -> Column:
        if self._bits >= 6:
            words = table[self._first >> 6 : (self._first + (1 << self._bits)) >> 6]
            column = int.from_bytes(words.astype("<u8").tobytes(), "little")
        else:
            column = (int(table[self._first >> 6]) >> (self._first & 63)) & ((1 << (1 << self._bits)) - 1)
        return column * self._copies


class _Chosen:
    """Any lanes."""

    def __init__(self, inputs: NDArray[np.int64]) -> None:
        self._word = inputs >> 6
        self._bit = (inputs & 63).astype(np.uint64)

    def column(self, table: PackedColumn) -> Column:
        return _packed(table[self._word] >> self._bit & np.uint64(1))


def _entry(table: PackedColumn, index: int) -> int:
    return int(table[index >> 6]) >> (index & 63) & 1


def _packed(bits: NDArray[np.integer]) -> Column:
    packed = np.packbits(bits.astype(np.uint8), bitorder="little")
    return int.from_bytes(packed.tobytes(), "little")


@lru_cache(maxsize=64)
def _repeated(small: int, large: int) -> Column:
    """Times this, a column of 2**small lanes becomes one of 2**large lanes, repeated."""
    return ((1 << (1 << large)) - 1) // ((1 << (1 << small)) - 1)


@lru_cache(maxsize=256)
def _variable(number: int, bits: int) -> Column:
    """The column over 2**bits lanes that is bit `number` of the lane."""
    half = 1 << number
    return (((1 << half) - 1) << half) * _repeated(number + 1, bits)
