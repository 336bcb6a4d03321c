"""Steps of a reversible block: what each one changes, by what, and under which condition.

A step works on the pattern of a word, of a bit or of neighbouring bits, modulo 2**bits. Every form here can
be undone: what it reads is not what it changes, but for the forms that are one-to-one all the same.
"""

from __future__ import annotations

import ast
from collections.abc import Sequence
from dataclasses import dataclass, field
from typing import Literal

from revsynth.errors import SpecError
from revsynth.spec.expression import Expression, Scope, parse
from revsynth.spec.limits import MAX_BITS
from revsynth.spec.model import Spec
from revsynth.spec.step_bits import Place, Places
from revsynth.spec.step_syntax import Statement, statement_of

Kind = Literal["add", "subtract", "xor", "shift", "negate", "invert", "multiply", "swap", "rotate"]
MOST_STEPS = 10_000

_KINDS: dict[type[ast.operator], Kind] = {
    ast.Add: "add",
    ast.Sub: "subtract",
    ast.BitXor: "xor",
    ast.Mult: "multiply",
}


@dataclass(frozen=True)
class Step:
    """One step.

    target: the bits that it changes; other: those that it swaps with them. operand: what is added, subtracted
    or XORed, or the rotation where that depends on the input. amount: of a `shift` (x ^= x << amount, or
    x ^= x >> -amount where it is negative), the factor of a product, or a constant rotation.
    """

    number: int
    text: str
    kind: Kind
    target: Place
    other: Place | None = None
    operand: Expression | None = field(default=None, compare=False)
    amount: int = 0
    condition: Expression | None = field(default=None, compare=False)

    @property
    def place(self) -> str:
        """Where the step stands in its file."""
        return place_of(self.number)


def place_of(number: int) -> str:
    """The place of a step, counted from 1."""
    return f"[permutation] steps {number}"


def parse_steps(spec: Spec, texts: Sequence[str]) -> tuple[Step, ...]:
    """Read and check all steps of a spec.

    Raises SpecError (ExpressionError inside expressions), one line that names the step, for whatever is no
    step, reads a bit that it changes, or is not one-to-one.
    """
    if len(texts) > MOST_STEPS:
        raise SpecError(
            f"{len(texts)} steps: up to {MOST_STEPS} are allowed",
            source=spec.source,
            place="[permutation] steps",
        )
    scope = Scope({word.name: word for word in spec.inputs}, spec.constants)
    places = Places(spec.inputs, spec.constants)
    return tuple(_Reader(spec, scope, places, number, text).step() for number, text in enumerate(texts, 1))


