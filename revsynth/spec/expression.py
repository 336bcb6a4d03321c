"""Expressions over words and constants: what the `where`, `value` and `map` of a spec say.

`parse` reads and checks an expression; nothing is ever handed to Python's own eval. `reference.evaluate`
gives its value for one input, `vector.evaluate_all` for all of them.
"""

from __future__ import annotations

import ast
from collections.abc import Mapping
from dataclasses import dataclass, field
from functools import partial
from typing import Any

from revsynth.errors import SpecError
from revsynth.spec import refusals
from revsynth.spec.arithmetic import Undefined, Width
from revsynth.spec.bounds import Interval
from revsynth.spec.checker import Checker
from revsynth.spec.limits import MAX_DEPTH
from revsynth.spec.model import Constant, Word
from revsynth.spec.names import check_name
from revsynth.spec.syntax import Origin, syntax_tree

__all__ = ["Expression", "Scope", "check_name", "parse"]


@dataclass(frozen=True)
class Scope:
    """The names that an expression may use; the words' order numbers the inputs (combined index)."""

    words: Mapping[str, Word]
    constants: Mapping[str, Constant] = field(default_factory=dict)

    def __post_init__(self) -> None:
        both = [name for name in self.words if name in self.constants]
        if both:
            raise SpecError(f"{both[0]!r} is both a word and a constant; rename one of them")

    @property
    def input_bits(self) -> int:
        """Number of input bits n; inputs are numbered 0 ... 2**n - 1."""
        return sum(word.total_bits for word in self.words.values())


@dataclass(frozen=True)
class Expression:
    """A checked expression.

    tree:   Python syntax, made of allowed parts only; chains a + b + c lean left as Python has them.
    bounds: least and greatest value that it can have (not always reached).
    widths: for each subscript that takes bits of a word, and each call of popcount or parity on a word's
            own value, how wide that word is. A subscript without an entry indexes a list.
    stored: upper bound on the items of lists that must be held at once.
    """

    text: str
    tree: ast.expr = field(compare=False)
    scope: Scope
    source: str
    place: str
    bounds: Interval = field(compare=False)
    widths: Mapping[ast.expr, Width] = field(repr=False, compare=False)
    stored: int = field(default=0, repr=False, compare=False)

    def __reduce__(self) -> tuple[Any, ...]:
        """Pickled as its text: a tree may be too deep for pickle."""
        return partial(parse, source=self.source, place=self.place), (self.text, self.scope)

    @property
    def origin(self) -> Origin:
        """Where the expression stands, for messages."""
        return Origin(self.text, self.source, self.place)

    def error(self, undefined: Undefined, values: Mapping[str, int | list[int]]) -> SpecError:
        """The error for an operation that is undefined at an input, given by its words' values."""
        at = ", ".join(f"{name} = {value}" for name, value in values.items())
        node = undefined.node if undefined.node is not None else self.tree
        return self.origin.error_at(node, undefined.refusal, at=f" at {at}" if at else "", **undefined.fields)


def parse(text: str, scope: Scope, *, source: str = "", place: str = "") -> Expression:
    """Read and check an expression.

    Raises ExpressionError, one line with `source`, `place` and the column, for anything that the language
    does not have, unknown or shadowed names, constant indexes out of range, and whatever would take too
    long (see `limits`); what is undefined only for some inputs is found when it is evaluated.
    """
    origin = Origin(text.replace("\r\n", "\n"), source, place)
    tree = syntax_tree(origin)
    checker = Checker(origin, scope.words, scope.constants)
    try:
        kind = checker.as_number(tree, checker.kind(tree, {}))
    except RecursionError:
        raise origin.error(refusals.TOO_DEEP, 1, 1, limit=MAX_DEPTH) from None
    return Expression(origin.text, tree, scope, source, place, kind.interval, checker.widths, checker.stored)
