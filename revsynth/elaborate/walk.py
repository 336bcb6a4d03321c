"""From an expression to literals, in Python's order of evaluation.

What Python would not reach for an input is built, but its undefined operations do not count there.
"""

from __future__ import annotations

import ast
from collections.abc import Callable
from dataclasses import dataclass, field
from typing import Any

from revsynth.elaborate import lists
from revsynth.elaborate.bitwise import absolute, larger, parity, popcount, select, smaller, truth
from revsynth.elaborate.index import bit, bit_slice
from revsynth.elaborate.linear import plain
from revsynth.elaborate.loops import Loops, Pick, known
from revsynth.elaborate.modular_power import power_modulo
from revsynth.elaborate.numbers import Bits, Number, Sum, is_truth, truth_number
from revsynth.elaborate.operators import add_all, binary, compare, unary
from revsynth.elaborate.reach import Reach
from revsynth.elaborate.repeated import repeated_operands
from revsynth.elaborate.rotations import LINKS, rotated, rotation_at
from revsynth.elaborate.values import Items, Stepped, Value, as_number, is_number
from revsynth.logic.network import FALSE, TRUE, Literal
from revsynth.spec.expression import Expression
from revsynth.spec.syntax import chain

Pair = tuple[ast.Compare, int]
"""One pair of a comparison chain, by its node and place."""


