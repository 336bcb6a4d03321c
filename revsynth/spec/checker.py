"""The language's rules: what is allowed, what goes together, and how large it can get.

The checker walks a syntax tree once, with intervals for values. Whatever passes can be evaluated for any
input: the only errors left are the undefined operations of `arithmetic`, where an input reaches them.
"""

from __future__ import annotations

import ast
from collections.abc import Callable, Mapping
from typing import Any

from revsynth.spec import bounds, refusals
from revsynth.spec.arithmetic import Width
from revsynth.spec.calls import Calls
from revsynth.spec.kinds import (
    MIXED,
    TRUTH,
    UNREACHED,
    Kind,
    ListKind,
    MixedKind,
    NumberKind,
    Unreached,
    constant_kind,
    join,
    join_all,
    word_kind,
)
from revsynth.spec.limits import MAX_BITS, MAX_STEPS
from revsynth.spec.model import Constant, Word
from revsynth.spec.names import FUNCTIONS, why_not_a_name
from revsynth.spec.refusals import Refusal
from revsynth.spec.syntax import Origin, chain

Names = Mapping[str, Kind]
"""Loop variables that are in reach."""

_REFUSED: dict[type[ast.expr], Refusal] = {
    ast.Attribute: refusals.ATTRIBUTE,
    ast.Lambda: refusals.LAMBDA,
    ast.NamedExpr: refusals.WALRUS,
    ast.Starred: refusals.STARRED,
    ast.Dict: refusals.DICTIONARY,
    ast.Set: refusals.DICTIONARY,
    ast.SetComp: refusals.DICTIONARY,
    ast.DictComp: refusals.DICTIONARY,
    ast.Await: refusals.AWAIT,
    ast.Yield: refusals.YIELD,
    ast.YieldFrom: refusals.YIELD,
    ast.GeneratorExp: refusals.GENERATOR,
}


