"""Embedding in place: outputs appear on lines of the inputs, with the fewest lines left as garbage.

Source of the line count: Maslov, Dueck, "Reversible cascades with minimal garbage", IEEE TCAD 23(11), 2004:
outputs + ceil(log2 of the largest output multiplicity), and never fewer than the inputs.
"""

from __future__ import annotations

from collections.abc import Iterator
from typing import TypeAlias

import numpy as np
from numpy.typing import NDArray

from revsynth.embed.multiplicity import output_multiplicity
from revsynth.embed.target import MAX_LINES, ReversibleTarget
from revsynth.logic.function import Function
from revsynth.logic.truth_table import unpack_values

Lines: TypeAlias = tuple[int, ...]
"""Entry b is the line of bit b."""


def fewest_lines(function: Function) -> int:
    """Lines that an in-place embedding needs: inputs, against outputs and garbage together."""
    garbage = (output_multiplicity(function) - 1).bit_length()
    return max(function.inputs, function.outputs + garbage)


def tables(function: Function) -> tuple[NDArray[np.int64], NDArray[np.int64]]:
    """(values, care) of each input as integers, shape (2**inputs,), output bit 0 lowest."""
    return unpack_values(function.values, function.inputs), unpack_values(function.care, function.inputs)


def embed(function: Function, lines: int, before: Lines, after: Lines) -> ReversibleTarget:
    """The target with input bit i on line before[i] and output bit j on line after[j].

    The other lines start in 0; states in which they do not are free, and so are lines without an output.
    Raises ValueError above 20 lines or where the placement does not fit.
    """
    if lines > MAX_LINES:
        raise ValueError(f"{lines} lines are too many for a table of all states: at most {MAX_LINES}")
    for name, places, wanted in (("before", before, function.inputs), ("after", after, function.outputs)):
        if len(places) != wanted or len(set(places)) != wanted or not set(places) <= set(range(lines)):
            raise ValueError(f"{name}: {wanted} different lines below {lines} wanted, not {places}")
    values, care = tables(function)
    fixed = np.zeros(1 << lines, dtype=np.int64)
    image = np.zeros(1 << lines, dtype=np.int64)
    row = spread(np.arange(1 << function.inputs, dtype=np.int64), before)
    fixed[row] = spread(care, after)
    image[row] = spread(values, after)
    return ReversibleTarget(lines, fixed, image)


def spread(values: NDArray[np.int64], places: Lines) -> NDArray[np.int64]:
    """Bit b of each value moved to bit places[b]."""
    moved = np.zeros_like(values)
    for bit, place in enumerate(places):
        moved |= ((values >> bit) & 1) << place
    return moved


def placements(function: Function, lines: int, count: int, seed: int) -> Iterator[tuple[Lines, Lines]]:
    """`count` different ways to put inputs and outputs on lines, promising ones first.

    First both in order from line 0 up, then outputs on the lines whose inputs they agree with most, then
    outputs from the top line down; the rest at random, reproducible by `seed`. Constants are always on the
    highest lines, so that the states that matter are the lowest numbers, which synthesis reaches first.
    """
    natural: Lines = tuple(range(function.inputs))
    alike = _by_agreement(function, lines)
    top = tuple(range(lines - function.outputs, lines))
    seen: set[tuple[Lines, Lines]] = set()
    random = np.random.default_rng(seed)
    fixed_choices = [(natural, tuple(range(function.outputs))), (natural, alike), (natural, top)]
    attempt = 0
    while len(seen) < count and attempt < 4 * count + 8:
        if attempt < len(fixed_choices):
            choice = fixed_choices[attempt]
        else:
            order = tuple(int(line) for line in random.permutation(function.inputs))
            if attempt % 2:
                after = tuple(order[line] if line < function.inputs else line for line in alike)
            else:
                after = tuple(int(line) for line in random.permutation(lines)[: function.outputs])
            choice = (order, after)
        attempt += 1
        if choice not in seen:
            seen.add(choice)
            yield choice


def _by_agreement(function: Function, lines: int) -> Lines:
    """Outputs on the lines of the inputs they agree (or disagree) with most often, greedily."""
    values, care = tables(function)
    index = np.arange(1 << function.inputs, dtype=np.int64)
    pairs = []
    for output in range(function.outputs):
        cared = ((care >> output) & 1).astype(bool)
        wanted = (values[cared] >> output) & 1
        for line in range(lines):
            held = (index[cared] >> line) & 1
            same = int(np.count_nonzero(wanted == held))
            pairs.append((-max(same, len(wanted) - same), line, output))
    place: dict[int, int] = {}
    taken: set[int] = set()
    for _, line, output in sorted(pairs):
        if output not in place and line not in taken:
            place[output] = line
            taken.add(line)
    return tuple(place[output] for output in range(function.outputs))
