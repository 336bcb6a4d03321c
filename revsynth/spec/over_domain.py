"""Evaluating a spec's expressions over its domain, naming an input where a value is not what is wanted."""

from __future__ import annotations

from typing import Any

import numpy as np
from numpy.typing import NDArray

from revsynth.errors import ExpressionError, SpecError
from revsynth.logic.truth_table import Column, count_ones, ones, pack, unpack
from revsynth.spec.bounds import fits_int64
from revsynth.spec.expression import Expression, Scope, parse
from revsynth.spec.layout import describe
from revsynth.spec.model import Spec
from revsynth.spec.vector import evaluate_with_warnings

MOST_BYTES = 1 << 29
"""Memory for the values of one expression, where 64 bits do not suffice for each."""
_INTEGER_BYTES = 40


class OverDomain:
    """The domain of a spec, and the values of expressions over it.

    domain: packed, shape (words,). needed: the same as Booleans, shape (2**n,), or None where it is every
    input. warnings: one line for every comparison that is constant over the domain.
    """

    def __init__(self, spec: Spec) -> None:
        self.spec = spec
        self.inputs = spec.input_bits
        self.scope = Scope({word.name: word for word in spec.inputs}, spec.constants)
        self.warnings: list[str] = []
        self.needed: NDArray[np.bool_] | None = None
        self.domain: Column = ones(self.inputs)
        if spec.domain is not None:
            self.domain = self.truth(spec.domain, "[domain] where")
            if count_ones(self.domain) == 0:
                raise SpecError(
                    "no input satisfies it: a domain needs at least one",
                    source=spec.source,
                    place="[domain] where",
                )
            if count_ones(self.domain) < 1 << self.inputs:
                self.needed = unpack(self.domain, self.inputs).astype(bool)

    def numbers(self, text: str, place: str) -> NDArray[Any]:
        """The values of an expression at all inputs, int64 or object; arbitrary outside the domain.

        Raises ExpressionError where it is not allowed, or undefined at an input of the domain.
        """
        values = self._values(text, place)[1]
        return values.astype(np.int64) if values.dtype == np.bool_ else values

    def truth(self, text: str, place: str) -> Column:
        """The column of an expression that is Boolean or 0/1 over the domain, 0 outside.

        Raises ExpressionError where it is not, naming an input.
        """
        expression, values = self._values(text, place)
        if values.dtype != np.bool_:
            wrong = (values != 0) & (values != 1)
            at = self.first(wrong)
            if at is not None:
                raise condition_error(expression, values[at], self.named(at))
            values = values == 1
        return pack(np.asarray(values, dtype=bool)) & self.domain

    def first(self, wrong: NDArray[np.bool_]) -> int | None:
        """The first input of the domain at which `wrong` holds, None where there is none."""
        inside = np.asarray(wrong, dtype=bool) if self.needed is None else np.logical_and(wrong, self.needed)
        at = int(np.argmax(inside))
        return at if inside[at] else None

    def named(self, index: int) -> str:
        """An input in words, for messages."""
        return describe(self.spec.inputs, index)

    def error(self, message: str, place: str) -> SpecError:
        """An error of this spec."""
        return SpecError(message, source=self.spec.source, place=place)

    def check_memory(self, expression: Expression, place: str) -> None:
        """Refuse values beyond 64 bits, which are Python integers one by one, at too many inputs."""
        if fits_int64(expression.bounds):
            return
        bits = max(abs(end).bit_length() for end in expression.bounds)
        count = count_ones(self.domain)
        if count * (_INTEGER_BYTES + bits // 8) > MOST_BYTES:
            raise self.error(
                f"values of up to {bits} bits at {count} inputs need too much memory: keep the low bits in "
                "the expression, with % 2 ** 32 or the like",
                place,
            )

    def _values(self, text: str, place: str) -> tuple[Expression, NDArray[Any]]:
        expression = parse(text, self.scope, source=self.spec.source, place=place)
        self.check_memory(expression, place)
        values, warnings = evaluate_with_warnings(expression, self.needed)
        self.warnings.extend(warnings)
        return expression, values


def condition_error(expression: Expression, value: int, named: str) -> ExpressionError:
    """The error for a condition that is neither 0 nor 1 at an input, given in words."""
    shown = " ".join(expression.text.split())
    fix = f"({shown}) != 0" if len(shown) <= 60 else "(...) != 0"
    return ExpressionError(
        f"the value is {value} at {named}: a condition is true or false, "
        f"or 0 or 1; write {fix} if every other number shall count as true",
        source=expression.source,
        place=expression.place,
    )
