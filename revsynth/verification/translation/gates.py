"""What a translation is written into: something that makes ANDs and XORs of literals."""

from __future__ import annotations

from collections.abc import Iterable
from typing import Protocol, TypeAlias

Bit: TypeAlias = int
"""A literal: its complement is the number with the lowest bit flipped."""

FALSE: Bit = 0
TRUE: Bit = 1


class Gates(Protocol):
    """A builder of gates; constants are the literals FALSE and TRUE."""

    def both(self, a: Bit, b: Bit) -> Bit:
        """a AND b."""

    def differ(self, a: Bit, b: Bit) -> Bit:
        """a XOR b."""


class TooLargeToTranslateError(Exception):
    """The translation would be too large; the text says where."""


def either(gates: Gates, a: Bit, b: Bit) -> Bit:
    """a OR b."""
    return gates.both(a ^ 1, b ^ 1) ^ 1


def choose(gates: Gates, condition: Bit, yes: Bit, no: Bit) -> Bit:
    """`yes` where the condition holds, else `no`."""
    if condition < 2:
        return yes if condition else no
    if yes == no:
        return yes
    return either(gates, gates.both(condition, yes), gates.both(condition ^ 1, no))


def every(gates: Gates, bits: Iterable[Bit]) -> Bit:
    """The AND of all, one after the other."""
    found = TRUE
    for bit in bits:
        found = gates.both(found, bit)
    return found


def some(gates: Gates, bits: Iterable[Bit]) -> Bit:
    """The OR of all, one after the other."""
    return every(gates, (bit ^ 1 for bit in bits)) ^ 1


def odd(gates: Gates, bits: Iterable[Bit]) -> Bit:
    """The XOR of all, one after the other."""
    found = FALSE
    for bit in bits:
        found = gates.differ(found, bit)
    return found
