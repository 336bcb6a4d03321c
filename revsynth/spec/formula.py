"""Boolean formulas over single bits: a parser without recursion.

What binds, tightest first: `~ !`, `&`, `^`, `|`, `== !=`, `not`, `and &&`, `or ||`, `=>` (to the right),
`<=>`, `?:` (to the right). The parser is the operator-precedence method with an explicit stack
(E. W. Dijkstra's shunting yard, Mathematical Centre report MR 35, 1961), so chains and nesting of any length
need no recursion.
"""

from __future__ import annotations

import re
from collections.abc import Iterator, Sequence
from dataclasses import dataclass

from revsynth.errors import ExpressionError
from revsynth.spec.model import Word

LONGEST_TEXT = 2_000_000
"""Characters of a formula."""
MOST_DIGITS = 9
"""Digits of an index; Python refuses to convert very long ones."""

FUNCTIONS: dict[str, int | None] = {
    "Xor": None,
    "Majority": None,
    "OneHot": None,
    "OneHot0": None,
    "And": None,
    "Or": None,
    "ITE": 3,
    "Not": 1,
}
"""How many arguments each function takes (None: one or more)."""

CONSTANTS = {"0": 0, "1": 1, "true": 1, "false": 0}
_SPELLINGS = {"!": "~", "&&": "and", "||": "or"}
_EQUALITY = 8
_TERNARY = 2
_BINDING = {
    "~": 12,
    "&": 11,
    "^": 10,
    "|": 9,
    "==": _EQUALITY,
    "!=": _EQUALITY,
    "not": 7,
    "and": 6,
    "or": 5,
    "=>": 4,
    "<=>": 3,
}
_TO_THE_RIGHT = ("=>",)
_PREFIX = ("~", "not")
_TOKEN = re.compile(
    r"(?P<skip>(?:\s|\#[^\n]*)+)|(?P<name>[A-Za-z_][A-Za-z0-9_]*)|(?P<number>[0-9]+)"
    r"|(?P<sign><=>|=>|==|!=|&&|\|\||[~!&^|?:()\[\],])",
    re.ASCII,
)


@dataclass(frozen=True, slots=True)
class Step:
    """One step of a formula in postfix order: `bit` (argument: input bit), `const`, or an operation.

    `argument` of an operation is how many operands it takes from the stack.
    """

    name: str
    argument: int


@dataclass(frozen=True)
class Formula:
    """A parsed formula over `inputs` bits, numbered as in the combined index."""

    text: str
    inputs: int
    steps: tuple[Step, ...]


@dataclass(frozen=True, slots=True)
class _Token:
    kind: str
    text: str
    start: int


@dataclass(slots=True)
class _Frame:
    """An entry of the operator stack: an operator, '?', ':', an open bracket, or a function's bracket."""

    text: str
    start: int
    arguments: int = 0


def parse_formula(text: str, words: Sequence[Word], *, source: str = "", place: str = "") -> Formula:
    """Parse a formula over the bits of `words`: `a[2]`, `cell[1][0]`, or `b` for a one-bit word.

    Raises ExpressionError with line and column for whatever is not a formula over these bits.
    """
    return _Parser(text, words, source, place).parse()


