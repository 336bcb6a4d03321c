"""The reference evaluator: one input at a time, with Python's own integers and Python's own meaning.

It is slow and plain on purpose: what it answers is what an expression means, and `vector` must agree.
"""

from __future__ import annotations

import ast
import operator
from collections.abc import Callable, Iterable, Iterator, Mapping, Sequence
from typing import Any

from revsynth.errors import SpecError
from revsynth.spec import arithmetic, bounds, refusals
from revsynth.spec.arithmetic import Undefined
from revsynth.spec.expression import Expression
from revsynth.spec.model import Word
from revsynth.spec.syntax import chain

Names = Mapping[str, Any]


def evaluate(expression: Expression, values: Mapping[str, int | Sequence[int]]) -> int | bool:
    """The value of an expression for one input, given by the value of each word it may use.

    Signed words take negative numbers, arrays one number an element, element 0 first. Raises
    ExpressionError naming the input where an undefined operation is reached, and SpecError where a
    word's value is missing or does not fit.
    """
    words = {name: _word_value(word, values) for name, word in expression.scope.words.items()}
    try:
        result = _Reference(expression).value(expression.tree, {**expression.scope.constants, **words})
    except Undefined as undefined:
        raise expression.error(undefined, words) from None
    return result if isinstance(result, bool) else int(result)


def constant_part(expression: Expression, node: ast.expr, names: Names) -> Any:
    """The value of a part of an expression that reads nothing but `names`; None for other parts."""
    try:
        return _Reference(expression).value(node, names)
    except (Undefined, KeyError):
        return None


def _word_value(word: Word, values: Mapping[str, int | Sequence[int]]) -> int | list[int]:
    if word.name not in values:
        raise SpecError(f"no value is given for the word {word.name!r}")
    given: Any = values[word.name]
    numbers = [operator.index(one) for one in ([given] if word.count is None else given)]
    low, high = bounds.word(word.bits, word.signed)
    if any(not low <= number <= high for number in numbers):
        raise SpecError(f"{word.name} = {given} does not fit: {low} to {high} is wanted")
    if len(numbers) != (word.count or 1):
        raise SpecError(f"{word.name} has {word.count} elements, not {len(numbers)}")
    return numbers[0] if word.count is None else numbers


