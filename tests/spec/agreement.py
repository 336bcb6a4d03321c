"""The question that many tests ask: do both evaluators and Python's own eval say the same?"""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

import numpy as np
import pytest
from hypothesis import reject

from revsynth.errors import ExpressionError
from revsynth.spec import refusals
from revsynth.spec.expression import Expression, parse
from revsynth.spec.layout import decode
from revsynth.spec.reference import evaluate
from revsynth.spec.vector import evaluate_all
from tests.spec.random_expressions import (
    CONSTANTS,
    OUTSIDE,
    SCOPE,
    WORDS,
    NegativeExponent,
    NegativeOnes,
    NoBit,
    NoSlice,
    Text,
    TooLarge,
)

INPUTS = 1 << SCOPE.input_bits
BEFORE_RUNNING = ("BIT_RANGE", "SLICE_RANGE", "INDEX_RANGE", "TOO_MANY_STEPS", "UNPACK")
"""Refused by the parser although Python may never reach it."""


def outside_reason(error: Exception) -> str:
    """The refusal that an exception of Python stands for."""
    own = {
        TooLarge: "TOO_LARGE",
        NegativeExponent: "NEGATIVE_EXPONENT",
        NoBit: "BIT_REACHED",
        NoSlice: "SLICE_REACHED",
        NegativeOnes: "NEGATIVE_POPCOUNT",
        ZeroDivisionError: "DIVISION",
        IndexError: "INDEX_REACHED",
    }
    if type(error) in own:
        return own[type(error)]
    texts = {
        "negative shift count": "NEGATIVE_SHIFT",
        "3rd argument cannot be 0": "MODULUS",
        "not invertible": "NO_INVERSE",
        "empty": "EMPTY_LIST",
        "unpack": "UNPACK_REACHED",
        "arg 3 must not be zero": "RANGE_STEP",
    }
    return next(reason for text, reason in texts.items() if text in str(error))


def is_reason(message: str, reason: str) -> bool:
    """Whether a message was made from the template of a refusal."""
    template = refusals.REFUSALS[reason].message
    pieces = [piece.split("}")[-1] for piece in template.split("{")]
    position = 0
    for piece in pieces:
        position = message.find(piece, position)
        if position < 0:
            return False
    return True


def answers(
    question: Callable[[int], Any], needed: np.ndarray
) -> tuple[list[Any], tuple[int, Exception] | None]:
    """The answers for the needed inputs, up to the first that has none."""
    found = []
    for index in np.flatnonzero(needed):
        try:
            found.append(question(int(index)))
        except (
            ExpressionError,
            ArithmeticError,
            LookupError,
            ValueError,
            TooLarge,
            NegativeExponent,
        ) as error:
            return found, (int(index), error)
        except (NoBit, NoSlice, NegativeOnes) as error:
            return found, (int(index), error)
    return found, None


def parsed(text: str) -> Expression:
    """The expression, unless the parser sees that it can never be right."""
    try:
        return parse(text, SCOPE, source="watch.toml", place="predicate.where")
    except ExpressionError as error:
        if any(is_reason(str(error), reason) for reason in BEFORE_RUNNING):
            reject()
        raise


def check(text: Text, needed: np.ndarray) -> None:
    """Reference, vector and Python agree on all needed inputs, or on the first that fails and why."""
    expression = parsed(text[0])
    code = compile(text[1], "outside", "eval")
    outside, failure = answers(
        lambda index: eval(code, {**CONSTANTS, **OUTSIDE, **decode(WORDS, index)}), needed
    )
    own, own_failure = answers(lambda index: evaluate(expression, decode(WORDS, index)), needed)
    assert own == outside
    low, high = expression.bounds
    assert all(low <= value <= high for value in own)
    if failure is None:
        assert own_failure is None
        values = evaluate_all(expression, needed)
        assert values.shape == (INPUTS,)
        assert values[needed].tolist() == outside
        return
    assert own_failure is not None
    assert own_failure[0] == failure[0]
    assert is_reason(str(own_failure[1]), outside_reason(failure[1])), (own_failure, failure)
    with pytest.raises(ExpressionError) as caught:
        evaluate_all(expression, needed)
    assert str(caught.value) == str(own_failure[1])
