"""Text of an OpenQASM file to tokens, one at a time, with line and column for every complaint.

Tokens are made when they are asked for, so that the fast path can take whole lines in between.
Sources: A. Cross et al., "Open Quantum Assembly Language", 2017 (arXiv 1707.03429), appendix A;
the OpenQASM 3 standard, lexical rules.
"""

from __future__ import annotations

import re
from typing import NamedTuple

from revsynth.errors import CircuitFileError

_DIGITS = r"[0-9](?:_?[0-9])*"
_TOKEN = re.compile(
    r"(?P<name>[^\W\d]\w*)"
    rf"|(?P<float>(?:{_DIGITS}\.(?:{_DIGITS})?|\.{_DIGITS})(?:[eE][+-]?{_DIGITS})?|{_DIGITS}[eE][+-]?{_DIGITS})"
    rf"|(?P<int>0[xX][0-9a-fA-F](?:_?[0-9a-fA-F])*|0o[0-7](?:_?[0-7])*|0[bB][01](?:_?[01])*|{_DIGITS})"
    r"|(?P<string>\"[^\"\n]*\"|'[^'\n]*')"
    r"|(?P<physical>\$[0-9]+)"
    r"|(?P<pragma>\#\w+)"
    r"|(?P<symbol>->|\+\+|\*\*|==|!=|<=|>=|&&|\|\||<<|>>|[-+*/%^~!&|<>=@;:,.()\[\]{}])"
)
_LONGEST_NAME = 100
_BLANK = re.compile(r"[ \t\n]*")


class Token(NamedTuple):
    """One token; `kind` is name, int, float, string, physical, pragma, symbol or end."""

    kind: str
    text: str
    position: int


class Source:
    """The text of a file and its name, to say where something is wrong."""

    def __init__(self, text: str, name: str) -> None:
        self.text = text
        self.name = name

    def error(self, message: str, position: int) -> CircuitFileError:
        """The error to raise for the character at `position` (an offset into the text)."""
        line = self.text.count("\n", 0, position) + 1
        column = position - self.text.rfind("\n", 0, position)
        return CircuitFileError(message, source=self.name, line=line, column=column)


def shown(text: str) -> str:
    """A piece of the file fit for a one-line message."""
    return repr(text if len(text) <= 40 else text[:37] + "...")


class Lexer:
    """Tokens of a source with one token of look-ahead; comment lines are kept as they are passed.

    Args:
        source: its lines end in "\\n" alone.
    """

    def __init__(self, source: Source) -> None:
        self.source = source
        self.text = source.text
        self.position = 0
        self.comments: list[str] = []
        self._ahead: Token | None = None
        self._end = 0

    def peek(self) -> Token:
        """The next token, left in place; raises CircuitFileError for text that is no token."""
        if self._ahead is None:
            self._ahead = self._read()
        return self._ahead

    def take(self) -> Token:
        """The next token, consumed."""
        token = self.peek()
        self._ahead = None
        self.position = self._end
        return token

    def accept(self, text: str) -> bool:
        """Consume the next token where it is the symbol or name `text`."""
        token = self.peek()
        if token.text == text and token.kind in ("symbol", "name"):
            self.take()
            return True
        return False

    def expect(self, text: str, where: str) -> Token:
        """Consume the symbol or name `text`, or complain."""
        token = self.peek()
        if token.text != text or token.kind not in ("symbol", "name"):
            raise self.unexpected(token, f"'{text}' {where}")
        return self.take()

    def unexpected(self, token: Token, wanted: str) -> CircuitFileError:
        """The error for a token where something else is needed."""
        found = "the end of the file" if token.kind == "end" else shown(token.text)
        return self.source.error(f"found {found} where {wanted} is needed", token.position)

    def character_after(self, token: Token) -> str:
        """The first character behind a token and white space ('' at the end of the file)."""
        blank = _BLANK.match(self.text, token.position + len(token.text))
        place = blank.end() if blank else len(self.text)
        return self.text[place : place + 1]

    def boundary(self) -> int:
        """Where the next statement starts or the last one ended; drops the look-ahead."""
        if self._ahead is not None:
            self.position = self._ahead.position
            self._ahead = None
        return self.position

    def jump(self, position: int) -> None:
        """Go on reading at an offset (used by the fast path at a line start)."""
        self._ahead = None
        self.position = position

    def skip_line(self) -> None:
        """Pass over the rest of the line (annotations)."""
        end = self.text.find("\n", self.position)
        self.jump(len(self.text) if end < 0 else end)

    def _read(self) -> Token:
        start = self._after_blanks(self.position)
        if start >= len(self.text):
            self._end = start
            return Token("end", "", start)
        found = _TOKEN.match(self.text, start)
        if found is None:
            raise self._no_token(start)
        self._end = found.end()
        kind = found.lastgroup or ""
        if kind == "name" and self._end - start > _LONGEST_NAME:
            raise self.source.error(f"a name of {self._end - start} characters is too long", start)
        if kind in ("int", "float") and self._end < len(self.text):
            following = self.text[self._end]
            if following == "_" or following.isalnum():
                raise self._bad_number(start)
        return Token(kind, found.group(), start)

    def _after_blanks(self, position: int) -> int:
        """Past white space and comments."""
        text = self.text
        while True:
            blank = _BLANK.match(text, position)
            position = blank.end() if blank else position
            if text.startswith("//", position):
                end = text.find("\n", position)
                end = len(text) if end < 0 else end
                line_start = text.rfind("\n", 0, position) + 1
                if not text[line_start:position].strip():
                    self.comments.append(comment_text(text[position:end]))
                position = end
            elif text.startswith("/*", position):
                end = text.find("*/", position + 2)
                if end < 0:
                    raise self.source.error("this comment is never closed: '*/' is missing", position)
                position = end + 2
            else:
                return position

    def _no_token(self, position: int) -> CircuitFileError:
        character = self.text[position]
        if character in "\"'":
            return self.source.error("this string is not closed on its line", position)
        return self.source.error(f"the character {shown(character)} has no meaning here", position)

    def _bad_number(self, position: int) -> CircuitFileError:
        end = self._end
        while end < len(self.text) and (self.text[end] == "_" or self.text[end].isalnum()):
            end += 1
        return self.source.error(
            f"{shown(self.text[position:end])} is no number (durations and imaginary numbers are not read)",
            position,
        )


def comment_text(comment: str) -> str:
    """The text of a `//` comment without the slashes and the one space behind them."""
    return comment[2:].removeprefix(" ").rstrip()