class _Parser:
    def __init__(self, text: str, words: Sequence[Word], source: str, place: str) -> None:
        self.text = text
        self.source = source
        self.place = place
        self.words = {word.name: word for word in words}
        self.first_bit = {}
        self.inputs = 0
        for word in words:
            self.first_bit[word.name] = self.inputs
            self.inputs += word.total_bits
        self.steps: list[Step] = []
        self.stack: list[_Frame] = []

    def parse(self) -> Formula:
        if len(self.text) > LONGEST_TEXT:
            raise self.error(f"{len(self.text)} characters are too many: {LONGEST_TEXT} are allowed", 0)
        for name in ("true", "false"):
            if name in self.words:
                raise self.error(f"the word {name} cannot be told from the constant {name}: rename it", 0)
        self.tokens = list(self.tokenise())
        self.tokens.append(_Token("end", "the end", len(self.text)))
        if len(self.tokens) == 1:
            raise self.error("the formula is empty", 0)
        self.at = 0
        self.wants_operand = True
        while self.tokens[self.at].kind != "end":
            token = self.tokens[self.at]
            self.at += 1
            if self.wants_operand:
                self.operand(token)
            else:
                self.operator(token)
        end = self.tokens[self.at]
        if self.wants_operand:
            raise self.error("a bit is wanted here, the formula ends", end.start)
        self.reduce(0)
        if self.stack:
            frame = self.stack[-1]
            wanted = "its :" if frame.text == "?" else "its )"
            raise self.error(f"this {frame.text} misses {wanted}", frame.start)
        return Formula(self.text, self.inputs, tuple(self.steps))

    def tokenise(self) -> Iterator[_Token]:
        position = 0
        while position < len(self.text):
            match = _TOKEN.match(self.text, position)
            if match is None:
                raise self.error(
                    f"{self.text[position]!r} is not part of formulas: "
                    "bits, 0 1 true false, ~ ! & ^ | == != not and && or || => <=> ?: ( ) and functions are",
                    position,
                )
            if match.lastgroup != "skip":
                text = match.group()
                yield _Token(str(match.lastgroup), _SPELLINGS.get(text, text), position)
            position = match.end()

    def operand(self, token: _Token) -> None:
        """Where a bit, a constant, a prefix or a bracket may stand."""
        if token.text in _PREFIX:
            self.prefix(token)
        elif token.text == "(":
            self.stack.append(_Frame("(", token.start))
        elif token.kind == "name" and token.text in FUNCTIONS:
            if self.tokens[self.at].text != "(":
                raise self.error(f"{token.text} is a function: ( is wanted behind it", token.start)
            self.stack.append(_Frame(token.text, token.start, 1))
            self.at += 1
            if self.tokens[self.at].text == ")":
                raise self.error(f"{token.text} wants {_count(token.text)}, not 0", token.start)
        elif token.text in CONSTANTS:
            self.steps.append(Step("const", CONSTANTS[token.text]))
            self.wants_operand = False
        elif token.kind == "name" and token.text not in ("and", "or"):
            self.steps.append(Step("bit", self.bit(token)))
            self.wants_operand = False
        elif token.kind == "number":
            raise self.error(
                f"of numbers only the bits 0 and 1 are allowed, not {token.text[:20]}", token.start
            )
        else:
            raise self.error(f"a bit is wanted here, not {self.shown(token)}", token.start)

    def prefix(self, token: _Token) -> None:
        binding = _BINDING[token.text]
        if self.stack and _BINDING.get(self.stack[-1].text, 0) > binding:
            above = self.stack[-1].text
            raise self.error(f"not binds less than {above}: write {above} (not ...)", token.start)
        self.stack.append(_Frame(token.text, token.start))

    def operator(self, token: _Token) -> None:
        """Where an operator, a comma or a closing bracket may stand."""
        text = token.text
        if text in _BINDING and text not in _PREFIX:
            self.binary(token)
        elif text == "?":
            self.reduce(_TERNARY + 1)
            self.stack.append(_Frame("?", token.start))
            self.wants_operand = True
        elif text == ":":
            self.reduce(_TERNARY)
            if not self.stack or self.stack[-1].text != "?":
                raise self.error("this : has no ? before it", token.start)
            self.stack[-1] = _Frame(":", self.stack[-1].start)
            self.wants_operand = True
        elif text == "," or text == ")":
            self.close(token)
        else:
            raise self.error(f"an operator is wanted here, not {self.shown(token)}", token.start)

    def binary(self, token: _Token) -> None:
        binding = _BINDING[token.text]
        self.reduce(binding + 1 if token.text in _TO_THE_RIGHT or binding == _EQUALITY else binding)
        if binding == _EQUALITY and self.stack and _BINDING.get(self.stack[-1].text) == _EQUALITY:
            raise self.error(
                "a chain of == and != has two readings (pairwise, or one after the other): add brackets",
                token.start,
            )
        self.stack.append(_Frame(token.text, token.start))
        self.wants_operand = True

    def close(self, token: _Token) -> None:
        self.reduce(0)
        frame = self.stack[-1] if self.stack else _Frame("", 0)
        if frame.text == "?":
            raise self.error("this ? misses its :", frame.start)
        if token.text == ",":
            if frame.text not in FUNCTIONS:
                raise self.error("a comma separates the arguments of a function only", token.start)
            frame.arguments += 1
            self.wants_operand = True
            return
        if not self.stack:
            raise self.error("this ) has no ( before it", token.start)
        self.stack.pop()
        if frame.text in FUNCTIONS:
            wanted = FUNCTIONS[frame.text]
            if wanted is not None and frame.arguments != wanted:
                raise self.error(
                    f"{frame.text} wants {_count(frame.text)}, not {frame.arguments}", frame.start
                )
            self.steps.append(Step(frame.text, frame.arguments))

    def reduce(self, binding: int) -> None:
        """Emit the operators on top of the stack that bind at least so much, up to a bracket or '?'."""
        while self.stack:
            text = self.stack[-1].text
            found = _TERNARY if text == ":" else _BINDING.get(text, -1)
            if found < max(binding, 0):
                return
            self.stack.pop()
            arity = 3 if text == ":" else 1 if text in _PREFIX else 2
            self.steps.append(Step("ITE" if text == ":" else text, arity))

    def bit(self, token: _Token) -> int:
        """The input bit that a name and its indices stand for."""
        word = self.words.get(token.text)
        if word is None:
            known = ", ".join(list(self.words)[:8])
            raise self.error(f"there is no word {token.text[:40]}: the inputs are {known}", token.start)
        indices = list(self.indices())
        wanted = [] if word.count is None else [word.count]
        wanted.append(word.bits)
        if len(indices) == len(wanted) - 1 and word.bits == 1:
            indices.append(0)
        if len(indices) != len(wanted):
            raise self.error(f"a single bit is wanted: write {_example(word)}", token.start)
        for index, limit in zip(indices, wanted, strict=True):
            if index >= limit:
                raise self.error(
                    f"{token.text}: index {index} is out of range, the last is {limit - 1}", token.start
                )
        element = indices[0] if word.count is not None else 0
        return self.first_bit[word.name] + element * word.bits + indices[-1]

    def indices(self) -> Iterator[int]:
        while self.tokens[self.at].text == "[":
            number, closing = self.tokens[self.at + 1], self.tokens[min(self.at + 2, len(self.tokens) - 1)]
            if number.kind != "number" or closing.text != "]":
                wrong = number if number.kind != "number" else closing
                raise self.error(
                    f"[ ] holds one number from 0 on, not {self.shown(wrong)}"
                    + (": a formula takes single bits" if wrong.text == ":" else ""),
                    wrong.start,
                )
            self.at += 3
            if len(number.text) > MOST_DIGITS:
                raise self.error(f"an index of {len(number.text)} digits is out of range", number.start)
            yield int(number.text)

    def shown(self, token: _Token) -> str:
        end = token.start + len(token.text)
        spelled = self.text[token.start : end] if token.text not in ("~", "and", "or") else token.text
        return "the end" if token.kind == "end" else repr(spelled[:40])

    def error(self, message: str, position: int) -> ExpressionError:
        before = self.text[:position]
        line = before.count("\n") + 1
        column = position - (before.rfind("\n") + 1) + 1
        where = f"line {line}, column {column}" if "\n" in self.text.strip() else f"column {column}"
        return ExpressionError(f"{where}: {message}", source=self.source, place=self.place)


def _count(function: str) -> str:
    wanted = FUNCTIONS[function]
    return "at least 1 argument" if wanted is None else f"{wanted} argument{'s' if wanted > 1 else ''}"


def _example(word: Word) -> str:
    last = f"[{word.bits - 1}]" if word.bits > 1 else ""
    if word.count is None:
        return f"{word.name}[0] to {word.name}{last}" if last else word.name
    first = "[0]" if word.bits > 1 else ""
    return f"{word.name}[0]{first} to {word.name}[{word.count - 1}]{last}"