class Checker:
    """Checks one expression; `widths` then holds the word width of each node whose bits are looked at."""

    def __init__(self, origin: Origin, words: Mapping[str, Word], constants: Mapping[str, Constant]) -> None:
        self.origin = origin
        self.words = words
        self.constants = constants
        self.widths: dict[ast.expr, Width] = {}
        self.steps = 0
        self.stored = 0
        self._times = 1
        self._constant_kinds: dict[str, Kind] = {}
        self._kinds: dict[ast.expr, Kind] = {}
        self._calls = Calls(self)
        self._visits: dict[type[ast.expr], Callable[[Any, Names], Kind]] = {
            ast.Constant: self._literal,
            ast.Name: self._name,
            ast.BinOp: self._binary,
            ast.UnaryOp: self._unary,
            ast.BoolOp: self._logic,
            ast.Compare: self._compare,
            ast.IfExp: self._choice,
            ast.Subscript: self._subscript,
            ast.Call: self._calls.check,
            ast.List: self._display,
            ast.Tuple: self._display,
            ast.ListComp: self.comprehension,
        }

    def kind(self, node: ast.expr, names: Names) -> Kind:
        """The kind of a part; raises ExpressionError where it is not allowed."""
        if node not in self._kinds:  # each part stands in one place, so it is worked out once
            visit = self._visits.get(type(node))
            if visit is None:
                raise self.refuse(node, _REFUSED.get(type(node), refusals.OTHER))
            self._kinds[node] = visit(node, names)
        return self._kinds[node]

    def number(self, node: ast.expr, names: Names) -> NumberKind:
        """The kind of a part that must be a number."""
        return self.as_number(node, self.kind(node, names))

    def as_number(self, node: ast.expr, kind: Kind) -> NumberKind:
        """A kind found at a node, which must be a number."""
        if isinstance(kind, Unreached):
            return NumberKind(0, 0)
        if isinstance(kind, NumberKind):
            return kind
        raise self.refuse(node, refusals.MIXED if isinstance(kind, MixedKind) else refusals.NOT_A_NUMBER)

    def as_list(self, node: ast.expr, kind: Kind) -> ListKind:
        """A kind found at a node, which must be a list."""
        if isinstance(kind, Unreached):
            return ListKind(UNREACHED, 0)
        if isinstance(kind, ListKind):
            return kind
        raise self.refuse(node, refusals.MIXED if isinstance(kind, MixedKind) else refusals.NOT_A_LIST)

    def charge(self, node: ast.expr, steps: int) -> None:
        """Count loop steps, and refuse the expression where there may be too many."""
        self.steps += self._times * steps
        if self.steps > MAX_STEPS:
            raise self.refuse(node, refusals.TOO_MANY_STEPS, steps=self.steps, limit=MAX_STEPS)

    def refuse(self, node: ast.AST, refusal: Refusal, **fields: Any) -> Exception:
        """The error for a node."""
        return self.origin.error_at(node, refusal, **fields)

    # --- names and literals ---

    def _literal(self, node: ast.Constant, names: Names) -> Kind:
        value = node.value
        if not isinstance(value, int):
            fraction = isinstance(value, float | complex)
            raise self.refuse(node, refusals.FLOAT if fraction else refusals.LITERAL)
        if value.bit_length() > MAX_BITS:
            raise self.refuse(node, refusals.HUGE_LITERAL, bits=value.bit_length(), limit=MAX_BITS)
        return NumberKind(int(value), int(value))

    def _name(self, node: ast.Name, names: Names) -> Kind:
        name = node.id
        if name in names:
            return names[name]
        if name in self.words:
            return word_kind(self.words[name])
        if name in self.constants:
            if name not in self._constant_kinds:
                self._constant_kinds[name] = self._constant(node)
            return self._constant_kinds[name]
        if name in FUNCTIONS:
            raise self.refuse(node, refusals.UNCALLED, name=name)
        known = ", ".join([*self.words, *self.constants, *names]) or "(none)"
        raise self.refuse(node, refusals.UNKNOWN_NAME, name=name, names=known)

    def _constant(self, node: ast.Name) -> Kind:
        try:
            kind = constant_kind(self.constants[node.id])
        except (RecursionError, TypeError):
            raise self.refuse(node, refusals.CONSTANT, name=node.id, limit=MAX_BITS) from None
        pending = kind
        while isinstance(pending, ListKind):
            pending = pending.item
        if isinstance(pending, NumberKind) and max(map(int.bit_length, pending.interval)) > MAX_BITS:
            raise self.refuse(node, refusals.CONSTANT, name=node.id, limit=MAX_BITS)
        return kind

    # --- operators ---

    def _binary(self, node: ast.BinOp, names: Names) -> Kind:
        first, operations = chain(node)
        interval = self.number(first, names).interval
        for operation in operations:
            if isinstance(operation.op, ast.Div):
                raise self.refuse(operation, refusals.TRUE_DIVISION)
            if isinstance(operation.op, ast.MatMult):
                raise self.refuse(operation, refusals.MATRIX_PRODUCT)
            right = self.number(operation.right, names)
            interval = bounds.BINARY[type(operation.op)](interval, right.interval)
        return NumberKind(*interval)

    def _unary(self, node: ast.UnaryOp, names: Names) -> Kind:
        interval = self.number(node.operand, names).interval
        if isinstance(node.op, ast.Not):
            return TRUTH
        if isinstance(node.op, ast.USub):
            interval = bounds.negate(interval)
        elif isinstance(node.op, ast.Invert):
            interval = bounds.invert(interval)
        return NumberKind(*interval)

    def _logic(self, node: ast.BoolOp, names: Names) -> Kind:
        return join_all([self.number(value, names) for value in node.values])

    def _choice(self, node: ast.IfExp, names: Names) -> Kind:
        self.number(node.test, names)
        return join(self.kind(node.body, names), self.kind(node.orelse, names))

    def _compare(self, node: ast.Compare, names: Names) -> Kind:
        left_node, left = node.left, self.kind(node.left, names)
        for op, right_node in zip(node.ops, node.comparators, strict=True):
            if isinstance(op, ast.Is | ast.IsNot):
                raise self.refuse(left_node, refusals.IDENTITY)
            right = self.kind(right_node, names)
            if isinstance(op, ast.In | ast.NotIn):
                values = self.as_list(right_node, right)
                self.charge(right_node, values.length)
                self._comparable(left_node, left, right_node, values.item)
            elif isinstance(op, ast.Eq | ast.NotEq):
                self._comparable(left_node, left, right_node, right)
            else:
                if isinstance(left, ListKind) and isinstance(right, ListKind):
                    raise self.refuse(left_node, refusals.LIST_COMPARISON)
                self.as_number(left_node, left)
                self.as_number(right_node, right)
            left_node, left = right_node, right
        return TRUTH

    def _comparable(self, left_node: ast.expr, left: Kind, right_node: ast.expr, right: Kind) -> None:
        """Refuse an equality that Python answers by type, not by value."""
        if isinstance(left, ListKind) and isinstance(right, ListKind):
            self.charge(right_node, min(left.length, right.length))
            if left.form != right.form or left.form not in ("list", "tuple"):
                shown = {"left": self.origin.shown(left_node), "right": self.origin.shown(right_node)}
                raise self.refuse(left_node, refusals.FORMS, **shown)
            self._comparable(left_node, left.item, right_node, right.item)
        elif not (isinstance(left, Unreached) or isinstance(right, Unreached)):
            self.as_number(left_node, left)
            self.as_number(right_node, right)

    # --- lists ---

    def _display(self, node: ast.List | ast.Tuple, names: Names) -> Kind:
        item = join_all([self.kind(value, names) for value in node.elts])
        return ListKind(item, len(node.elts), form="list" if isinstance(node, ast.List) else "tuple")

    def comprehension(self, node: ast.ListComp | ast.GeneratorExp, names: Names) -> Kind:
        """The list of a comprehension, whose loops are counted as steps."""
        before, length, exact = self._times, 1, True
        for generator in node.generators:
            if generator.is_async:
                raise self.refuse(generator.target, refusals.AWAIT)
            values = self.as_list(generator.iter, self.kind(generator.iter, names))
            self.charge(generator.iter, values.length)
            self._times *= values.length
            length *= values.length
            exact = exact and values.exact and not generator.ifs
            names = {**names, **self._targets(generator.target, values, names)}
            for condition in generator.ifs:
                self.number(condition, names)
        item = self.kind(node.elt, names)
        if isinstance(node, ast.ListComp):
            self.stored += self._times
        self._times = before
        return ListKind(item if length else UNREACHED, length, exact)

    def _targets(self, target: ast.expr, values: ListKind, names: Names) -> dict[str, Kind]:
        """The loop variables of one `for` with their kinds."""
        if isinstance(target, ast.Name):
            return {self._loop_name(target, names): values.item}
        if not isinstance(target, ast.Tuple | ast.List) or not target.elts:
            raise self.refuse(target, refusals.LOOP_TARGET)
        bound: dict[str, Kind] = {}
        parts = self.as_list(target, values.item)
        known = isinstance(values.item, ListKind) and parts.exact
        if known and parts.length != len(target.elts):
            raise self.refuse(target, refusals.UNPACK, given=parts.length, wanted=len(target.elts))
        for part in target.elts:
            if not isinstance(part, ast.Name):
                raise self.refuse(part, refusals.LOOP_TARGET)
            bound[self._loop_name(part, {**names, **bound})] = parts.item
        return bound

    def _loop_name(self, target: ast.Name, names: Names) -> str:
        name = target.id
        if name == "_":
            return name
        what = "a word" if name in self.words else "a constant" if name in self.constants else None
        what = "a loop variable" if name in names else "a function" if name in FUNCTIONS else what
        if what is not None:
            raise self.refuse(target, refusals.SHADOW, name=name, what=what)
        why = why_not_a_name(name)
        if why is not None:
            raise self.refuse(target, refusals.LOOP_NAME, name=name, why=why)
        return name

    # --- indexes ---

    def _subscript(self, node: ast.Subscript, names: Names) -> Kind:
        value = self.kind(node.value, names)
        if isinstance(value, ListKind):
            return self._item(node, value, names)
        if isinstance(value, Unreached):
            self.number(node.slice, names)
            return UNREACHED
        number = self.as_number(node.value, value)
        if number.width is None:
            raise self.refuse(node, refusals.NO_BITS, text=self.origin.shown(node.value))
        self.widths[node] = number.width
        if isinstance(node.slice, ast.Slice):
            return self._bits(node, node.slice, number.width, names)
        index = self.number(node.slice, names)
        if index.hi < 0 or index.lo >= number.width.bits:
            shown = index.lo if index.lo >= 0 else index.hi
            last, text = number.width.bits - 1, self.origin.shown(node.value)
            raise self.refuse(node, refusals.BIT_RANGE, index=shown, last=last, text=text)
        return TRUTH

    def _bits(self, node: ast.Subscript, part: ast.Slice, width: Width, names: Names) -> Kind:
        if part.step is not None:
            raise self.refuse(node, refusals.SLICE_STEP)
        lo = self.number(part.lower, names) if part.lower else NumberKind(0, 0)
        hi = self.number(part.upper, names) if part.upper else NumberKind(width.bits, width.bits)
        if lo.hi < 0 or hi.lo > width.bits or lo.lo > min(hi.hi, width.bits):
            ends = {
                "lo": max(lo.lo, lo.hi if lo.hi < 0 else lo.lo),
                "hi": hi.lo if hi.lo > width.bits else hi.hi,
            }
            text = self.origin.shown(node.value)
            raise self.refuse(node, refusals.SLICE_RANGE, bits=width.bits, text=text, **ends)
        most = max(min(hi.hi, width.bits) - max(lo.lo, 0), 0)
        return NumberKind(0, (1 << most) - 1)

    def _item(self, node: ast.Subscript, values: ListKind, names: Names) -> Kind:
        if isinstance(node.slice, ast.Slice):
            raise self.refuse(node, refusals.LIST_SLICE, text=self.origin.shown(node.value))
        index = self.number(node.slice, names)
        if values.exact and (index.hi < -values.length or index.lo >= values.length):
            raise self._outside(node, index, values)
        if index.lo == index.hi and values.item == MIXED:
            return self._fixed_item(node, index.lo, names)
        return values.item

    def _outside(self, node: ast.Subscript, index: NumberKind, values: ListKind) -> Exception:
        length = "1 item" if values.length == 1 else f"{values.length} items"
        shown = index.lo if index.lo >= 0 else index.hi
        text = self.origin.shown(node.value)
        return self.refuse(node, refusals.INDEX_RANGE, index=shown, length=length, text=text)

    def _fixed_item(self, node: ast.Subscript, index: int, names: Names) -> Kind:
        """The kind of one known item of a constant or list whose items differ in kind."""
        value = node.value
        if isinstance(value, ast.List | ast.Tuple):
            return self.kind(value.elts[index], names)
        constant = self._constant_value(value, names)
        return constant_kind(constant[index]) if isinstance(constant, list) else MIXED

    def _constant_value(self, node: ast.expr, names: Names) -> Constant | None:
        """The value of `name` or `name[1][2]...` for a constant, None for anything else."""
        if isinstance(node, ast.Name) and node.id not in names:
            return self.constants.get(node.id)
        if isinstance(node, ast.Subscript) and not isinstance(node.slice, ast.Slice):
            index, values = self.number(node.slice, names), self._constant_value(node.value, names)
            inside = isinstance(values, list) and -len(values) <= index.lo < len(values)
            if index.lo == index.hi and inside and isinstance(values, list):
                return values[index.lo]
        return None
