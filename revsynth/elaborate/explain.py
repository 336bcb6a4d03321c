"""From an input at which a check fails to the error that a spec small enough for a table gets."""

from __future__ import annotations

from dataclasses import dataclass

from revsynth.errors import ExpressionError, SpecError
from revsynth.spec.cover_columns import conflict_error
from revsynth.spec.expression import Expression
from revsynth.spec.images import unfit_error
from revsynth.spec.layout import decode, describe, value_range
from revsynth.spec.model import Cover, Spec, Word
from revsynth.spec.over_domain import condition_error
from revsynth.spec.reference import evaluate


@dataclass(frozen=True)
class OfExpression:
    """An operation that is undefined, a condition that is not 0 or 1, or a value that does not fit a word.

    `word` is None where any value will do, or where a condition is wanted.
    """

    spec: Spec
    expression: Expression
    condition: bool = False
    word: tuple[str, Word] | None = None

    def __call__(self, index: int) -> SpecError:
        """The error at an input; raises ValueError where there is none."""
        try:
            value = evaluate(self.expression, decode(self.spec.inputs, index))
        except ExpressionError as error:
            return error
        if self.condition and value not in (0, 1):
            return condition_error(self.expression, int(value), describe(self.spec.inputs, index))
        if self.word is not None:
            lowest, highest = value_range(self.word[1])
            if not lowest <= value <= highest:
                return unfit_error(self.spec, self.word, self.expression.text, int(value), index)
        raise ValueError(f"nothing is wrong at {describe(self.spec.inputs, index)}")


@dataclass(frozen=True)
class OfCover:
    """An output of a cover that is both on and off."""

    cover: Cover
    source: str

    def __call__(self, index: int) -> SpecError:
        """The error at an input; raises ValueError where there is none."""
        found = conflict_error(self.cover, index, self.source)
        if found is None:
            raise ValueError(f"nothing is wrong at v = {index}")
        return found
