"""What the condition of an `if` says about the classical bits.

Read are: single bits and registers (true where not 0), their comparison with integers, bit strings and one
another, `! ~ && || & | ^`, and casts to bool, bit, int and uint. A register is an unsigned number, index 0
its lowest bit; a bit string has index 0 on the right (OpenQASM 3 standard, "Classical bits and registers").
So is a register cast to int: the standard's own example of error correction compares `int[2](syn)` with 3.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import TypeAlias

from revsynth.circuit.model import Condition
from revsynth.errors import CircuitFileError
from revsynth.qasm.expressions import binary, cast, unary
from revsynth.qasm.formula import (
    ALWAYS,
    NEVER,
    Formula,
    condition_of,
    conjunction,
    disjunction,
    equal,
    literal,
    negation,
)
from revsynth.qasm.scope import Scope
from revsynth.qasm.syntax import Expression, Number, Operand, Step

Bits: TypeAlias = tuple[Formula, ...]
"""A word of bits, lowest first; a truth value is a word of one."""
Value: TypeAlias = Number | Bits

_MAX_BITS = 4096
_MAX_STEPS = 5000
_MAX_ORDERED = 64
_COMPARE = ("==", "!=", "<", "<=", ">", ">=")


class ConditionReader:
    """Reads conditions against the bits of a scope."""

    def __init__(self, scope: Scope) -> None:
        self._scope = scope

    def read(self, expression: Expression, constants: Mapping[str, Number]) -> Formula:
        """The formula of a condition.

        Raises:
            CircuitFileError: for anything but the forms named above.
        """
        stack: list[Value] = []
        if len(expression.steps) > _MAX_STEPS:
            raise self._scope.source.error("this condition is too long", expression.position)
        for step in expression.steps:
            try:
                self._run(step, stack, constants)
            except (ArithmeticError, ValueError) as error:
                if isinstance(error, CircuitFileError):
                    raise
                raise self._error(str(error) or "this operation is undefined for its value", step) from None
        return _truth(stack[0])

    def _error(self, message: str, step: Step) -> CircuitFileError:
        return self._scope.source.error(message, step.position)

    def _run(self, step: Step, stack: list[Value], constants: Mapping[str, Number]) -> None:
        if step.what in ("name", "bits"):
            assert isinstance(step.value, Operand)
            stack.append(self._named(step.value, constants))
        elif step.what == "number":
            assert isinstance(step.value, int | float)
            stack.append(step.value)
        elif step.what == "text":
            text = str(step.value)
            if len(text) > _MAX_BITS:
                raise ValueError(f"a bit string of more than {_MAX_BITS} bits")
            stack.append(tuple(ALWAYS if character == "1" else NEVER for character in reversed(text)))
        elif step.what == "unary":
            stack.append(_unary(str(step.value), stack.pop()))
        elif step.what == "binary":
            right = stack.pop()
            stack.append(self._binary(str(step.value), stack.pop(), right))
        elif step.what == "cast":
            assert isinstance(step.value, tuple)
            name, width = step.value
            value = stack.pop()
            if width is not None and isinstance(value, tuple):
                room = self._scope.integer(width, constants, "the width of a type")
                if room < len(value):
                    raise ValueError(f"{len(value)} bits do not fit {name}[{room}]")
            stack.append(_cast(str(name), value))
        else:
            raise ValueError(f"the function '{step.value}' is not read in a condition")

    def _named(self, operand: Operand, constants: Mapping[str, Number]) -> Value:
        if not operand.selectors and operand.name in constants:
            return constants[operand.name]
        place = self._scope.classical(operand, constants)
        if len(place.members) > _MAX_BITS:
            raise ValueError(f"a condition on more than {_MAX_BITS} bits")
        return tuple(literal(bit) for bit in place.members)

    def _binary(self, operator: str, left: Value, right: Value) -> Value:
        if not isinstance(left, tuple) and not isinstance(right, tuple):
            return binary(operator, left, right, self._scope.version)
        if operator == "&&":
            return (conjunction((_truth(left), _truth(right))),)
        if operator == "||":
            return (disjunction((_truth(left), _truth(right))),)
        if operator in _COMPARE:
            return (_compare(operator, left, right),)
        if operator in ("&", "|", "^") and self._scope.version == 3:
            return _bitwise(operator, left, right)
        raise ValueError(f"'{operator}' on classical bits is not read in a condition")


def _truth(value: Value) -> Formula:
    if isinstance(value, tuple):
        return value[0] if len(value) == 1 else disjunction(value)
    return ALWAYS if value else NEVER


def _unary(operator: str, value: Value) -> Value:
    if operator == "!":
        return (negation(_truth(value)),)
    if not isinstance(value, tuple):
        return unary(operator, value)
    if operator == "~":
        return tuple(negation(bit) for bit in value)
    raise ValueError("'-' on classical bits is not read in a condition")


def _cast(name: str, value: Value) -> Value:
    if not isinstance(value, tuple):
        return cast(name, value)
    if name == "bool":
        return (_truth(value),)
    if name in ("bit", "uint", "int"):
        return value
    raise ValueError(f"classical bits cannot be cast to {name} in a condition")


def _words(left: Value, right: Value) -> tuple[Bits, Bits]:
    """Both sides as words of the same width; ValueError where one is no word of bits."""
    words = [_as_bits(value) for value in (left, right)]
    width = max(len(word) for word in words)
    one, other = (word + (NEVER,) * (width - len(word)) for word in words)
    return one, other


def _as_bits(value: Value) -> Bits:
    if isinstance(value, tuple):
        return value
    if isinstance(value, float):
        if not value.is_integer():
            raise ValueError("classical bits are compared with integers only")
        value = int(value)
    if value < 0:
        raise ValueError("classical bits are never negative: compare them with 0 or more")
    return tuple(ALWAYS if value >> index & 1 else NEVER for index in range(max(value.bit_length(), 1)))


def _compare(operator: str, left: Value, right: Value) -> Formula:
    one, other = _words(left, right)
    if operator in ("==", "!="):
        same = conjunction([equal(a, b) for a, b in zip(one, other, strict=True)])
        return same if operator == "==" else negation(same)
    if len(one) > _MAX_ORDERED:
        raise ValueError(f"'{operator}' is read for up to {_MAX_ORDERED} bits")
    if operator in (">", "<="):
        less = _less(other, one)
    else:
        less = _less(one, other)
    return less if operator in ("<", ">") else negation(less)


def _less(left: Bits, right: Bits) -> Formula:
    """left < right as unsigned numbers, decided from the lowest bit up."""
    less = NEVER
    for a, b in zip(left, right, strict=True):
        here = conjunction((negation(a), b))
        less = disjunction((here, conjunction((equal(a, b), less))))
    return less


def _bitwise(operator: str, left: Value, right: Value) -> Value:
    one, other = _words(left, right)
    join = {"&": lambda a, b: conjunction((a, b)), "|": lambda a, b: disjunction((a, b))}
    if operator == "^":
        return tuple(negation(equal(a, b)) for a, b in zip(one, other, strict=True))
    return tuple(join[operator](a, b) for a, b in zip(one, other, strict=True))


def as_condition(formula: Formula, expression: Expression, scope: Scope) -> Condition | None:
    """The condition for the circuit model, None where it never holds; refuses what gets too long."""
    if formula.holds is None:
        raise scope.source.error(
            "this condition has too many combinations: nest several 'if' instead", expression.position
        )
    return condition_of(formula.holds)


def bits_read(condition: Sequence[object]) -> frozenset[int]:
    """The numbers of the bits that a condition reads."""
    return frozenset(entry >> 1 for guard in condition for entry in getattr(guard, "bits", ()))
