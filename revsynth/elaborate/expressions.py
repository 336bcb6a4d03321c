"""Expressions of a spec as numbers of literals, with their checks and warnings."""

from __future__ import annotations

from collections import defaultdict
from dataclasses import dataclass, field

from revsynth.elaborate.bitwise import truth
from revsynth.elaborate.explain import OfExpression
from revsynth.elaborate.linear import equal, less
from revsynth.elaborate.model import Check
from revsynth.elaborate.numbers import Number, bounds_of, settled
from revsynth.elaborate.reach import Build, start
from revsynth.elaborate.values import Items, Value
from revsynth.elaborate.walk import Walk
from revsynth.logic.network import FALSE, TRUE, Literal
from revsynth.logic.network_builder import NetworkBuilder
from revsynth.spec import bounds
from revsynth.spec.expression import Expression, Scope, parse
from revsynth.spec.layout import value_range
from revsynth.spec.model import Spec, Word
from revsynth.spec.vector import constant_comparison


@dataclass
class Expressions:
    """Elaborates the expressions of one spec into one builder.

    domain: where the inputs count, once it is known. found: (literal, message, error) of each check.
    """

    spec: Spec
    builder: NetworkBuilder
    domain: Literal = TRUE
    found: list[tuple[Literal, str, OfExpression]] = field(default_factory=list)
    warnings: list[str] = field(default_factory=list)

    def __post_init__(self) -> None:
        self.scope = Scope({word.name: word for word in self.spec.inputs}, self.spec.constants)
        self.words = word_values(self.builder, self.spec.inputs)

    def number(self, text: str, place: str) -> tuple[Expression, Number]:
        """The value of an expression; what is undefined in it becomes checks.

        Raises ExpressionError where it is not allowed, SpecError where its network would be too large.
        """
        expression = parse(text, self.scope, source=self.spec.source, place=place)
        build = Build(self.builder, self.words, self.spec.source, place)
        walk = Walk(expression)
        number = walk.number(expression.tree, start(build))
        for refusal, literals in build.failures.items():
            where = self.builder.and_(self.builder.any_of(literals), self.domain)
            fields = defaultdict(lambda: "...", {"at": " at some input", **build.shown[refusal]})
            message = f"{self.spec.source}: {place}: {refusal.message.format_map(fields)}"
            self._check(where, message, OfExpression(self.spec, expression))
        self._warn(walk)
        return expression, number

    def condition(self, text: str, place: str) -> Literal:
        """Where a condition holds; that it is 0 or 1 wherever it counts is a check."""
        expression, number = self.number(text, place)
        lo, hi = bounds_of(number)
        if lo >= 0 and hi <= 1:
            return truth(self.builder, number)
        one, zero = equal(self.builder, number, 1), equal(self.builder, number, 0)
        message = f"{self.spec.source}: {place}: a condition is true or false, or 0 or 1; write (...) != 0"
        wrong = self.builder.and_(self.builder.or_(one, zero) ^ 1, self.domain)
        self._check(wrong, message, OfExpression(self.spec, expression, condition=True))
        return one

    def word(self, text: str, place: str, name: str, word: Word) -> Number:
        """A new value of a word; that it fits is a check."""
        expression, number = self.number(text, place)
        lowest, highest = value_range(word)
        outside = self.builder.or_(less(self.builder, number, lowest), less(self.builder, highest, number))
        message = f"{self.spec.source}: {place}: {name} holds {lowest} to {highest}"
        wrong = self.builder.and_(outside, self.domain)
        self._check(wrong, message, OfExpression(self.spec, expression, word=(name, word)))
        return number

    def _check(self, where: Literal, message: str, error: OfExpression) -> None:
        if where != FALSE:
            self.found.append((where, message, error))

    def _warn(self, walk: Walk) -> None:
        found = []
        for (node, place), answers in walk.answers.items():
            if answers in ({TRUE}, {FALSE}) and self.spec.input_bits:
                text = constant_comparison(walk.expression, (node, place), answers == {TRUE})
                found.append((walk.expression.origin.position(node), place, text))
        self.warnings.extend(dict.fromkeys(text for _, _, text in sorted(found)))

    def checks(self) -> tuple[Check, ...]:
        """The checks as networks of their own."""
        return tuple(
            Check(self.builder.build([literal]), message, error) for literal, message, error in self.found
        )


def word_values(builder: NetworkBuilder, words: tuple[Word, ...]) -> dict[str, Value]:
    """The words as numbers of inputs, arrays as lists of such."""
    found: dict[str, Value] = {}
    first = 0
    for word in words:
        elements: list[Value] = []
        for _ in range(1 if word.count is None else word.count):
            literals = [builder.input(first + place) for place in range(word.bits)]
            elements.append(settled(literals, *bounds.word(word.bits, word.signed)))
            first += word.bits
        found[word.name] = elements[0] if word.count is None else Items(tuple(elements), (TRUE,) * word.count)
    return found
