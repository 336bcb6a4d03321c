"""From an expression's text to Python's syntax tree, within limits, and from tree nodes back to places.

The text is never run. Line breaks and comments are allowed anywhere, as inside Python's brackets.
"""

from __future__ import annotations

import ast
import re
import warnings
from collections.abc import Iterator
from dataclasses import dataclass
from typing import Any

from revsynth.errors import ExpressionError
from revsynth.spec import refusals
from revsynth.spec.limits import MAX_CHARACTERS, MAX_DEPTH
from revsynth.spec.refusals import Refusal

_CLOSES = {")": "(", "]": "[", "}": "{"}
_LOOKALIKES = {
    "\u2212": "-",
    "\u2013": "-",
    "\u00d7": "*",
    "\u00b7": "*",
    "\u00f7": "//",
    "\u2260": "!=",
    "\u2264": "<=",
    "\u2265": ">=",
    "\u2227": "and",
    "\u2228": "or",
    "\u00ac": "not",
    "\u2295": "^",
    "\u2208": "in",
}
_HINTS = (
    (r"&&", "write 'and' for &&"),
    (r"\|\|", "write 'or' for ||"),
    (r"<>", "write != for <>"),
    (r"[<=]=*>", "write a condition with 'and', 'or' and 'not'"),
    (r"\?", "write 'x if condition else y' for ?:"),
    (r"!(?!=)", "write 'not' for !"),
    (r"(?<![=!<>:+*/%&|^-])=(?!=)", "write == to compare"),
)
_SHOWN = 40


@dataclass(frozen=True)
class Origin:
    """Where an expression comes from, for its errors: its text, its file, and its place in the file."""

    text: str
    source: str = ""
    place: str = ""

    def error(self, refusal: Refusal, line: int, column: int, **fields: Any) -> ExpressionError:
        """The error for a refusal at a line and column of the text, both from 1."""
        shown = {name: number(value) if isinstance(value, int) else value for name, value in fields.items()}
        return ExpressionError(
            f"{self.where(line, column)}: {refusal.message.format(**shown)}",
            source=self.source,
            place=self.place,
        )

    def error_at(self, node: ast.AST, refusal: Refusal, **fields: Any) -> ExpressionError:
        """The error for a refusal at a node."""
        fields.setdefault("text", f"'{self.shown(node)}'")
        return self.error(refusal, *self.position(node), **fields)

    def where(self, line: int, column: int) -> str:
        """A place in the text in words."""
        return f"line {line}, column {column}" if "\n" in self.text.strip() else f"column {column}"

    def position(self, node: ast.AST) -> tuple[int, int]:
        """Line and column (from 1) where a node begins in the text."""
        line, offset = getattr(node, "lineno", 1), getattr(node, "col_offset", 1)
        return line, max(offset + (line > 1), 1)

    def shown(self, node: ast.AST) -> str:
        """The text of a node on one line, cut short."""
        lines = self.text.split("\n")
        first_line, first_column = self.position(node)
        last_line = getattr(node, "end_lineno", None) or first_line
        last_column = (getattr(node, "end_col_offset", None) or 1) - (last_line == 1)
        part = lines[first_line - 1 : last_line]
        if not part:
            return ""
        if last_line <= len(lines):
            part[-1] = part[-1][:last_column]
        part[0] = part[0][first_column - 1 :]
        return shortened(" ".join(_code(line).strip() for line in part).strip())


def shortened(text: str) -> str:
    """A text as messages show it, cut where it is long."""
    return text if len(text) <= _SHOWN else text[: _SHOWN - 3] + "..."


def number(value: int) -> str:
    """A number as messages show it: with commas where it is long, only its size where it is too long."""
    if abs(value) >= 10**15:
        return f"about {'-' if value < 0 else ''}2**{value.bit_length() - 1}"
    return f"{value:,}" if abs(value) >= 10_000 else str(value)


def syntax_tree(origin: Origin) -> ast.expr:
    """The syntax tree of an expression's text, at most MAX_DEPTH deep.

    Raises ExpressionError where the text is empty, too long or deep, or not a Python expression.
    Positions in the tree are those of the text with one bracket put in front of it.
    """
    text = origin.text
    if len(text) > MAX_CHARACTERS:
        raise origin.error(refusals.TOO_LONG, 1, 1, length=len(text), limit=MAX_CHARACTERS)
    _check_characters(origin)
    if not any(_code(line).strip() for line in text.split("\n")):
        raise origin.error(refusals.EMPTY, 1, 1)
    _check_brackets(origin)
    try:
        with warnings.catch_warnings():
            warnings.simplefilter("ignore")
            code = "\n".join(_code(line) for line in text.split("\n"))
            tree = ast.parse(f"({code}\n)", mode="eval").body
    except (RecursionError, MemoryError):
        raise origin.error(refusals.TOO_DEEP, 1, 1, limit=MAX_DEPTH) from None
    except SyntaxError as error:
        raise _syntax_error(origin, error) from None
    _check_depth(origin, tree)
    return tree


