"""How much a short file may ask for: limits that give an error long before time or memory runs out."""

from __future__ import annotations

from revsynth.qasm.lexer import Source

MAX_QUBITS = 1 << 20
"""Qubits of a file, and bits, all registers together."""
MAX_EXPANDED = 4_000_000
"""Operations (counted with their controls) that gate definitions, powers, loops and whole registers add."""
MAX_ITERATIONS = 200_000
"""Rounds of all loops together."""


class Budget:
    """What is left of the limits for one file."""

    def __init__(self, source: Source) -> None:
        self._source = source
        self._expanded = 0
        self._iterations = 0
        self._qubits = 0
        self._bits = 0

    def operations(self, count: int, position: int) -> None:
        """Charge operations that were not written out; raises CircuitFileError at the limit."""
        self._expanded += count
        if self._expanded > MAX_EXPANDED:
            raise self._source.error(
                f"definitions, powers, loops and registers expand to more than {MAX_EXPANDED:,} operations",
                position,
            )

    def iteration(self, position: int) -> None:
        """Charge one round of a loop; raises CircuitFileError at the limit."""
        self._iterations += 1
        if self._iterations > MAX_ITERATIONS:
            raise self._source.error(f"the loops run more than {MAX_ITERATIONS:,} rounds", position)

    def qubits(self, count: int, position: int) -> None:
        """Charge declared qubits; raises CircuitFileError at the limit."""
        self._qubits += count
        if self._qubits > MAX_QUBITS:
            raise self._source.error(f"more than {MAX_QUBITS:,} qubits are declared", position)

    def bits(self, count: int, position: int) -> None:
        """Charge declared bits; raises CircuitFileError at the limit."""
        self._bits += count
        if self._bits > MAX_QUBITS:
            raise self._source.error(f"more than {MAX_QUBITS:,} bits are declared", position)
