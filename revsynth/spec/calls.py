"""The rules for calls: which functions there are, what they take, and how large their results get."""

from __future__ import annotations

import ast
from collections.abc import Callable
from typing import TYPE_CHECKING

from revsynth.spec import bounds, refusals
from revsynth.spec.bounds import Interval
from revsynth.spec.kinds import TRUTH, UNREACHED, Kind, ListKind, NumberKind
from revsynth.spec.limits import MAX_STEPS
from revsynth.spec.names import FUNCTIONS

if TYPE_CHECKING:
    from revsynth.spec.checker import Checker, Names


class Calls:
    """Checks calls on behalf of a checker."""

    def __init__(self, checker: Checker) -> None:
        self.checker = checker
        self._checks: dict[str, Callable[[ast.Call, Names], Kind]] = {
            "abs": self._abs,
            "all": self._truths,
            "any": self._truths,
            "distinct": self._distinct,
            "len": self._len,
            "max": self._extreme,
            "min": self._extreme,
            "parity": self._ones,
            "popcount": self._ones,
            "pow": self._pow,
            "range": self._range,
            "sum": self._sum,
        }

    def check(self, node: ast.Call, names: Names) -> Kind:
        """The kind of a call; raises ExpressionError where it is not allowed."""
        refuse = self.checker.refuse
        if isinstance(node.func, ast.Attribute):
            raise refuse(node.func, refusals.ATTRIBUTE)
        if isinstance(node.func, ast.Lambda):
            raise refuse(node.func, refusals.LAMBDA)
        if not isinstance(node.func, ast.Name) or node.func.id not in FUNCTIONS:
            raise refuse(node, refusals.CALL, functions=", ".join(FUNCTIONS))
        name = node.func.id
        if node.keywords:
            keyword = node.keywords[0]
            raise refuse(keyword.value, refusals.KEYWORD, name=name, argument=keyword.arg or "**")
        for argument in node.args:
            if isinstance(argument, ast.Starred):
                raise refuse(argument, refusals.STARRED)
        fewest, most = FUNCTIONS[name]
        if len(node.args) < fewest or (most is not None and len(node.args) > most):
            raise refuse(node, refusals.ARITY, name=name, wanted=_wanted(fewest, most), given=len(node.args))
        return self._checks[name](node, names)

    def _list(self, node: ast.expr, names: Names) -> ListKind:
        """A list argument that is gone through once; a comprehension needs no square brackets."""
        if isinstance(node, ast.GeneratorExp):
            return self.checker.as_list(node, self.checker.comprehension(node, names))
        values = self.checker.as_list(node, self.checker.kind(node, names))
        self.checker.charge(node, values.length)
        return values

    def _numbers(self, node: ast.expr, names: Names) -> tuple[NumberKind, ListKind]:
        """A list of numbers: the kind of its items, and the list's own."""
        values = self._list(node, names)
        return self.checker.as_number(node, values.item), values

    def _abs(self, node: ast.Call, names: Names) -> Kind:
        return NumberKind(*bounds.absolute(self.checker.number(node.args[0], names).interval))

    def _truths(self, node: ast.Call, names: Names) -> Kind:
        self._numbers(node.args[0], names)
        return TRUTH

    def _distinct(self, node: ast.Call, names: Names) -> Kind:
        if len(node.args) > 1:
            for argument in node.args:
                self.checker.number(argument, names)
            return TRUTH
        _, values = self._numbers(node.args[0], names)
        self.checker.stored += values.length
        if not values.exact:
            self.checker.charge(node, values.length**2)
        return TRUTH

    def _len(self, node: ast.Call, names: Names) -> Kind:
        values = self.checker.as_list(node.args[0], self.checker.kind(node.args[0], names))
        return NumberKind(values.length if values.exact else 0, values.length)

    def _extreme(self, node: ast.Call, names: Names) -> Kind:
        if len(node.args) == 1:
            item, _ = self._numbers(node.args[0], names)
            return NumberKind(item.lo, item.hi)
        pick = bounds.least if node.func.id == "min" else bounds.greatest  # type: ignore[attr-defined]
        interval = self.checker.number(node.args[0], names).interval
        for argument in node.args[1:]:
            interval = pick(interval, self.checker.number(argument, names).interval)
        return NumberKind(*interval)

    def _ones(self, node: ast.Call, names: Names) -> Kind:
        number = self.checker.number(node.args[0], names)
        if number.width is not None:
            self.checker.widths[node] = number.width
        if node.func.id == "parity":  # type: ignore[attr-defined]
            return TRUTH
        bits = number.width.bits if number.width is not None else max(number.hi, 0).bit_length()
        return NumberKind(0, bits)

    def _pow(self, node: ast.Call, names: Names) -> Kind:
        x, k, *modulus = (self.checker.number(argument, names).interval for argument in node.args)
        return NumberKind(*(bounds.power_modulo(modulus[0]) if modulus else bounds.power(x, k)))

    def _range(self, node: ast.Call, names: Names) -> Kind:
        ends = [self.checker.number(argument, names).interval for argument in node.args]
        start, stop = ((0, 0), ends[0]) if len(ends) == 1 else (ends[0], ends[1])
        step = ends[2] if len(ends) == 3 else (1, 1)
        length = longest_range(start, stop, step)
        if length > MAX_STEPS:
            raise self.checker.refuse(node, refusals.TOO_MANY_STEPS, steps=length, limit=MAX_STEPS)
        exact = all(lo == hi for lo, hi in (start, stop, step))
        item = NumberKind(min(start[0], stop[0]), max(start[1], stop[1])) if length else UNREACHED
        if exact and length:
            values = range(start[0], stop[0], step[0])
            item = NumberKind(min(values[0], values[-1]), max(values[0], values[-1]))
        return ListKind(item, length, exact, "range")

    def _sum(self, node: ast.Call, names: Names) -> Kind:
        item, values = self._numbers(node.args[0], names)
        start = self.checker.number(node.args[1], names).interval if len(node.args) > 1 else (0, 0)
        least = values.length if values.exact else 0
        low = min(least * item.lo, values.length * item.lo)
        high = max(least * item.hi, values.length * item.hi)
        return NumberKind(start[0] + low, start[1] + high)


def longest_range(start: Interval, stop: Interval, step: Interval) -> int:
    """The greatest length of range(start, stop, step) over the intervals."""
    longest = 0
    if step[1] > 0:
        span, stride = stop[1] - start[0], max(step[0], 1)
        longest = max(longest, -(-span // stride))
    if step[0] < 0:
        span, stride = start[1] - stop[0], max(-step[1], 1)
        longest = max(longest, -(-span // stride))
    return longest


def _wanted(fewest: int, most: int | None) -> str:
    if most is None:
        return f"{fewest} or more arguments"
    if fewest == most:
        return f"{fewest} argument" + ("s" if fewest != 1 else "")
    return f"{fewest} to {most} arguments"