class _Reference:
    """Walks the tree of one expression; recursion is bounded by the nesting that the parser allows."""

    def __init__(self, expression: Expression) -> None:
        self.widths = expression.widths
        self.visits: dict[type[ast.expr], Callable[[Any, Names], Any]] = {
            ast.Constant: lambda node, names: node.value,
            ast.Name: lambda node, names: names[node.id],
            ast.BinOp: self.binary,
            ast.UnaryOp: self.unary,
            ast.BoolOp: self.logic,
            ast.Compare: self.compare,
            ast.IfExp: self.choice,
            ast.Subscript: self.subscript,
            ast.Call: self.call,
            ast.List: lambda node, names: [self.value(item, names) for item in node.elts],
            ast.Tuple: lambda node, names: tuple(self.value(item, names) for item in node.elts),
            ast.ListComp: lambda node, names: list(self.generator(node, names)),
            ast.GeneratorExp: self.generator,
        }

    def value(self, node: ast.expr, names: Names) -> Any:
        """The value of one part; an undefined operation is marked with the innermost part at fault."""
        try:
            return self.visits[type(node)](node, names)
        except Undefined as undefined:
            if undefined.node is None:
                undefined.node = node
            raise

    def binary(self, node: ast.BinOp, names: Names) -> int:
        first, operations = chain(node)
        result: int = self.value(first, names)
        for operation in operations:
            right = self.value(operation.right, names)
            try:
                result = arithmetic.BINARY[type(operation.op)](result, right)
            except Undefined as undefined:
                undefined.node = operation
                raise
        return result

    def unary(self, node: ast.UnaryOp, names: Names) -> int:
        return arithmetic.UNARY[type(node.op)](self.value(node.operand, names))

    def logic(self, node: ast.BoolOp, names: Names) -> Any:
        goes_on = isinstance(node.op, ast.And)
        result = None
        for part in node.values:
            result = self.value(part, names)
            if bool(result) is not goes_on:
                break
        return result

    def compare(self, node: ast.Compare, names: Names) -> bool:
        left = self.value(node.left, names)
        for op, part in zip(node.ops, node.comparators, strict=True):
            right = self.value(part, names)
            if not arithmetic.COMPARE[type(op)](left, right):
                return False
            left = right
        return True

    def choice(self, node: ast.IfExp, names: Names) -> Any:
        return self.value(node.body if self.value(node.test, names) else node.orelse, names)

    def subscript(self, node: ast.Subscript, names: Names) -> Any:
        base = self.value(node.value, names)
        width = self.widths.get(node)
        if isinstance(node.slice, ast.Slice):
            assert width is not None
            lo = self.value(node.slice.lower, names) if node.slice.lower else 0
            hi = self.value(node.slice.upper, names) if node.slice.upper else width.bits
            return arithmetic.bit_slice(base, lo, hi, width)
        index = self.value(node.slice, names)
        return arithmetic.item(base, index) if width is None else arithmetic.bit(base, index, width)

    def call(self, node: ast.Call, names: Names) -> Any:
        assert isinstance(node.func, ast.Name)
        name = node.func.id
        arguments = [self.value(argument, names) for argument in node.args]
        if name in ("popcount", "parity"):
            count = arithmetic.popcount if name == "popcount" else arithmetic.parity
            return count(arguments[0], self.widths.get(node))
        return _FUNCTIONS[name](*arguments)

    def generator(self, node: ast.ListComp | ast.GeneratorExp, names: Names) -> Iterator[Any]:
        """The items one by one; the first list is evaluated at once, as Python does."""
        first = self.value(node.generators[0].iter, names)
        return self.items(node, 0, first, names)

    def items(
        self, node: ast.ListComp | ast.GeneratorExp, level: int, values: Iterable[Any], names: Names
    ) -> Iterator[Any]:
        generator = node.generators[level]
        for one in values:
            inner = {**names, **_bound(generator.target, one)}
            if not all(self.value(condition, inner) for condition in generator.ifs):
                continue
            if level + 1 == len(node.generators):
                yield self.value(node.elt, inner)
            else:
                following = self.value(node.generators[level + 1].iter, inner)
                yield from self.items(node, level + 1, following, inner)


def _bound(target: ast.expr, value: Any) -> dict[str, Any]:
    """The loop variables of one round."""
    if isinstance(target, ast.Name):
        return {target.id: value}
    assert isinstance(target, ast.Tuple | ast.List)
    if len(value) != len(target.elts):
        undefined = Undefined(refusals.UNPACK_REACHED, given=len(value), wanted=len(target.elts))
        undefined.node = target
        raise undefined
    return {part.id: one for part, one in zip(target.elts, value, strict=True) if isinstance(part, ast.Name)}


def _extreme(pick: Callable[..., int], name: str) -> Callable[..., int]:
    def of(*arguments: Any) -> int:
        if len(arguments) > 1:
            return pick(arguments)
        values = list(arguments[0])
        if not values:
            raise Undefined(refusals.EMPTY_LIST, name=name)
        return pick(values)

    return of


def _distinct(*arguments: Any) -> bool:
    values = list(arguments if len(arguments) > 1 else arguments[0])
    return len(set(values)) == len(values)


_FUNCTIONS: dict[str, Callable[..., Any]] = {
    "abs": arithmetic.absolute,
    "all": all,
    "any": any,
    "distinct": _distinct,
    "len": len,
    "max": _extreme(max, "max"),
    "min": _extreme(min, "min"),
    "pow": lambda x, k, m=None: arithmetic.power(x, k) if m is None else arithmetic.power_modulo(x, k, m),
    "range": arithmetic.stepped_range,
    "sum": sum,
}
