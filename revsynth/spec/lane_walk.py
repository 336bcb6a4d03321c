"""Evaluation of an expression on many inputs at once, in Python's order of evaluation.

What Python would not reach for an input is not evaluated for it: the lanes are narrowed at every
`and`, `or`, `if` and comparison chain. Comprehensions are unrolled.
"""

from __future__ import annotations

import ast
from collections.abc import Callable
from dataclasses import dataclass, field
from typing import Any

from revsynth.spec import lane_bits, lane_lists
from revsynth.spec.expression import Expression
from revsynth.spec.lane_lists import both, joined, negated
from revsynth.spec.lane_loops import Loops
from revsynth.spec.lane_numbers import absolute, binary, compare, larger, smaller, truth, unary
from revsynth.spec.lane_values import Items, Mask, Number, Numbers, Stepped, Value, is_truth, select, truths
from revsynth.spec.lanes import Lanes
from revsynth.spec.syntax import chain


@dataclass
class Comparison:
    """What a comparison has answered so far, where it was reached."""

    ever: bool = False
    never: bool = False
    everywhere: bool = True


@dataclass
class Walk:
    """Walks the tree of one expression; recursion is bounded by the nesting that the parser allows.

    `comparisons` notes, for each comparison of something that depends on the input (a pair of a chain
    by its node and place), which answers it gave.
    """

    expression: Expression
    comparisons: dict[tuple[ast.Compare, int], Comparison] | None = None
    _visits: dict[type[ast.expr], Callable[[Any, Lanes], Value]] = field(init=False, repr=False)
    _calls: dict[str, Callable[[ast.Call, Lanes], Value]] = field(init=False, repr=False)

    def __post_init__(self) -> None:
        loops = Loops(self)
        self._visits = {
            ast.Constant: lambda node, lanes: node.value,
            ast.Name: self._name,
            ast.BinOp: self._binary,
            ast.UnaryOp: lambda node, lanes: unary(type(node.op), self.number(node.operand, lanes), lanes),
            ast.BoolOp: self._logic,
            ast.Compare: self._compare,
            ast.IfExp: self._choice,
            ast.Subscript: self._subscript,
            ast.Call: lambda node, lanes: self._calls[node.func.id](node, lanes),
            ast.List: lambda node, lanes: lane_lists.display(self._all(node.elts, lanes)),
            ast.Tuple: lambda node, lanes: lane_lists.display(self._all(node.elts, lanes)),
            ast.ListComp: loops.listed,
        }
        self._calls = {
            "abs": lambda node, lanes: absolute(self.number(node.args[0], lanes), lanes),
            "all": loops.truths,
            "any": loops.truths,
            "distinct": loops.distinct,
            "len": lambda node, lanes: lane_lists.length(self.value(node.args[0], lanes), lanes),
            "max": lambda node, lanes: self._extreme(node, lanes, larger, loops),
            "min": lambda node, lanes: self._extreme(node, lanes, smaller, loops),
            "parity": lambda node, lanes: self._ones(lane_bits.parity, node, lanes),
            "popcount": lambda node, lanes: self._ones(lane_bits.popcount, node, lanes),
            "pow": self._pow,
            "range": lambda node, lanes: lane_lists.stepped(self._numbers(node.args, lanes), lanes),
            "sum": loops.total,
        }

    def value(self, node: ast.expr, lanes: Lanes) -> Value:
        """The value of one part on the given lanes."""
        return self._visits[type(node)](node, lanes)

    def number(self, node: ast.expr, lanes: Lanes) -> Number:
        """The value of a part that is a number."""
        value = self.value(node, lanes)
        assert isinstance(value, int | Numbers)
        return value

    def condition(self, node: ast.expr, lanes: Lanes) -> bool | Mask:
        """Where a part is not 0."""
        return truth(self.number(node, lanes))

    def answer(self, node: ast.Compare, place: int, lanes: Lanes) -> bool | Mask:
        """The answer of one pair of a comparison, whether the pairs before it hold or not."""
        left, op, right = pair(node, place)
        return _answer(op, self.value(left, lanes), self.value(right, lanes), lanes)

    def _all(self, nodes: list[ast.expr], lanes: Lanes) -> list[Value]:
        return [self.value(node, lanes) for node in nodes]

    def _numbers(self, nodes: list[ast.expr], lanes: Lanes) -> list[Number]:
        return [self.number(node, lanes) for node in nodes]

    def _name(self, node: ast.Name, lanes: Lanes) -> Value:
        if node.id in lanes.names:
            return lanes.names[node.id]
        if node.id in lanes.layout:
            return lanes.word(node.id)
        return self.expression.scope.constants[node.id]

    def _binary(self, node: ast.BinOp, lanes: Lanes) -> Value:
        first, operations = chain(node)
        result = self.number(first, lanes)
        for operation in operations:
            result = binary(type(operation.op), result, self.number(operation.right, lanes), lanes)
        return result

    def _logic(self, node: ast.BoolOp, lanes: Lanes) -> Value:
        goes_on_where = isinstance(node.op, ast.And)
        result = self.number(node.values[0], lanes)
        for part in node.values[1:]:
            holds = truth(result)
            if isinstance(holds, bool):
                if holds is not goes_on_where:
                    break
                result = self.number(part, lanes)
                continue
            goes_on = holds if goes_on_where else ~holds
            reached = lanes.narrow(goes_on)
            if reached is None:
                break
            right = reached.widened(self.number(part, reached), lanes)
            assert isinstance(right, int | Numbers)
            result = _combined(goes_on_where, holds, result, right)
        return result

    def _choice(self, node: ast.IfExp, lanes: Lanes) -> Value:
        holds = self.condition(node.test, lanes)
        if isinstance(holds, bool):
            return self.value(node.body if holds else node.orelse, lanes)
        then, otherwise = lanes.narrow(holds), lanes.narrow(~holds)
        if then is None or otherwise is None:
            return self.value(node.orelse if then is None else node.body, lanes)
        left = then.widened(self.value(node.body, then), lanes)
        return joined(holds, left, otherwise.widened(self.value(node.orelse, otherwise), lanes))

    def _compare(self, node: ast.Compare, lanes: Lanes) -> Value:
        result: bool | Mask = True
        reached: Lanes | None = lanes
        left, at = self.value(node.left, lanes), lanes
        for place, (op, part) in enumerate(zip(node.ops, node.comparators, strict=True)):
            if reached is None:
                break
            left, at = reached.narrowed(left, at), reached
            right = self.value(part, reached)
            answer = _answer(op, left, right, reached)
            if self.comparisons is not None:
                self._note((node, place), left, right, answer, reached)
            wide = answer if isinstance(answer, bool) else reached.widened(truths(answer), lanes)
            result = both(result, wide.array if isinstance(wide, Numbers) else bool(wide))
            left = right
            if place + 1 < len(node.ops):
                reached = reached.narrow(answer)
        return result if isinstance(result, bool) else truths(result)

    def _note(
        self, key: tuple[ast.Compare, int], left: Value, right: Value, answer: bool | Mask, lanes: Lanes
    ) -> None:
        """Remember which answers a comparison gave on the lanes in use."""
        if not (_depends(left) or _depends(right)):
            return
        assert self.comparisons is not None
        seen = self.comparisons.setdefault(key, Comparison())
        if isinstance(answer, bool):
            seen.ever, seen.never = seen.ever or answer, seen.never or not answer
        elif not (seen.ever and seen.never):
            used = answer if lanes.active is None else answer[lanes.active]
            seen.ever, seen.never = seen.ever or bool(used.any()), seen.never or not used.all()
        seen.everywhere = seen.everywhere and lanes.active is None and lanes.rows is None

    def _subscript(self, node: ast.Subscript, lanes: Lanes) -> Value:
        base = self.value(node.value, lanes)
        width = self.expression.widths.get(node)
        if width is None:
            return lane_lists.item(base, self.number(node.slice, lanes), lanes)
        assert isinstance(base, int | Numbers)
        if isinstance(node.slice, ast.Slice):
            lower, upper = node.slice.lower, node.slice.upper
            lo = self.number(lower, lanes) if lower else 0
            hi = self.number(upper, lanes) if upper else width.bits
            return lane_bits.bit_slice(base, lo, hi, width, lanes)
        return lane_bits.bit(base, self.number(node.slice, lanes), width, lanes)

    def _ones(self, count: Callable[..., Number], node: ast.Call, lanes: Lanes) -> Value:
        return count(self.number(node.args[0], lanes), self.expression.widths.get(node), lanes)

    def _pow(self, node: ast.Call, lanes: Lanes) -> Value:
        x, k, *modulus = self._numbers(node.args, lanes)
        return lane_bits.power_modulo(x, k, modulus[0], lanes) if modulus else binary(ast.Pow, x, k, lanes)

    def _extreme(
        self, node: ast.Call, lanes: Lanes, pick: Callable[[Number, Number, Lanes], Number], loops: Loops
    ) -> Value:
        if len(node.args) == 1:
            return loops.extreme(node.args[0], pick, lanes)
        first, *others = self._numbers(node.args, lanes)
        for other in others:
            first = pick(first, other, lanes)
        return first