class _Reader:
    """Reads one step."""

    def __init__(self, spec: Spec, scope: Scope, places: Places, number: int, text: str) -> None:
        self.spec = spec
        self.scope = scope
        self.places = places
        self.number = number
        self.statement: Statement = statement_of(text, spec.source, place_of(number))

    def step(self) -> Step:
        node = self.statement.node
        if isinstance(node, ast.AugAssign):
            step = self._changed(node)
        elif isinstance(node, ast.Assign) and len(node.targets) == 1:
            step = self._assigned(node.targets[0], node.value)
        else:
            raise self._no_step()
        if self.statement.condition is None:
            return step
        condition = self._expression(self.statement.condition)
        self._unread(condition, step, "the condition")
        return Step(
            step.number, step.text, step.kind, step.target, step.other, step.operand, step.amount, condition
        )

    def _made(
        self,
        kind: Kind,
        target: Place,
        *,
        other: Place | None = None,
        operand: Expression | None = None,
        amount: int = 0,
    ) -> Step:
        return Step(self.number, self.statement.text, kind, target, other, operand, amount)

    def _changed(self, node: ast.AugAssign) -> Step:
        target = self._target(node.target)
        if isinstance(node.op, ast.BitXor):
            amount = self._own_shift(node.target, node.value, target)
            if amount is not None:
                return self._made("shift", target, amount=amount)
        kind = _KINDS.get(type(node.op))
        if kind is None:
            raise self._error(
                "it cannot be undone: +=, -=, ^= and *= by an odd constant are steps, and x = rotate(x, k)"
            )
        operand = self._expression(node.value)
        if kind == "multiply":
            return self._multiplied(target, operand)
        step = self._made(kind, target, operand=operand)
        self._unread(operand, step, "what is added" if kind == "add" else "what stands on the right")
        return step

    def _own_shift(self, node: ast.expr, value: ast.expr, target: Place) -> int | None:
        """The shift of x ^= x << k (positive) or x ^= x >> k (negative); None for anything else."""
        if not isinstance(value, ast.BinOp) or not isinstance(value.op, ast.LShift | ast.RShift):
            return None
        shifted = self._same_bits(value.left, target)
        if shifted is None:
            return None
        amount = self._constant(value.right)
        if amount is None:
            return None
        if amount < 1:
            raise self._error(f"a shift by {amount} is not one-to-one here: 1 or more is wanted")
        left = isinstance(value.op, ast.LShift)
        if shifted.signed and not left:
            name = shifted.text
            bare = f"{name}[0:{target.bits}]"
            raise self._error(
                f"{name} is signed, so {name} >> {amount} repeats its sign and the step is not one-to-one: "
                f"write {bare} ^= {bare} >> {amount}"
            )
        return amount if left else -amount

    def _multiplied(self, target: Place, operand: Expression) -> Step:
        factor = self._constant(self.statement.value)
        if factor is None:
            raise self._error("the factor of *= is an odd constant, not something that depends on the input")
        if factor % 2 == 0:
            raise self._error("an even factor is not one-to-one modulo 2**bits: an odd one is wanted")
        if target.bits > MAX_BITS:
            raise self._error(f"{target.text} has {target.bits} bits: *= takes up to {MAX_BITS}")
        return self._made("multiply", target, amount=factor % (1 << target.bits))

    def _assigned(self, target: ast.expr, value: ast.expr) -> Step:
        if isinstance(target, ast.Tuple) and isinstance(value, ast.Tuple):
            return self._swapped(target, value)
        if isinstance(target, ast.Tuple | ast.List | ast.Starred):
            raise self._no_step()
        place = self._target(target)
        if isinstance(value, ast.UnaryOp) and self._is_target(value.operand, place):
            if isinstance(value.op, ast.USub):
                return self._made("negate", place)
            if isinstance(value.op, ast.Invert):
                return self._made("invert", place)
        if isinstance(value, ast.Call) and isinstance(value.func, ast.Name) and value.func.id == "rotate":
            return self._rotated(place, value)
        if isinstance(value, ast.BinOp) and self._is_target(value.left, place) and type(value.op) in _KINDS:
            sign = {"add": "+=", "subtract": "-=", "xor": "^=", "multiply": "*="}[_KINDS[type(value.op)]]
            raise self._error(f"write {place.text} {sign} {self.statement.shown(value.right)}")
        raise self._error(
            f"it cannot be undone: {place.text} = -{place.text}, {place.text} = ~{place.text}, "
            f"{place.text} = rotate({place.text}, k) and swaps such as x, y = y, x are steps"
        )

    def _swapped(self, target: ast.Tuple, value: ast.Tuple) -> Step:
        if len(target.elts) != 2 or len(value.elts) != 2:
            raise self._error("two words change places in one step: x, y = y, x")
        one, other = (self._target(node) for node in target.elts)
        if not (self._is_target(value.elts[0], other) and self._is_target(value.elts[1], one)):
            raise self._error(f"write {one.text}, {other.text} = {other.text}, {one.text}")
        if one.bits != other.bits:
            raise self._error(
                f"{one.text} has {one.bits} bits and {other.text} has {other.bits}: a swap takes two of one "
                "width"
            )
        if one.overlaps(other):
            raise self._error(f"{one.text} and {other.text} share bits: a swap takes two that do not")
        return self._made("swap", one, other=other)

    def _rotated(self, place: Place, call: ast.Call) -> Step:
        if len(call.args) != 2 or call.keywords or not self._is_target(call.args[0], place):
            raise self._error(f"write {place.text} = rotate({place.text}, k)")
        amount = self._constant(call.args[1])
        if amount is not None:
            return self._made("rotate", place, amount=amount % place.bits)
        operand = self._expression(call.args[1])
        step = self._made("rotate", place, operand=operand)
        self._unread(operand, step, "the rotation")
        return step

    def _target(self, node: ast.expr) -> Place:
        """The bits that a target stands for."""
        found = self.places.array(node) or self.places.target(self._expression(node))
        if isinstance(found, str):
            raise self._error(found)
        return found

    def _is_target(self, node: ast.expr, place: Place) -> bool:
        """Whether a part stands for exactly these bits."""
        return self._same_bits(node, place) is not None

    def _same_bits(self, node: ast.expr, place: Place) -> Place | None:
        """A part that stands for exactly these bits; None for others."""
        if not isinstance(node, ast.Name | ast.Subscript) or self.places.array(node):
            return None
        found = self.places.target(self._expression(node))
        if isinstance(found, str) or (found.first, found.bits) != (place.first, place.bits):
            return None
        return found

    def _constant(self, node: ast.expr) -> int | None:
        return self.places.constant(self._expression(node))

    def _expression(self, node: ast.expr) -> Expression:
        text = self.statement.padded(node)
        return parse(text, self.scope, source=self.spec.source, place=place_of(self.number))

    def _unread(self, expression: Expression, step: Step, what: str) -> None:
        """Refuse an expression that reads a bit that the step changes."""
        read = self.places.read(expression)
        for place in (step.target, step.other):
            if place is not None and any(bit in read for bit in place.range):
                hint = self._hint(step)
                raise self._error(f"{what} reads {place.text}, which the step changes{hint}")

    def _hint(self, step: Step) -> str:
        if step.kind in ("add", "subtract") and self.statement.condition is None:
            return f": {step.target.text} *= k does so for odd constants k"
        if step.kind == "xor" and self.statement.condition is None:
            return f": only {step.target.text} ^= {step.target.text} << k (or >> k) may"
        return ": keep what is needed in another word first"

    def _no_step(self) -> SpecError:
        return self._error(
            "this is no step: x += ..., x -= ..., x ^= ..., x *= 3, x = -x, x = ~x, x = rotate(x, k) and "
            "x, y = y, x are, with `if CONDITION:` before any of them"
        )

    def _error(self, message: str) -> SpecError:
        return SpecError(message, source=self.spec.source, place=place_of(self.number))
