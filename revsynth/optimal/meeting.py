"""Shortest circuits of four lines by meeting in the middle, or how many gates are needed at least.

A circuit of s + k gates, where the table of classes goes to size s, is one of s gates behind one of k. So for
k = 1, 2, ... all functions of k gates are tried: from classes they come by naming lines and inverting, and
instead of the class it is the function that takes the 24 names.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from revsynth.cascade.model import Cascade, Gate
from revsynth.optimal.classes import Classes, Progress
from revsynth.optimal.packed import LINES, Words, namings, points, unpack

CHUNK = 1 << 14
"""Classes tried between two looks at the time: about 50 ms."""


@dataclass(frozen=True)
class Answer:
    """A shortest cascade, or None; and how many gates are needed at least, as far as was ruled out."""

    cascade: Cascade | None
    at_least: int


def shortest(words: Sequence[int], classes: Classes, progress: Progress) -> Answer:
    """A cascade of the fewest gates with positive controls, proved by exhaustion of all shorter ones.

    words: permutations of 4 lines, as in `packed`, of which any will do; the first of those with the fewest
    gates is taken. `at_least` is the size of the cascade where there is one, else 2 * classes.size + 1.
    Time is some 30 ns for each function of the sizes tried and each word.
    """
    sizes = [classes.size_of(word) for word in words]
    known = [size for size in sizes if size is not None]
    if known:
        gates = classes.gates(words[sizes.index(min(known))])
        return Answer(Cascade.from_gates(LINES, gates), len(gates))
    for more in range(1, classes.size + 1):
        for word in words:
            found = _meeting(word, classes, more, progress)
            if found is not None:
                return Answer(Cascade.from_gates(LINES, found), len(found))
    return Answer(None, 2 * classes.size + 1)


def _meeting(word: int, classes: Classes, more: int, progress: Progress) -> list[Gate] | None:
    """A circuit of `classes.size` + `more` gates, None where there is none."""
    from revsynth.optimal.kernels import meet

    named = _named(word)
    images = np.array([unpack(int(one)) for one in named], dtype=np.uint8)
    level = classes.levels[more]
    point, (first, second) = points(), classes.signatures
    for begin in range(0, len(level), CHUNK):
        if more > 3:
            progress(f"optimal: {classes.size + more} gates, {100 * begin // len(level)} % ruled out")
        part: Words = level[begin : begin + CHUNK]
        found = int(meet(images, part, classes.size, classes.table, point, first, second))
        if found >= 0:
            return _joined(named, part, found, classes)
    return None


def _named(word: int) -> NDArray[np.uint64]:
    from revsynth.optimal import kernels

    named = np.empty(24, dtype=np.uint64)
    kernels.namings(np.uint64(word), named)
    return named


def _joined(named: Words, part: Words, found: int, classes: Classes) -> list[Gate]:
    """The gates of what `meet` found: the named function is `rest` after the inverse of `inner`."""
    from revsynth.optimal import kernels

    index, name, is_inverted = found // 48, found % 48 // 2, found % 2
    inner = np.uint64(part[index])
    outer = np.uint64(kernels.inverted(inner))
    if is_inverted:
        inner, outer = outer, inner
    rest = int(kernels.composed(named[name], inner))
    naming = namings()[name]
    return [_named_back(gate, naming) for gate in classes.gates(int(outer)) + classes.gates(rest)]


def _named_back(gate: Gate, naming: tuple[int, ...]) -> Gate:
    return Gate(naming[gate.target], tuple(sorted(2 * naming[c >> 1] for c in gate.controls)))
