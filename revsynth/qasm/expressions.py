"""Expressions: parsed to postfix order, and evaluated where they are constant.

Parsing uses two stacks (E. W. Dijkstra's shunting yard, 1961) and evaluation one, so that no input is deep
enough to break them. A division of integers that leaves a remainder is read as a fraction, in both versions:
the standard library of OpenQASM 3 itself writes `pow(1/2) @ z`.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Mapping
from typing import TYPE_CHECKING, NamedTuple

from revsynth.errors import CircuitFileError
from revsynth.qasm.lexer import Source, Token, shown
from revsynth.qasm.syntax import Expression, Number, Step, VersionNumber
from revsynth.qasm.vocabulary import FUNCTIONS_2, FUNCTIONS_3, KEYWORDS_2, KEYWORDS_3, TYPES_3

if TYPE_CHECKING:
    from revsynth.qasm.parser import Parser

_BINARY_3 = {
    "||": 1, "&&": 2, "|": 3, "^": 4, "&": 5, "==": 6, "!=": 6, "<": 7, "<=": 7, ">": 7, ">=": 7,
    "<<": 8, ">>": 8, "+": 9, "-": 9, "*": 10, "/": 10, "%": 10, "**": 12,
}  # fmt: skip
_BINARY_2 = {"==": 6, "+": 9, "-": 9, "*": 10, "/": 10, "^": 12}
_UNARY = 11
_MAX_BITS = 4096
_MAX_DIGITS = 1000
_FUNCTIONS = FUNCTIONS_2 | FUNCTIONS_3


class _Open(NamedTuple):
    """A bracket on the operator stack: a plain one, a call or a cast."""

    what: str
    value: object
    position: int


class _Waiting(NamedTuple):
    """An operator that waits for its right side."""

    what: str
    text: str
    position: int
    binding: int


class ExpressionParser:
    """Reads one expression from the parser's tokens; stops at the first token that cannot go on."""

    def __init__(self, parser: Parser, version: VersionNumber) -> None:
        self._parser = parser
        self._lexer = parser.lexer
        self._version = version
        self._binary = _BINARY_3 if version == 3 else _BINARY_2
        self._steps: list[Step] = []
        self._stack: list[_Open | _Waiting] = []
        self._counts: list[int] = []

    def parse(self) -> Expression:
        """The expression; raises CircuitFileError where a value or a closing bracket is missing."""
        start = self._lexer.peek().position
        while True:
            self._value()
            if not self._continues():
                break
        for entry in reversed(self._stack):
            if isinstance(entry, _Open):
                raise self._lexer.source.error("this bracket is never closed: ')' is missing", entry.position)
            self._apply(entry)
        return Expression(tuple(self._steps), start)

    def _value(self) -> None:
        """Everything up to and including the next value: prefix operators, brackets, then the value."""
        while True:
            token = self._lexer.peek()
            if token.kind == "symbol" and token.text in ("-", "!", "~"):
                self._lexer.take()
                self._stack.append(_Waiting("unary", token.text, token.position, _UNARY))
            elif token.kind == "symbol" and token.text == "(":
                self._lexer.take()
                self._stack.append(_Open("bracket", None, token.position))
                self._counts.append(0)
            elif token.kind != "name" or not self._opens(token):
                self._leaf(token)
                return

    def _opens(self, token: Token) -> bool:
        """Take the start of a call or a cast, where the name is one."""
        name = token.text
        if name in _FUNCTIONS and self._lexer.character_after(token) == "(":
            self._lexer.take()
            self._lexer.expect("(", f"after the function '{name}'")
            self._stack.append(_Open("call", name, token.position))
        elif self._version == 3 and name in TYPES_3:
            self._lexer.take()
            width = self._parser.bracketed_size()
            self._lexer.expect("(", f"after the type '{name}' in an expression")
            self._stack.append(_Open("cast", (name, width), token.position))
        else:
            return False
        self._counts.append(0)
        return True

    def _leaf(self, token: Token) -> None:
        if token.kind in ("int", "float"):
            self._lexer.take()
            self._steps.append(Step("number", literal(self._lexer.source, token), token.position))
        elif token.kind == "string":
            self._lexer.take()
            text = token.text[1:-1].replace("_", "")
            if not text or text.strip("01"):
                raise self._lexer.source.error(
                    f"{shown(token.text)} is no bit string: 0 and 1 only", token.position
                )
            self._steps.append(Step("text", text, token.position))
        elif token.kind == "name" and self._version == 3 and token.text in ("true", "false"):
            self._lexer.take()
            self._steps.append(Step("number", token.text == "true", token.position))
        elif token.kind == "name" and token.text not in self._keywords():
            operand = self._parser.operand()
            self._steps.append(Step("bits" if operand.selectors else "name", operand, token.position))
        else:
            raise self._lexer.unexpected(token, "a value")

    def _keywords(self) -> frozenset[str]:
        return KEYWORDS_3 if self._version == 3 else KEYWORDS_2 - {"pi"}

    def _continues(self) -> bool:
        """Take what follows a value: closing brackets, then an operator or a comma; False at the end."""
        while True:
            token = self._lexer.peek()
            if token.kind != "symbol":
                return False
            if token.text == ")" and self._counts:
                self._lexer.take()
                self._close()
                continue
            if token.text == "," and self._counts:
                self._lexer.take()
                self._comma(token)
                return True
            binding = self._binary.get(token.text)
            if binding is None:
                return False
            self._lexer.take()
            self._operator(token, binding)
            return True

    def _operator(self, token: Token, binding: int) -> None:
        right_first = binding == _UNARY + 1
        while self._stack:
            top = self._stack[-1]
            if isinstance(top, _Open) or top.binding < binding or (top.binding == binding and right_first):
                break
            self._stack.pop()
            self._apply(top)
        self._stack.append(_Waiting("binary", token.text, token.position, binding))

    def _unwind(self) -> _Open:
        """Apply all that waits since the innermost open bracket."""
        while True:
            top = self._stack[-1]
            if isinstance(top, _Open):
                return top
            self._stack.pop()
            self._apply(top)

    def _comma(self, token: Token) -> None:
        if self._unwind().what != "call":
            raise self._lexer.source.error("a comma has no meaning in these brackets", token.position)
        self._counts[-1] += 1

    def _close(self) -> None:
        bracket = self._unwind()
        self._stack.pop()
        commas = self._counts.pop()
        if bracket.what == "call":
            self._steps.append(Step("call", bracket.value, bracket.position, commas + 1))
        elif bracket.what == "cast":
            self._steps.append(Step("cast", bracket.value, bracket.position))

    def _apply(self, operator: _Waiting) -> None:
        self._steps.append(Step(operator.what, operator.text, operator.position))


