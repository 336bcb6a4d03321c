"""Elaborated expressions against the vectorised evaluator, for all inputs, undefined ones included."""

from __future__ import annotations

import numpy as np
from hypothesis import example, given

from revsynth.elaborate import Elaboration, elaborate
from revsynth.errors import ExpressionError
from revsynth.logic.network import Network
from revsynth.logic.network_simulation import tabulate
from revsynth.logic.truth_table import unpack
from revsynth.spec.expression import Expression
from revsynth.spec.layout import decode
from revsynth.spec.model import Output, Outputs, Spec
from revsynth.spec.reference import evaluate
from tests.spec.agreement import INPUTS, parsed
from tests.spec.random_expressions import CONSTANTS, WORDS, Text, expressions

BITS = 80


def columns(network: Network) -> np.ndarray:
    """0/1 array of shape (outputs, inputs)."""
    return np.array([unpack(column, network.inputs) for column in tabulate(network)])


def elaborated(text: str, bits: int, signed: bool = True) -> Elaboration:
    """An expression over the words of the random expressions as the one output word."""
    return elaborate(
        Spec(WORDS, Outputs((Output("f", text, bits=bits, signed=signed),)), constants=CONSTANTS)
    )


def reference(expression: Expression, index: int) -> int | ExpressionError:
    """What the reference evaluator says at an input."""
    try:
        return int(evaluate(expression, decode(WORDS, index)))
    except ExpressionError as error:
        return error


def named(error: Exception) -> str:
    """The error as the output word of a spec has it."""
    return str(error).replace("watch.toml: predicate.where", "spec: [outputs] f value")


@given(expressions())
@example(("a // k if k else 7 // (a - 3)", ""))
@example(("sum(x for x in cell if x > a)", ""))
@example(("any(12 // (c - 1) == a for c in cell)", ""))
@example(("all(12 // (c - 1) == a for c in [c for c in cell])", ""))
@example(("pow(a, k, 7) + pow(k, a, a)", ""))
def test_every_input_gives_what_the_reference_says(text: Text) -> None:
    expression = parsed(text[0])
    found = elaborated(text[0], BITS)
    table = columns(found.function.values)
    fails = [columns(check.network)[0] for check in found.checks]
    for index in range(INPUTS):
        value = reference(expression, index)
        failing = [check for check, fail in zip(found.checks, fails, strict=True) if fail[index]]
        assert bool(failing) == isinstance(value, ExpressionError), (text[0], index, value)
        if isinstance(value, ExpressionError):
            assert str(failing[0].error(index)) == named(value)
        else:
            bits = sum(int(bit) << place for place, bit in enumerate(table[:, index]))
            assert bits == value % (1 << BITS), (text[0], index, value)
