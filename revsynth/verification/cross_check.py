"""Holds the table that circuits are compared with against a second reading of the spec.

The table comes from `understand`; `Expectation` evaluates the spec again, one input at a time, in plain
Python integers and with none of the tabulating code. Formulas are put before PyEDA as well.
"""

from __future__ import annotations

import random

from revsynth.errors import ExpressionError
from revsynth.logic.truth_table import first_inputs
from revsynth.spec.expectation import Expectation
from revsynth.spec.layout import describe
from revsynth.spec.model import Predicate
from revsynth.spec.pyeda_adapter import second_opinion
from revsynth.spec.understand import Understanding

ALL_UP_TO = 12
"""Input bits up to which all inputs are compared."""
SAMPLE = 4096


ASKED = 100_000
"""PyEDA is asked about so many inputs that this many characters of formula are evaluated at most."""


def cross_check(understanding: Understanding) -> list[str]:
    """Compare, and say in a line each how far it went; formulas get PyEDA's opinion too.

    Raises AssertionError at a difference: then one of the readings has a defect.
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
            raise _difference(understanding, index)
    count = f"all {size}" if len(inputs) == size else f"{len(inputs)} of {size}"
    links = [f"spec: its table agrees with a second evaluation in plain integers at {count} inputs"]
    body = understanding.spec.body
    if isinstance(body, Predicate) and body.formula is not None:
        links += _ask_pyeda(understanding, body.formula, list(inputs))
    return links


def _ask_pyeda(understanding: Understanding, formula: str, inputs: list[int]) -> list[str]:
    """PyEDA's opinion at some of the inputs, spread evenly; none where the formula is too deep for it."""
    some = inputs[:: max(1, -(-len(inputs) * len(formula) // ASKED))]
    if len(formula) > ASKED:
        return []
    try:
        opinion = second_opinion(formula, understanding.spec.inputs, some)
    except ExpressionError:
        return []
    function = understanding.function
    for index, value in zip(some, opinion.tolist(), strict=True):
        word, bit = index >> 6, index & 63
        if int(function.care[0, word]) >> bit & 1 and int(function.values[0, word]) >> bit & 1 != value:
            raise _difference(understanding, index)
    return [f"spec: PyEDA says the same of the formula at {len(some)} of {1 << function.inputs} inputs"]


def _difference(understanding: Understanding, index: int) -> AssertionError:
    return AssertionError(
        f"a defect of revsynth: the table of {understanding.spec.source} and the spec evaluated "
        f"again differ at {describe(understanding.spec.inputs, index)}"
    )


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