def literal(source: Source, token: Token) -> int | float:
    """The value of a number token."""
    text = token.text.replace("_", "")
    if len(text) > _MAX_DIGITS:
        raise source.error(f"a number of {len(text)} digits is too long", token.position)
    if token.kind == "float":
        return float(text)
    base = {"0x": 16, "0o": 8, "0b": 2}.get(text[:2].lower(), 10)
    return int(text[2:] if base != 10 else text, base)


def evaluate(
    expression: Expression, constants: Mapping[str, Number], source: Source, version: VersionNumber
) -> Number:
    """The value of a constant expression.

    Raises:
        CircuitFileError: for a name that is no constant, an undefined operation or a value out of range.
    """
    stack: list[Number] = []
    for step in expression.steps:
        try:
            _run(step, stack, constants, source, version)
        except (ArithmeticError, ValueError) as error:
            if isinstance(error, CircuitFileError):
                raise
            raise source.error(_reason(error), step.position) from None
    (value,) = stack
    return value


def _reason(error: Exception) -> str:
    if isinstance(error, ZeroDivisionError):
        return "division by zero"
    if isinstance(error, OverflowError):
        return "this value is too large"
    return str(error) if type(error) is _MeaninglessError else "this operation is undefined for its value"


class _MeaninglessError(ValueError):
    """An operation on values of the wrong kind; the text says what is wrong."""


def _run(
    step: Step, stack: list[Number], constants: Mapping[str, Number], source: Source, version: VersionNumber
) -> None:
    value = step.value
    if step.what == "number":
        assert isinstance(value, int | float)
        stack.append(value)
    elif step.what == "name":
        name = getattr(value, "name", "")
        if name not in constants:
            raise source.error(f"'{name}' is not a constant", step.position)
        stack.append(constants[name])
    elif step.what == "unary":
        stack.append(unary(str(value), stack.pop()))
    elif step.what == "binary":
        right = stack.pop()
        stack.append(binary(str(value), stack.pop(), right, version))
    elif step.what == "call":
        arguments = stack[len(stack) - step.arguments :]
        del stack[len(stack) - step.arguments :]
        stack.append(_call(str(value), arguments))
    elif step.what == "cast":
        assert isinstance(value, tuple)
        stack.append(cast(str(value[0]), stack.pop()))
    else:
        raise _MeaninglessError("a constant is needed here, not classical bits")


