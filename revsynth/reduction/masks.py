"""The gate as three bit masks, the form in which all of reduction works.

`(target, positive, negative)`: bit l of `target` where the gate flips line l (0 for a phase gate), bit l of
`positive` (`negative`) where it waits for a 1 (a 0) on line l. Python integers: any number of lines.
"""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from typing import NamedTuple, TypeAlias

import numpy as np

from revsynth.cascade.model import PHASE, Cascade, Gate, Line
from revsynth.cascade.price import gate_t
from revsynth.options import Uncompute

Masks: TypeAlias = tuple[int, int, int]
Masked: TypeAlias = tuple[Masks, ...]
"""Gates next to each other, the first one first."""

BULK = 2_000
"""From this many gates on, numpy converts faster than a loop."""


class Weight(NamedTuple):
    """What gates cost: how many they are, their T gates by `cascade.price`, their control literals."""

    gates: int
    t: int
    literals: int


def weigh(gates: Iterable[Masks], uncompute: Uncompute) -> Weight:
    """The weight of some gates."""
    count = t = literals = 0
    for target, positive, negative in gates:
        controls = (positive | negative).bit_count()
        count += 1
        literals += controls
        if controls > 1:
            t += gate_t(controls if target else controls - 1, uncompute)
    return Weight(count, t, literals)


def negatives(gates: Iterable[Masks]) -> int:
    """How many control literals wait for a 0."""
    return sum(gate[2].bit_count() for gate in gates)


def commute(first: Masks, second: Masks) -> bool:
    """Whether the order of two gates does not matter; exact, not only sufficient.

    Opposite literals on one line: never both fire. Otherwise neither may flip a line the other reads.
    """
    if first[1] & second[2] or first[2] & second[1]:
        return True
    return not (first[0] & (second[1] | second[2]) or second[0] & (first[1] | first[2]))


def apart(first: Masks, second: Masks) -> int:
    """At how many lines the controls of two gates differ."""
    return ((first[1] ^ second[1]) | (first[2] ^ second[2])).bit_count()


def masked(cascade: Cascade) -> list[Masks]:
    """The gates of a cascade of up to 64 lines, or of any width where it is short, as masks."""
    if cascade.lines <= 64 and len(cascade) >= BULK:
        target, care, value = cascade.masks()
        return [
            (1 << t if t >= 0 else 0, c & v, c & ~v)
            for t, c, v in zip(target.tolist(), care.tolist(), value.tolist(), strict=True)
        ]
    gates: list[Masks] = []
    control = cascade.control.tolist()
    offset = cascade.offset.tolist()
    for index, target in enumerate(cascade.target.tolist()):
        literals = [0, 0]
        for c in control[offset[index] : offset[index + 1]]:
            literals[c & 1] |= 1 << (c >> 1)
        gates.append((1 << target if target >= 0 else 0, literals[0], literals[1]))
    return gates


def unmasked(lines: int, gates: Sequence[Masks]) -> Cascade:
    """The cascade of some gates given as masks."""
    if lines <= 64 and len(gates) >= BULK:
        return Cascade.from_masks(
            lines,
            np.array([gate[0].bit_length() - 1 for gate in gates], dtype=np.int32),
            np.array([gate[1] | gate[2] for gate in gates], dtype=np.uint64),
            np.array([gate[1] for gate in gates], dtype=np.uint64),
        )
    return Cascade.from_gates(lines, [to_gate(gate, range(lines)) for gate in gates])


def to_gate(gate: Masks, lines: Sequence[Line]) -> Gate:
    """The gate whose mask bit i stands for `lines[i]`, ascending."""
    target, positive, negative = gate
    controls: list[int] = []
    rest = positive | negative
    while rest:
        low = rest & -rest
        controls.append(2 * lines[low.bit_length() - 1] + bool(negative & low))
        rest ^= low
    return Gate(lines[target.bit_length() - 1] if target else PHASE, tuple(controls))
