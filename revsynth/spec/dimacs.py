"""DIMACS CNF as found in the wild. Variable i of the file is bit i - 1 of the word `v`.

The format is that of the DIMACS challenge (1993; common practice): `c` comments anywhere, one `p cnf V C`
line, clauses of literals ended by 0 over any number of lines. Also taken: CRLF, a last clause without its 0,
a `%` line with anything behind it (as old files have), and XOR clauses `x1 -2 3 0`, true where the exclusive
sum of the literals is 1 (common practice of solvers with native XORs). Unused variables are kept.
"""

from __future__ import annotations

import re
from collections.abc import Iterator

from revsynth.errors import SpecError
from revsynth.spec.model import Clauses, Predicate, Spec, Word

WORD = "v"
_LITERAL = re.compile(r"-?[0-9]{1,12}", re.ASCII)
_INTEGER = re.compile(r"-?[0-9]+", re.ASCII)
_PROJECTED = (
    "a projection keeps an input when some values of the other variables make the formula true; "
    "an oracle over all variables would mark other inputs, so such files are refused: "
    "remove the line to build over all variables"
)


def parse_dimacs(text: str, source: str = "formula.cnf") -> Spec:
    """The predicate of a CNF text, over one word `v` of as many bits as the header has variables.

    Raises SpecError with the line where the text is no CNF, contradicts its header, or has projection lines.
    """
    reader = _Reader(source)
    for number, tokens in _lines(text, source):
        reader.take(number, tokens)
    clauses = reader.finish()
    return Spec((Word(WORD, clauses.variables),), Predicate(clauses=clauses), source=source)


def _lines(text: str, source: str) -> Iterator[tuple[int, list[str]]]:
    """Numbered lines as tokens, without comments and blank lines, up to a `%` line."""
    for number, line in enumerate(text.split("\n"), 1):
        tokens = line.split()
        if not tokens:
            continue
        if tokens[0].startswith("%"):
            return
        if tokens[0].startswith("c"):
            _refuse_projection(number, tokens, source)
            continue
        yield number, tokens


def _refuse_projection(number: int, tokens: list[str], source: str) -> None:
    shows = tokens[:3] == ["c", "p", "show"]
    independent = tokens[:2] == ["c", "ind"] and all(_INTEGER.fullmatch(token) for token in tokens[2:])
    if shows or independent:
        shown = "c p show" if shows else "c ind"
        raise SpecError(f"'{shown}': {_PROJECTED}", source=source, place=f"line {number}")


class _Reader:
    def __init__(self, source: str) -> None:
        self.source = source
        self.header: tuple[int, int] | None = None
        self.clauses: list[tuple[int, ...]] = []
        self.xor_clauses: list[tuple[int, ...]] = []
        self.open: list[int] = []
        self.in_clause = False
        self.is_xor = False

    def take(self, number: int, tokens: list[str]) -> None:
        """Read one line's tokens."""
        if tokens[0] == "p":
            self.read_header(number, tokens)
            return
        if self.header is None:
            raise self.error(
                number, f"the header 'p cnf VARIABLES CLAUSES' is missing before {tokens[0][:20]!r}"
            )
        for token in tokens:
            self.read_token(number, token, self.header[0])

    def read_header(self, number: int, tokens: list[str]) -> None:
        if self.header is not None:
            raise self.error(number, "a second header: a file has one 'p cnf' line")
        if (
            len(tokens) != 4
            or tokens[1] != "cnf"
            or not all(re.fullmatch("[0-9]{1,12}", t) for t in tokens[2:])
        ):
            shown = " ".join(tokens)[:40]
            raise self.error(number, f"'p cnf VARIABLES CLAUSES' is wanted, not {shown!r}")
        variables, clauses = int(tokens[2]), int(tokens[3])
        if variables == 0:
            raise self.error(number, "the formula has no variables: an oracle needs at least one")
        self.header = (variables, clauses)

    def read_token(self, number: int, token: str, variables: int) -> None:
        if token.startswith("x") and not self.in_clause:
            self.is_xor = self.in_clause = True
            token = token[1:]
            if not token:
                return
        if not _LITERAL.fullmatch(token):
            raise self.error(
                number, f"{token[:20]!r} is no literal: integers and 0 at a clause's end are wanted"
            )
        literal = int(token)
        if literal == 0:
            self.close()
        elif abs(literal) > variables:
            raise self.error(number, f"variable {abs(literal)} is beyond the {variables} of the header")
        else:
            self.in_clause = True
            self.open.append(literal)

    def close(self) -> None:
        (self.xor_clauses if self.is_xor else self.clauses).append(tuple(self.open))
        self.open = []
        self.in_clause = self.is_xor = False

    def finish(self) -> Clauses:
        if self.header is None:
            raise SpecError("the header 'p cnf VARIABLES CLAUSES' is missing", source=self.source)
        if self.in_clause:
            self.close()
        found, (variables, wanted) = len(self.clauses) + len(self.xor_clauses), self.header
        if found != wanted:
            raise SpecError(
                f"the header says {wanted} clauses, the file has {found}: correct the header or the clauses",
                source=self.source,
            )
        return Clauses(variables, tuple(self.clauses), tuple(self.xor_clauses))

    def error(self, number: int, message: str) -> SpecError:
        return SpecError(message, source=self.source, place=f"line {number}")