@dataclass
class Walk:
    """Walks the tree of one expression; recursion is bounded by the nesting that the parser allows.

    `answers` notes, for each comparison of something that depends on the input, which literals it gave.
    """

    expression: Expression
    answers: dict[Pair, set[Literal]] = field(default_factory=dict)
    _repeated: frozenset[ast.expr] = field(init=False, repr=False)
    _visits: dict[type[ast.expr], Callable[[Any, Reach], Value]] = field(init=False, repr=False)
    _calls: dict[str, Callable[[ast.Call, Reach], Value]] = field(init=False, repr=False)

    def __post_init__(self) -> None:
        self._repeated = repeated_operands(self.expression.tree)
        loops = Loops(self)
        self._visits = {
            ast.Constant: lambda node, reach: int(node.value),
            ast.Name: self._name,
            ast.BinOp: self._binary,
            ast.UnaryOp: lambda node, reach: unary(type(node.op), self.number(node.operand, reach), reach),
            ast.BoolOp: self._logic,
            ast.Compare: self._compare,
            ast.IfExp: self._choice,
            ast.Subscript: self._subscript,
            ast.Call: lambda node, reach: self._calls[node.func.id](node, reach),
            ast.List: self._display,
            ast.Tuple: self._display,
            ast.ListComp: loops.listed,
        }
        self._calls = {
            "abs": lambda node, reach: absolute(reach.builder, self.number(node.args[0], reach)),
            "all": loops.truths,
            "any": loops.truths,
            "distinct": loops.distinct,
            "len": lambda node, reach: lists.length(self.value(node.args[0], reach), reach),
            "max": lambda node, reach: self._extreme(node, reach, larger, loops),
            "min": lambda node, reach: self._extreme(node, reach, smaller, loops),
            "parity": self._ones,
            "popcount": self._ones,
            "pow": self._pow,
            "range": lambda node, reach: lists.stepped(self._numbers(node.args, reach), reach),
            "sum": loops.total,
        }

    def value(self, node: ast.expr, reach: Reach) -> Value:
        """The value of one part."""
        reach.build.check_size()
        return self._visits[type(node)](node, reach)

    def number(self, node: ast.expr, reach: Reach) -> Number:
        """The value of a part that is a number."""
        return as_number(self.value(node, reach))

    def condition(self, node: ast.expr, reach: Reach) -> Literal:
        """Where a part is not 0."""
        return truth(reach.builder, self.number(node, reach))

    def _numbers(self, nodes: list[ast.expr], reach: Reach) -> list[Number]:
        return [self.number(node, reach) for node in nodes]

    def _display(self, node: ast.List | ast.Tuple, reach: Reach) -> Value:
        return lists.display([known(self.value(part, reach), reach) for part in node.elts])

    def _name(self, node: ast.Name, reach: Reach) -> Value:
        if node.id in reach.names:
            return reach.names[node.id]
        if node.id in reach.build.words:
            return reach.build.words[node.id]
        return self.expression.scope.constants[node.id]

    def _binary(self, node: ast.BinOp, reach: Reach) -> Value:
        first, operations = chain(node)
        result = self.number(first, reach)
        position = 0
        while position < len(operations):
            here = operations[position]
            turned = self._rotation(operations, position, result, reach)
            if turned is not None:
                result = turned
                position += LINKS
            elif isinstance(here.op, ast.Add | ast.Sub):
                terms: list[tuple[Number, int]] = [(result, 1)]
                while position < len(operations) and isinstance(operations[position].op, ast.Add | ast.Sub):
                    here = operations[position]
                    terms.append((self.number(here.right, reach), 1 if isinstance(here.op, ast.Add) else -1))
                    position += 1
                result = add_all(terms, reach)
            else:
                result = binary(type(here.op), result, self.number(here.right, reach), reach)
                position += 1
        return result

    def _rotation(self, operations: list[ast.BinOp], position: int, x: Number, reach: Reach) -> Number | None:
        """The rotation that begins at an operation of a chain; None where there is none."""
        found = rotation_at(operations, position)
        if found is None:
            return None
        bits = self.number(found.bits, reach)
        if not found.fits(bits, self.number(found.cut, reach), x):
            return None
        assert isinstance(bits, int)
        return rotated(x, self.number(found.count, reach), bits, found.upward, reach)

    def _logic(self, node: ast.BoolOp, reach: Reach) -> Value:
        """`and` and `or`: an operand, which for truth values is their AND or OR."""
        builder, conjunction = reach.builder, isinstance(node.op, ast.And)
        numbers: list[Number] = []
        conditions: list[Literal] = []
        on: Reach | None = reach
        for part in node.values:
            if on is None:
                break
            numbers.append(self.number(part, on))
            if part is node.values[-1]:
                break
            conditions.append(truth(builder, numbers[-1]))
            on = on.narrow(conditions[-1] ^ (not conjunction))
        if all(map(is_truth, numbers)):
            join = builder.all_of if conjunction else builder.any_of
            return truth_number(join([*conditions, truth(builder, numbers[-1])]))
        result = numbers.pop()
        for number, holds in zip(reversed(numbers), reversed(conditions[: len(numbers)]), strict=True):
            other = 0 if conjunction else number  # what stops an `and` is 0
            result = select(builder, holds ^ (not conjunction), result, other)
        return result

    def _choice(self, node: ast.IfExp, reach: Reach) -> Value:
        holds = self.condition(node.test, reach)
        then, otherwise = reach.narrow(holds), reach.narrow(holds ^ 1)
        if then is None or otherwise is None:
            return self.value(node.orelse if then is None else node.body, reach)
        left = self.value(node.body, then)
        return lists.joined(holds, left, self.value(node.orelse, otherwise), reach)

    def _compare(self, node: ast.Compare, reach: Reach) -> Value:
        found: list[Literal] = []
        on: Reach | None = reach
        left = self._operand(node.left, reach)
        for place, (op, part) in enumerate(zip(node.ops, node.comparators, strict=True)):
            if on is None:
                break
            right = self._operand(part, on)
            if place + 1 < len(node.ops):
                right = known(right, on)
            answer = _answer(op, left, right, on)
            if _depends(left) or _depends(right):
                self.answers.setdefault((node, place), set()).add(answer)
            found.append(answer)
            left, on = right, on.narrow(answer)
        return truth_number(reach.builder.all_of(found))

    def _operand(self, node: ast.expr, reach: Reach) -> Value:
        """A side of a comparison, added up where it is compared again elsewhere."""
        value = self.value(node, reach)
        return known(value, reach) if node in self._repeated else value

    def _subscript(self, node: ast.Subscript, reach: Reach) -> Value:
        base = self.value(node.value, reach)
        width = self.expression.widths.get(node)
        if width is None:
            return lists.item(base, self.number(node.slice, reach), reach)
        word = plain(reach.builder, as_number(base))
        if isinstance(node.slice, ast.Slice):
            lower, upper = node.slice.lower, node.slice.upper
            lo = self.number(lower, reach) if lower else 0
            hi = self.number(upper, reach) if upper else width.bits
            return bit_slice(word, lo, hi, width, reach)
        return bit(word, self.number(node.slice, reach), width, reach)

    def _ones(self, node: ast.Call, reach: Reach) -> Value:
        assert isinstance(node.func, ast.Name)
        number, width = self.number(node.args[0], reach), self.expression.widths.get(node)
        return (popcount if node.func.id == "popcount" else parity)(number, width, reach)

    def _pow(self, node: ast.Call, reach: Reach) -> Value:
        x, k, *modulus = self._numbers(node.args, reach)
        return power_modulo(x, k, modulus[0], reach) if modulus else binary(ast.Pow, x, k, reach)

    def _extreme(self, node: ast.Call, reach: Reach, pick: Pick, loops: Loops) -> Value:
        assert isinstance(node.func, ast.Name)
        if len(node.args) == 1:
            return loops.extreme(node.args[0], pick, node.func.id, reach)
        first, *others = self._numbers(node.args, reach)
        for other in others:
            first = pick(reach.builder, first, other)
        return first


def _answer(op: ast.cmpop, left: Value, right: Value, reach: Reach) -> Literal:
    if isinstance(op, ast.In | ast.NotIn):
        return lists.contains(right, left, reach) ^ isinstance(op, ast.NotIn)
    if is_number(left) and is_number(right):
        return compare(type(op), as_number(left), as_number(right), reach.builder)
    return lists.equal(left, right, reach) ^ isinstance(op, ast.NotEq)


def _depends(value: Value) -> bool:
    """True where a value depends on the input."""
    if isinstance(value, Items):
        return any(there not in (FALSE, TRUE) for there in value.present) or any(map(_depends, value.values))
    return isinstance(value, Bits | Sum | Stepped)
