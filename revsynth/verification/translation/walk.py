"""The walk over an expression's tree: every part said in gates, every branch and every loop written out.

Where an operation is undefined the value means nothing; that such an input is not reached inside the domain
is not shown here.
"""

from __future__ import annotations

import ast
from collections.abc import Callable, Iterator, Mapping
from typing import Any

from revsynth.spec.arithmetic import Width
from revsynth.spec.expression import Expression
from revsynth.spec.model import Constant
from revsynth.spec.syntax import chain
from revsynth.verification.translation.gates import (
    FALSE,
    TRUE,
    Bit,
    Gates,
    TooLargeToTranslateError,
    every,
    odd,
)
from revsynth.verification.translation.lists import Items, ListOperations, Value
from revsynth.verification.translation.numbers import (
    Arithmetic,
    Number,
    constant,
    truth,
)

Names = Mapping[str, Value]


def constant_value(value: Constant) -> Value:
    """A constant of the spec."""
    if isinstance(value, list):
        return Items.of([constant_value(item) for item in value])
    return constant(int(value))


class Walk:
    """Says one expression in gates."""

    def __init__(
        self, expression: Expression, gates: Gates, words: Names, *, by_columns: bool = False
    ) -> None:
        self.expression = expression
        self.gates = gates
        self.numbers = Arithmetic(gates, by_columns=by_columns)
        self.lists = ListOperations(self.numbers)
        constants = {name: constant_value(value) for name, value in expression.scope.constants.items()}
        self.names: Names = {**constants, **words}
        self._visits: dict[type[ast.expr], Callable[[Any, Names], Value]] = {
            ast.Constant: lambda node, names: constant(int(node.value)),
            ast.Name: lambda node, names: names[node.id],
            ast.BinOp: self._binary,
            ast.UnaryOp: self._unary,
            ast.BoolOp: self._logic,
            ast.Compare: self._compare,
            ast.IfExp: self._choice,
            ast.Subscript: self._subscript,
            ast.Call: self._call,
            ast.List: self._display,
            ast.Tuple: self._display,
            ast.ListComp: self._comprehension,
            ast.GeneratorExp: self._comprehension,
        }

    def result(self) -> Number:
        """The value of the whole expression."""
        return self._number(self.expression.tree, self.names)

    def _value(self, node: ast.expr, names: Names) -> Value:
        return self._visits[type(node)](node, names)

    def _number(self, node: ast.expr, names: Names) -> Number:
        value = self._value(node, names)
        if not isinstance(value, tuple):
            raise TooLargeToTranslateError("a list where a number is wanted")
        return value

    def _items(self, node: ast.expr, names: Names) -> Items:
        return _as_items(self._value(node, names))

    def _truth(self, node: ast.expr, names: Names) -> Bit:
        return self.numbers.nonzero(self._number(node, names))

    def _terms(self, node: ast.expr, names: Names, factor: int) -> list[tuple[Bit, int]]:
        """A part as bits with what they count, times a factor: sums and products are taken apart."""
        parts: list[tuple[ast.expr, int]] = []
        while isinstance(node, ast.BinOp) and isinstance(node.op, ast.Add | ast.Sub):
            parts.append((node.right, -factor if isinstance(node.op, ast.Sub) else factor))
            node = node.left
        if parts:
            parts.append((node, factor))
            return [term for part, by in reversed(parts) for term in self._terms(part, names, by)]
        if isinstance(node, ast.BinOp) and isinstance(node.op, ast.Mult):
            a, b = self._number(node.left, names), self._number(node.right, names)
            return self.numbers.partial_products(a, b, factor)
        return self.numbers.weighted(self._number(node, names), factor)

    def _binary(self, node: ast.BinOp, names: Names) -> Value:
        if self.numbers.by_columns and isinstance(node.op, ast.Add | ast.Sub):
            return self.numbers.total(self._terms(node, names, 1))
        first, operations = chain(node)
        result = self._number(first, names)
        for operation in operations:
            result = self._operate(operation.op, result, self._number(operation.right, names))
        return result

    def _operate(self, op: ast.operator, a: Number, b: Number) -> Number:
        numbers = self.numbers
        if isinstance(op, ast.FloorDiv | ast.Mod):
            return numbers.divide(a, b)[isinstance(op, ast.Mod)]
        if isinstance(op, ast.BitAnd | ast.BitOr | ast.BitXor):
            kind = "and" if isinstance(op, ast.BitAnd) else "or" if isinstance(op, ast.BitOr) else "xor"
            return numbers.bitwise(a, b, kind)
        plain: dict[type[ast.operator], Callable[[Number, Number], Number]] = {
            ast.Add: numbers.add,
            ast.Sub: numbers.subtract,
            ast.Mult: numbers.multiply,
            ast.Pow: numbers.power,
            ast.LShift: numbers.left_shift,
            ast.RShift: numbers.right_shift,
        }
        return plain[type(op)](a, b)

    def _unary(self, node: ast.UnaryOp, names: Names) -> Value:
        value = self._number(node.operand, names)
        if isinstance(node.op, ast.Not):
            return truth(self.numbers.nonzero(value) ^ 1)
        if isinstance(node.op, ast.USub):
            return self.numbers.negate(value)
        return self.numbers.invert(value) if isinstance(node.op, ast.Invert) else value

    def _logic(self, node: ast.BoolOp, names: Names) -> Value:
        """`a and b` is b where a is not 0, else a; later parts are not looked at where none reaches them."""
        parts: list[Number] = []
        stops = FALSE if isinstance(node.op, ast.And) else TRUE
        for part in node.values:
            parts.append(self._number(part, names))
            if self.numbers.nonzero(parts[-1]) == stops:
                break
        result = parts.pop()
        while parts:
            part_value = parts.pop()
            holds = self.numbers.nonzero(part_value)
            goes_on = holds if isinstance(node.op, ast.And) else holds ^ 1
            result = self.numbers.choose(goes_on, result, part_value)
        return result

    def _compare(self, node: ast.Compare, names: Names) -> Value:
        found = []
        left = self._value(node.left, names)
        for op, part in zip(node.ops, node.comparators, strict=True):
            right = self._value(part, names)
            found.append(self._related(op, left, right))
            if found[-1] == FALSE:
                break
            left = right
        return truth(every(self.gates, found))

    def _related(self, op: ast.cmpop, left: Value, right: Value) -> Bit:
        if isinstance(op, ast.In | ast.NotIn):
            return self.lists.contains(left, _as_items(right)) ^ isinstance(op, ast.NotIn)
        if isinstance(op, ast.Eq | ast.NotEq):
            return self.lists.equal(left, right) ^ isinstance(op, ast.NotEq)
        if not isinstance(left, tuple) or not isinstance(right, tuple):
            raise TooLargeToTranslateError("an order of lists")
        swap = isinstance(op, ast.Gt | ast.LtE)
        less = self.numbers.less(right, left) if swap else self.numbers.less(left, right)
        return less ^ isinstance(op, ast.LtE | ast.GtE)

    def _choice(self, node: ast.IfExp, names: Names) -> Value:
        condition = self._truth(node.test, names)
        if condition < 2:
            return self._value(node.body if condition else node.orelse, names)
        return self.lists.choose(condition, self._value(node.body, names), self._value(node.orelse, names))

    def _subscript(self, node: ast.Subscript, names: Names) -> Value:
        base = self._value(node.value, names)
        width = self.expression.widths.get(node)
        if width is None:
            return self.lists.item(_as_items(base), self._number(node.slice, names))
        if not isinstance(base, tuple):
            raise TooLargeToTranslateError("bits of a list")
        pattern = self.numbers.extended(base, width.bits)[: width.bits]
        if isinstance(node.slice, ast.Slice):
            low = self._number(node.slice.lower, names) if node.slice.lower else constant(0)
            high = self._number(node.slice.upper, names) if node.slice.upper else constant(width.bits)
            return self._bits(pattern, low, high)
        bits = Items.of([truth(bit) for bit in pattern])
        return self.lists.item(bits, self._number(node.slice, names))

    def _bits(self, pattern: Number, low: Number, high: Number) -> Number:
        """Bits low to high - 1: moved down, and cut by ones as long as the part."""
        moved = self.numbers.right_shift((*pattern, FALSE), low)
        ones = self.numbers.left_shift(constant(1), self.numbers.subtract(high, low))
        return self.numbers.bitwise(moved, self.numbers.subtract(ones, constant(1)), "and")

    def _display(self, node: ast.List | ast.Tuple, names: Names) -> Value:
        return Items.of([self._value(item, names) for item in node.elts])

    def _comprehension(self, node: ast.ListComp | ast.GeneratorExp, names: Names) -> Value:
        return Items(tuple(self._rounds(node, 0, names, TRUE)))

    def _rounds(
        self, node: ast.ListComp | ast.GeneratorExp, level: int, names: Names, reached: Bit
    ) -> Iterator[tuple[Bit, Value]]:
        generator = node.generators[level]
        for present, one in self._items(generator.iter, names).entries:
            here = self.gates.both(reached, present)
            inner = {**names, **self._bound(generator.target, one)}
            for condition in generator.ifs:
                if here == FALSE:
                    break
                here = self.gates.both(here, self._truth(condition, inner))
            if here == FALSE:
                continue
            if level + 1 == len(node.generators):
                yield here, self._value(node.elt, inner)
            else:
                yield from self._rounds(node, level + 1, inner, here)

    def _bound(self, target: ast.expr, value: Value) -> dict[str, Value]:
        if isinstance(target, ast.Name):
            return {target.id: value}
        assert isinstance(target, ast.Tuple | ast.List)
        items = _as_items(value)
        return {
            part.id: self.lists.item(items, constant(place))
            for place, part in enumerate(target.elts)
            if isinstance(part, ast.Name)
        }

    def _call(self, node: ast.Call, names: Names) -> Value:
        assert isinstance(node.func, ast.Name)
        name = node.func.id
        if name in ("popcount", "parity"):
            return self._ones(node, name, names)
        if name in ("sum", "any", "all", "len", "distinct", "min", "max"):
            return self._over_list(node, name, names)
        arguments = [self._number(argument, names) for argument in node.args]
        if name == "abs":
            return self.numbers.absolute(arguments[0])
        if name == "range":
            return self.lists.range(arguments)
        if len(arguments) == 3:
            return self.numbers.power_modulo(arguments[0], arguments[1], arguments[2])
        return self.numbers.power(arguments[0], arguments[1])

    def _ones(self, node: ast.Call, name: str, names: Names) -> Number:
        number = self._number(node.args[0], names)
        width: Width | None = self.expression.widths.get(node)
        bits = number if width is None else self.numbers.extended(number, width.bits)[: width.bits]
        return truth(odd(self.gates, bits)) if name == "parity" else self.numbers.count(bits)

    def _over_list(self, node: ast.Call, name: str, names: Names) -> Value:
        several = len(node.args) > 1 and name != "sum"
        if several:
            items = Items.of([self._number(argument, names) for argument in node.args])
        else:
            items = self._items(node.args[0], names)
        lists, numbers = self.lists, self.numbers
        if name == "sum":
            return lists.sum(items, self._number(node.args[1], names) if len(node.args) > 1 else constant(0))
        if name == "len":
            return lists.length(items)
        if name == "min":
            return lists.extreme(items, numbers.less)
        if name == "max":
            return lists.extreme(items, lambda item, best: numbers.less(best, item))
        answer = {"any": lists.any, "all": lists.all, "distinct": lists.distinct}[name]
        return truth(answer(items))


def _as_items(value: Value) -> Items:
    if not isinstance(value, Items):
        raise TooLargeToTranslateError("a number where a list is wanted")
    return value