def pair(node: ast.Compare, place: int) -> tuple[ast.expr, ast.cmpop, ast.expr]:
    """Both sides and the operator of one pair of a comparison chain."""
    left = node.comparators[place - 1] if place else node.left
    return left, node.ops[place], node.comparators[place]


def _combined(conjunction: bool, holds: Mask, left: Number, right: Number) -> Number:
    """left and right, or left or right, where `holds` tells where left is not 0."""
    if is_truth(left) and is_truth(right):
        other = right.array if isinstance(right, Numbers) else right
        return truths(holds & other if conjunction else holds | other)
    return select(holds, right, left) if conjunction else select(holds, left, right)


def _answer(op: ast.cmpop, left: Value, right: Value, lanes: Lanes) -> bool | Mask:
    if isinstance(op, ast.In):
        return lane_lists.contains(right, left, lanes)
    if isinstance(op, ast.NotIn):
        return negated(lane_lists.contains(right, left, lanes))
    if isinstance(left, int | Numbers) and isinstance(right, int | Numbers):
        return compare(type(op), left, right)
    same = lane_lists.equal(left, right, lanes)
    return same if isinstance(op, ast.Eq) else negated(same)


def _depends(value: Value) -> bool:
    """True where a value depends on the input."""
    if isinstance(value, Items):
        return any(present is not None for present in value.present) or any(map(_depends, value.values))
    return isinstance(value, Numbers | Stepped)
