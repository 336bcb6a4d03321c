"""Order among gates and among controls, so that neighbours share products.

A construction writes products of its first controls and undoes them at the end. Where the next gate starts
with the same products, the undoing and the doing meet and cancel (`cancel`), which saves the T gates of both.
So gates that commute are brought into an order where neighbours have many literals in common, and the
controls of each gate are arranged to repeat the products of the gate before and to offer products to the
next.
"""

from __future__ import annotations

from collections.abc import Collection, Sequence

import numpy as np
from numpy.typing import NDArray

from revsynth.lowering.fan_out import Unit
from revsynth.lowering.fold import Shape

WINDOW = 2048
"""Commuting gates are put in order this many at a time (the time grows with the square)."""


def arrange(
    literals: Sequence[int],
    previous: Sequence[int],
    changed: Collection[int],
    following: Collection[int],
    shape: Shape,
) -> list[int]:
    """The literals in an order that repeats what the previous gate does first.

    previous: the order of the gate before; changed: the lines it changed; following: the next gate's
    literals. A ladder keeps the longest common start, a tree the pairs in their places. The rest follows,
    those that the next gate has too first.
    """
    left = set(literals)
    places = [-1] * len(literals)
    step = 1 if shape == "ladder" else 2
    for i in range(0, min(len(literals), len(previous)) - step + 1, step):
        group = previous[i : i + step]
        if all(c in left and c >> 1 not in changed for c in group):
            places[i : i + step] = group
            left.difference_update(group)
        elif shape == "ladder":
            break
    shared = [c for c in literals if c in left and c in following]
    rest = iter([*shared, *(c for c in literals if c in left and c not in following)])
    return [place if place >= 0 else next(rest) for place in places]


def order_units(units: Sequence[Unit], lines: int) -> list[Unit]:
    """The same units, each run of mutually commuting ones ordered so that neighbours share literals."""
    if all(len(unit.controls) < _few(lines) for unit in units):
        return list(units)
    ordered: list[Unit] = []
    run: list[Unit] = []
    read = [-1] * lines
    changed = [-1] * lines
    number = 0
    for unit in units:
        if any(read[t] == number for t in unit.targets) or any(
            changed[c >> 1] == number for c in unit.controls
        ):
            ordered.extend(_chain(run, lines))
            run = []
            number += 1
        run.append(unit)
        for control in unit.controls:
            read[control >> 1] = number
        for target in unit.targets:
            changed[target] = number
    ordered.extend(_chain(run, lines))
    return ordered


def _few(lines: int) -> int:
    """Where no unit has so many controls nothing is put in order."""
    return 2 if lines <= 64 else 3


def _chain(run: Sequence[Unit], lines: int) -> list[Unit]:
    """Greedy: from the first on, always the unit with most literals in common with the last one."""
    if len(run) < 3 or all(len(unit.controls) < _few(lines) for unit in run):
        return list(run)
    rows = sorted(run) if len(run) > WINDOW else list(run)
    ordered: list[Unit] = []
    for begin in range(0, len(rows), WINDOW):
        part = rows[begin : begin + WINDOW]
        ordered.extend(part[index] for index in _greedy(_literal_bits(part, lines)))
    return ordered


def _literal_bits(units: Sequence[Unit], lines: int) -> NDArray[np.uint64]:
    """Bit sets of literals, shape (units, words): literal c is bit c % 64 of word c // 64."""
    bits = np.zeros((len(units), lines // 32 + 1), dtype=np.uint64)
    for row, unit in enumerate(units):
        for control in unit.controls:
            bits[row, control >> 6] |= np.uint64(1) << np.uint64(control & 63)
    return bits


def _greedy(bits: NDArray[np.uint64]) -> list[int]:
    """Row numbers in the order of the walk; ties go to the lowest number."""
    waiting = np.arange(len(bits))
    order = [0]
    waiting = waiting[1:]
    rows = bits[1:]
    while len(waiting):
        common = np.bitwise_count(rows & bits[order[-1]]).sum(axis=1)
        best = int(np.argmax(common))
        order.append(int(waiting[best]))
        keep = np.arange(len(waiting)) != best
        waiting, rows = waiting[keep], rows[keep]
    return order