def cast(name: str, value: Number) -> Number:
    """The value as the classical type `name`; raises ValueError for the types that are not read."""
    if name in ("int", "uint"):
        return int(value)
    if name in ("float", "angle"):
        return float(value)
    if name == "bool":
        return bool(value)
    raise _MeaninglessError(f"a constant cannot be cast to {name}")


def unary(operator: str, value: Number) -> Number:
    """`-value`, `!value`, or `~value` (which has no meaning without a width)."""
    if operator == "-":
        return -value
    if operator == "!":
        return not value
    raise _MeaninglessError("'~' needs a width: it is read on classical bits only")


def binary(operator: str, left: Number, right: Number, version: VersionNumber) -> Number:
    """`left operator right`; raises ArithmeticError or ValueError where undefined."""
    if operator == "**" or (operator == "^" and version == 2):
        return _power(left, right)
    if operator in _INTEGERS:
        if isinstance(left, float) or isinstance(right, float):
            raise _MeaninglessError(
                f"'{operator}' needs integers" + (" (powers are '**')" if operator == "^" else "")
            )
        if operator in ("<<", ">>") and (right < 0 or right > _MAX_BITS):
            raise _MeaninglessError(f"a shift by {right} is out of range")
        return _bounded(_INTEGERS[operator](left, right))
    if operator == "/":
        if isinstance(left, int) and isinstance(right, int) and right and left % right == 0:
            return left // right
        return left / right
    if operator == "%":
        return _remainder(left, right)
    return _bounded(_ARITHMETIC[operator](left, right))


_INTEGERS: dict[str, Callable[[int, int], int]] = {
    "&": lambda a, b: a & b,
    "|": lambda a, b: a | b,
    "^": lambda a, b: a ^ b,
    "<<": lambda a, b: a << b,
    ">>": lambda a, b: a >> b,
}  # fmt: skip
_ARITHMETIC: dict[str, Callable[[Number, Number], Number]] = {
    "+": lambda a, b: a + b,
    "-": lambda a, b: a - b,
    "*": lambda a, b: a * b,
    "==": lambda a, b: a == b,
    "!=": lambda a, b: a != b,
    "<": lambda a, b: a < b,
    "<=": lambda a, b: a <= b,
    ">": lambda a, b: a > b,
    ">=": lambda a, b: a >= b,
    "&&": lambda a, b: bool(a) and bool(b),
    "||": lambda a, b: bool(a) or bool(b),
}  # fmt: skip


def _bounded(value: Number) -> Number:
    if isinstance(value, int) and value.bit_length() > _MAX_BITS:
        raise OverflowError
    return value


def _remainder(left: Number, right: Number) -> Number:
    """The remainder with the sign of the left side, as in C."""
    if isinstance(left, int) and isinstance(right, int):
        return int(math.copysign(1, left)) * (abs(left) % abs(right))
    return math.fmod(left, right)


def _power(left: Number, right: Number) -> Number:
    if isinstance(left, int) and isinstance(right, int) and right >= 0:
        if abs(left) > 1 and left.bit_length() * right > _MAX_BITS:
            raise OverflowError
        return int(left**right)
    return math.pow(left, right)


def _call(name: str, arguments: list[Number]) -> Number:
    if name in ("mod", "pow"):
        if len(arguments) != 2:
            raise _MeaninglessError(f"{name}() takes 2 values, not {len(arguments)}")
        return (_remainder if name == "mod" else _power)(*arguments)
    function = _ONE_VALUE.get(name)
    if function is None:
        raise _MeaninglessError(f"the function '{name}' is not read")
    if len(arguments) != 1:
        raise _MeaninglessError(f"{name}() takes 1 value, not {len(arguments)}")
    return function(arguments[0])


_ONE_VALUE: dict[str, Callable[[Number], Number]] = {
    "sin": math.sin,
    "cos": math.cos,
    "tan": math.tan,
    "exp": math.exp,
    "ln": math.log,
    "log": math.log,
    "sqrt": math.sqrt,
    "arccos": math.acos,
    "arcsin": math.asin,
    "arctan": math.atan,
    "ceiling": math.ceil,
    "floor": math.floor,
}  # fmt: skip
