"""The text of a step as one Python statement, with its condition apart."""

from __future__ import annotations

import ast
import warnings
from collections.abc import Callable
from dataclasses import dataclass

from revsynth.errors import SpecError
from revsynth.spec.limits import MAX_CHARACTERS
from revsynth.spec.syntax import shortened

_NO_ELSE = "a step has no else: give the other case a step with the opposite condition"


@dataclass(frozen=True)
class Statement:
    """node: the statement itself; condition: what stands between `if` and the colon, if anything."""

    text: str
    node: ast.stmt
    condition: ast.expr | None = None

    @property
    def value(self) -> ast.expr:
        """What stands on the right of an assignment."""
        assert isinstance(self.node, ast.AugAssign | ast.Assign)
        return self.node.value

    def padded(self, node: ast.expr) -> str:
        """The text of a part, behind as many blanks as it stands behind characters, so that columns hold."""
        return " " * node.col_offset + self.text[node.col_offset : node.end_col_offset]

    def shown(self, node: ast.expr) -> str:
        """The text of a part, cut short."""
        return shortened(self.text[node.col_offset : node.end_col_offset])


def statement_of(text: str, source: str, place: str) -> Statement:
    """The one statement of a step, on one line. Raises SpecError where it is none, or more than one."""

    def error(message: str) -> SpecError:
        return SpecError(message, source=source, place=place)

    if len(text) > MAX_CHARACTERS:
        raise error(f"{len(text)} characters: up to {MAX_CHARACTERS} are allowed")
    flat = " ".join(line.split("#", 1)[0].strip() for line in text.splitlines()).strip()
    strange = next((one for one in flat if not one.isascii() or not (one.isprintable() or one == "\t")), None)
    if strange is not None:
        raise error(f"the character {strange!a} is not allowed: names and operators are ASCII")
    if not flat:
        raise error("it is empty: a step such as x += 1 is wanted")
    body = _parsed(flat, error)
    if len(body) != 1:
        raise error("one step an entry: give each a text of its own")
    node = body[0]
    if not isinstance(node, ast.If):
        return Statement(flat, node)
    if node.orelse:
        raise error(_NO_ELSE)
    if len(node.body) != 1:
        raise error("one step an entry: give each a text and a condition of its own")
    inner = node.body[0]
    if isinstance(inner, ast.If):
        raise error("one condition a step: join conditions by `and`")
    return Statement(flat, inner, node.test)


def _parsed(flat: str, error: Callable[[str], SpecError]) -> list[ast.stmt]:
    try:
        with warnings.catch_warnings():
            warnings.simplefilter("ignore")
            return ast.parse(flat).body
    except (RecursionError, MemoryError):
        raise error("it is nested too deeply") from None
    except SyntaxError as fault:
        if flat.startswith("if") and {"else", "elif"} & set(flat.replace(":", " ").split()):
            raise error(_NO_ELSE) from None
        column = min(max(fault.offset or 1, 1), len(flat) + 1)
        reason = fault.msg.split(". Perhaps")[0].split(". Maybe")[0]
        raise error(
            f"column {column}: this is no step ({reason}): write x += y, x ^= x >> 1, x, y = y, x or the like"
        ) from None