def chain(node: ast.BinOp) -> tuple[ast.expr, list[ast.BinOp]]:
    """A left-leaning chain a + b - c ... as its first operand and its operations, first one first."""
    operations: list[ast.BinOp] = []
    left: ast.expr = node
    while isinstance(left, ast.BinOp):
        operations.append(left)
        left = left.left
    return left, operations[::-1]


def _code(line: str) -> str:
    """A line without its comment (the language has no text in which # could stand)."""
    return line.split("#", 1)[0]


def _characters(text: str) -> Iterator[tuple[int, int, str]]:
    """Line, column (from 1) and character of all code, comments left out."""
    for number, line in enumerate(text.split("\n"), 1):
        for column, character in enumerate(_code(line), 1):
            yield number, column, character


def _check_characters(origin: Origin) -> None:
    for line, column, character in _characters(origin.text):
        if character in "'\"":
            raise origin.error(refusals.QUOTE, line, column)
        if not character.isprintable() and character != "\t":
            reason = f"a stray character U+{ord(character):04X}"
            raise origin.error(refusals.SYNTAX, line, column, reason=reason, hint="")
        if not character.isascii():
            meant = _LOOKALIKES.get(character)
            hint = f"; write {meant}" if meant else "; names and operators are ASCII"
            raise origin.error(refusals.NOT_ASCII, line, column, text=character, hint=hint)


def _check_brackets(origin: Origin) -> None:
    """Refuse unbalanced brackets, so that the bracket that is put around the text holds all of it."""
    opened: list[tuple[int, int, str]] = []
    for line, column, character in _characters(origin.text):
        if character in "([{":
            opened.append((line, column, character))
            if len(opened) > MAX_DEPTH:
                raise origin.error(refusals.TOO_DEEP, line, column, limit=MAX_DEPTH)
        elif character in _CLOSES:
            if not opened:
                raise origin.error(refusals.BRACKET_CLOSE, line, column, text=character)
            at_line, at_column, bracket = opened.pop()
            if bracket != _CLOSES[character]:
                raise origin.error(refusals.BRACKET_OPEN, at_line, at_column, text=bracket)
    if opened:
        line, column, bracket = opened[0]
        raise origin.error(refusals.BRACKET_OPEN, line, column, text=bracket)


def _syntax_error(origin: Origin, error: SyntaxError) -> ExpressionError:
    lines = origin.text.split("\n")
    line = min(max(error.lineno or 1, 1), len(lines))
    column = (error.offset or 1) - (1 if line == 1 else 0)
    if (error.lineno or 1) > len(lines):
        column = len(lines[-1]) + 1
    reason = "the number is too long" if "integer string" in error.msg else error.msg
    if (error.lineno or 1) > len(lines) or column > len(lines[line - 1]):
        reason = "it ends too early"
    code = "\n".join(_code(one) for one in lines)
    hint = next((f"; {words}" for pattern, words in _HINTS if re.search(pattern, code)), "")
    column = min(max(column, 1), len(lines[line - 1]) + 1)
    return origin.error(
        refusals.SYNTAX, line, column, reason=reason.split(". Perhaps")[0].split(". Maybe")[0], hint=hint
    )


def _check_depth(origin: Origin, tree: ast.expr) -> None:
    """Refuse a tree deeper than MAX_DEPTH; a chain of binary operators counts as one level."""
    pending: list[tuple[ast.AST, int]] = [(tree, 1)]
    while pending:
        node, depth = pending.pop()
        if depth > MAX_DEPTH:
            raise origin.error_at(node, refusals.TOO_DEEP, limit=MAX_DEPTH)
        if isinstance(node, ast.BinOp):
            first, operations = chain(node)
            pending.append((first, depth + 1))
            pending.extend((operation.right, depth + 1) for operation in operations)
        else:
            deeper = depth + (1 if isinstance(node, ast.expr) else 0)
            if isinstance(node, ast.ListComp | ast.GeneratorExp | ast.SetComp | ast.DictComp):
                deeper += len(node.generators)
            pending.extend((child, deeper) for child in ast.iter_child_nodes(node))
