"""Holds the table that circuits are compared with against a second reading of the spec.

The table comes from `understand`; `Expectation` evaluates the spec again, one input at a time, in plain
Python integers and with none of the tabulating code.
"""

from __future__ import annotations

import random

from revsynth.logic.truth_table import first_inputs
from revsynth.spec.expectation import Expectation
from revsynth.spec.layout import describe
from revsynth.spec.understand import Understanding

ALL_UP_TO = 12
"""Input bits up to which all inputs are compared."""
SAMPLE = 4096


def cross_check(understanding: Understanding) -> str:
    """Compare, and say in one line how far it went.

    Raises AssertionError at a difference: then one of the two readings has a defect.
    """
    function = understanding.function
    size = 1 << function.inputs
    inputs = range(size) if function.inputs <= ALL_UP_TO else _sample(understanding)
    expectation = Expectation(understanding)
    for index, wanted in zip(inputs, expectation.at(inputs), strict=True):
        word, bit = index >> 6, index & 63
        inside = bool(int(function.domain[word]) >> bit & 1)
        table = tuple(
            (int(value[word]) >> bit & 1) if int(care[word]) >> bit & 1 else None
            for value, care in zip(function.values, function.care, strict=True)
        )
        if table != wanted or inside != expectation.in_domain(index):
            raise AssertionError(
                f"a defect of revsynth: the table of {understanding.spec.source} and the spec evaluated "
                f"again differ at {describe(understanding.spec.inputs, index)}"
            )
    count = f"all {size}" if len(inputs) == size else f"{len(inputs)} of {size}"
    return f"spec: its table agrees with a second evaluation in plain integers at {count} inputs"


def _sample(understanding: Understanding) -> list[int]:
    """Marked inputs and their neighbours, first and last inputs, and others from a fixed seed."""
    function = understanding.function
    size = 1 << function.inputs
    chosen: dict[int, None] = {0: None, size - 1: None}
    marked = [x for row in function.values for x in first_inputs(row, max(1, 64 // function.outputs))]
    for index in marked[:64]:
        chosen[index] = None
        for bit in range(function.inputs):
            chosen[index ^ (1 << bit)] = None
    draw = random.Random(0)
    while len(chosen) < SAMPLE:
        chosen[draw.randrange(size)] = None
    return list(chosen)[:SAMPLE]
