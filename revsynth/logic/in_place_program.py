"""Functions that are computed in place, step by step: neutral between the spec and the lines of a circuit.

A program works on n bits, numbered as the inputs of a function are. Each step has a network over all n bits,
whose outputs are its *sources*: they are worked out once, before the step's operations change any bit, and
the operations change no bit that the network reads.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import TypeAlias

from revsynth.logic.network import FALSE, TRUE, Literal, Network
from revsynth.logic.network_builder import NetworkBuilder

Bit: TypeAlias = int
Source: TypeAlias = int
"""The number of an output of the step's network."""


@dataclass(frozen=True)
class Xor:
    """target[i] ^= source i."""

    target: tuple[Bit, ...]
    sources: tuple[Source, ...]


@dataclass(frozen=True)
class Add:
    """The number in `target` (bit 0 first) plus, or minus, the one in the sources, modulo 2**len(target)."""

    target: tuple[Bit, ...]
    sources: tuple[Source, ...]
    subtract: bool = False


@dataclass(frozen=True)
class ShiftAdd:
    """x += x << shift, or x -= x << shift, where the source `under` is 1 (None: always); shift >= 1."""

    target: tuple[Bit, ...]
    shift: int
    subtract: bool = False
    under: Source | None = None


@dataclass(frozen=True)
class Moves:
    """For each pair in turn: the second bit ^= the first, where `under` is 1 (None: always)."""

    pairs: tuple[tuple[Bit, Bit], ...]
    under: Source | None = None


@dataclass(frozen=True)
class Swaps:
    """The bits of each pair, in turn, change places, where `under` is 1 (None: always)."""

    pairs: tuple[tuple[Bit, Bit], ...]
    under: Source | None = None


@dataclass(frozen=True)
class AddModulo:
    """x becomes (x + constant) % modulus for x < modulus; 0 < constant < modulus <= 2**len(target)."""

    target: tuple[Bit, ...]
    constant: int
    modulus: int


@dataclass(frozen=True)
class MultiplyModulo:
    """x becomes x * factor % modulus for x < modulus; the factor is coprime to the modulus."""

    target: tuple[Bit, ...]
    factor: int
    modulus: int


Operation: TypeAlias = "Xor | Add | ShiftAdd | Moves | Swaps | AddModulo | MultiplyModulo"


@dataclass(frozen=True)
class ProgramStep:
    """Sources, and what is done with them, one operation after the other."""

    sources: Network
    operations: tuple[Operation, ...]


@dataclass(frozen=True)
class Program:
    """Steps over `bits` bits, one after the other."""

    bits: int
    steps: tuple[ProgramStep, ...]


def after(program: Program, builder: NetworkBuilder, state: Sequence[Literal]) -> list[Literal]:
    """The bits after the program as literals of a builder, from those before it."""
    bits = list(state)
    for step in program.steps:
        sources = builder.copy(step.sources, bits)
        for operation in step.operations:
            apply(operation, builder, bits, sources)
    return bits


def apply(
    operation: Operation, builder: NetworkBuilder, bits: list[Literal], sources: Sequence[Literal]
) -> None:
    """Carry out one operation on the literals of the bits."""
    if isinstance(operation, Xor):
        for bit, source in zip(operation.target, operation.sources, strict=True):
            bits[bit] = builder.xor(bits[bit], sources[source])
    elif isinstance(operation, Add):
        addend = [sources[source] for source in operation.sources]
        _add(builder, bits, operation.target, addend, operation.subtract)
    elif isinstance(operation, ShiftAdd):
        under = TRUE if operation.under is None else sources[operation.under]
        low = [builder.and_(under, bits[bit]) for bit in operation.target]
        shifted = [FALSE] * operation.shift + low
        _add(builder, bits, operation.target, shifted[: len(low)], operation.subtract)
    elif isinstance(operation, Moves | Swaps):
        under = TRUE if operation.under is None else sources[operation.under]
        for one, other in operation.pairs:
            if isinstance(operation, Moves):
                bits[other] = builder.xor(bits[other], builder.and_(under, bits[one]))
            else:
                apart = builder.and_(under, builder.xor(bits[one], bits[other]))
                bits[one], bits[other] = builder.xor(bits[one], apart), builder.xor(bits[other], apart)
    else:
        raise ValueError("modular operations are known by their numbers, not by gates")


def _add(
    builder: NetworkBuilder,
    bits: list[Literal],
    target: Sequence[Bit],
    addend: Sequence[Literal],
    subtract: bool,
) -> None:
    """Ripple; a difference is the complement of a sum with the complement."""
    carry = FALSE
    for bit, one in zip(target, addend, strict=True):
        old = bits[bit] ^ subtract
        total = builder.xor(builder.xor(old, one), carry)
        carry = builder.majority(old, one, carry)
        bits[bit] = total ^ subtract


def odd_factors(factor: int, bits: int) -> tuple[bool, bool, tuple[int, ...]]:
    """(negate, subtract, shifts) that multiply by an odd number modulo 2**bits.

    x * factor is x, negated if so, and then x += x << k (or x -= x << k) for every shift k, ascending.
    Dividing by 1 + 2**k (or 1 - 2**k), where bit k is the lowest set one above bit 0, clears that bit and
    keeps those below, so every odd factor has such a chain. The chain of fewest ANDs is taken, of equals the
    first.
    """
    best: tuple[int, bool, bool, tuple[int, ...]] | None = None
    modulus = 1 << bits
    for negate in (False, True):
        for subtract in (False, True):
            shifts: list[int] = []
            rest = (-factor if negate else factor) % modulus
            for shift in range(2 if subtract else 1, bits):
                if rest >> shift & 1:
                    shifts.append(shift)
                    step = 1 - (1 << shift) if subtract else 1 + (1 << shift)
                    rest = rest * pow(step, -1, modulus) % modulus
            if rest != 1 % modulus:
                continue
            ands = sum(bits - shift - 1 for shift in shifts) + (max(bits - 2, 0) if negate else 0)
            if best is None or ands < best[0]:
                best = (ands, negate, subtract, tuple(shifts))
    if best is None:
        raise ValueError(f"{factor} is even")
    return best[1:]
