"""Berkeley PLA files: the leftmost input column is bit 0 of the word `v`, the leftmost output bit 0 of `f`.

The format is that of the Berkeley PLA manual page (UC Berkeley, from memory): `.i .o` first, then rows of an
input part (0 1 -) and an output part (0 1 - ~), with or without blanks or `|` between, over one or more
lines; `2` may stand for `-`, and `4` for an output's `1`. What an output's entry means depends on `.type`:

    type   1         0         -      ~        inputs without a row
    f      on        nothing   nothing nothing 0
    fd     on        nothing   free   nothing  0        (the default)
    fr     on        off       nothing nothing free
    fdr    on        off       free   nothing  free

Where rows overlap, on and off outrank free (whoever asks for a value gets it); on against off is an error.
"""

from __future__ import annotations

import re
from collections.abc import Iterator
from typing import Literal, TypeAlias

from revsynth.errors import SpecError
from revsynth.spec.model import Cover, Outputs, Predicate, Spec, Word

INPUT_WORD = "v"
OUTPUT_WORD = "f"
Kind: TypeAlias = Literal["f", "fd", "fr", "fdr"]
_KINDS: dict[str, Kind] = {"f": "f", "fd": "fd", "fr": "fr", "fdr": "fdr"}
_INPUT_PART = {"0": "0", "1": "1", "-": "-", "2": "-"}
_OUTPUT_PART = {"0": "0", "1": "1", "4": "1", "-": "-", "2": "-", "~": "~"}
_REFUSED = {
    ".mv": "variables of many values",
    ".symbolic": "symbolic variables",
    ".symbolic-output": "symbolic outputs",
    ".kiss": "state machines",
    ".phase": "outputs given complemented",
    ".pair": "paired inputs",
    ".label": "labels of many-valued variables",
}


def parse_pla(text: str, source: str = "table.pla") -> Spec:
    """The spec of a PLA text: a predicate where there is one output, else the output word `f`.

    Raises SpecError with the line for whatever is not a PLA of binary variables, and where rows are cut off.
    """
    reader = _Reader(source)
    for number, line in enumerate(text.split("\n"), 1):
        code = line.partition("#")[0].strip()
        if code:
            reader.take(number, code)
    cover = reader.finish()
    inputs = (Word(INPUT_WORD, cover.inputs),)
    body = Predicate(cover=cover) if cover.outputs == 1 else Outputs(cover=cover)
    return Spec(inputs, body, source=source, labels=dict(reader.labels()))


class _Reader:
    def __init__(self, source: str) -> None:
        self.source = source
        self.number = 0
        self.inputs: int | None = None
        self.outputs: int | None = None
        self.kind: Kind = "fd"
        self.promised: int | None = None
        self.ended = False
        self.rows: list[tuple[str, str]] = []
        self.part = ""
        self.part_line = 0
        self.names: dict[str, list[str]] = {}

    def take(self, number: int, code: str) -> None:
        """Read one line without its comment."""
        self.number = number
        if self.ended:
            raise self.error("there is more behind .e: a file holds one table")
        if code.startswith("."):
            if self.part:
                raise self.error(self.cut_off())
            self.keyword(code.split())
        else:
            self.row(code)

    def keyword(self, tokens: list[str]) -> None:
        name, arguments = tokens[0], tokens[1:]
        if name in (".i", ".o", ".p"):
            self.size(name, arguments)
        elif name == ".type":
            if len(arguments) != 1 or arguments[0] not in _KINDS:
                raise self.error(f".type f, fd, fr or fdr is wanted, not {' '.join(arguments)[:20]!r}")
            if self.rows:
                raise self.error(".type belongs before the first row")
            self.kind = _KINDS[arguments[0]]
        elif name in (".ilb", ".ob"):
            self.label(name, arguments)
        elif name in (".e", ".end"):
            self.ended = True
        elif name in _REFUSED:
            raise self.error(f"{name} ({_REFUSED[name]}) is not supported: 0/1 inputs and outputs only")
        else:
            raise self.error(f"{name[:20]!r} is unknown: .i .o .p .type .ilb .ob .e and .end are known")

    def size(self, name: str, arguments: list[str]) -> None:
        if len(arguments) != 1 or not re.fullmatch("[0-9]{1,9}", arguments[0]):
            raise self.error(f"{name} wants one number, not {' '.join(arguments)[:20]!r}")
        value = int(arguments[0])
        if name == ".p":
            self.promised = value
            return
        if value < 1:
            raise self.error(f"{name} wants a number from 1 on, not {value}")
        attribute = "inputs" if name == ".i" else "outputs"
        if getattr(self, attribute) is not None:
            raise self.error(f"a second {name}: a file holds one table")
        setattr(self, attribute, value)

    def label(self, name: str, labels: list[str]) -> None:
        wanted = self.inputs if name == ".ilb" else self.outputs
        if wanted is None:
            raise self.error(f"{name} belongs behind {'.i' if name == '.ilb' else '.o'}")
        if len(labels) != wanted:
            raise self.error(f"{name} wants {wanted} names, not {len(labels)}")
        self.names[name] = labels

    def row(self, code: str) -> None:
        """Collect the columns of a row, which may go on over several lines."""
        if self.inputs is None or self.outputs is None:
            raise self.error(f"{'.i' if self.inputs is None else '.o'} is missing before the first row")
        if not self.part:
            self.part_line = self.number
        self.part += re.sub(r"[\s|]", "", code)
        wanted = self.inputs + self.outputs
        if len(self.part) > wanted:
            raise self.error(
                f"{len(self.part)} columns, but .i {self.inputs} and .o {self.outputs} make {wanted}"
            )
        if len(self.part) == wanted:
            inputs = self.columns(self.part[: self.inputs], _INPUT_PART, "an input", "0, 1 and -")
            outputs = self.columns(self.part[self.inputs :], _OUTPUT_PART, "an output", "0, 1, - and ~")
            self.rows.append((inputs, outputs))
            self.part = ""

    def columns(self, part: str, known: dict[str, str], what: str, allowed: str) -> str:
        for column, character in enumerate(part):
            if character not in known:
                raise self.error(f"column {column} of {what} part is {character!r}: {allowed} are allowed")
        return "".join(known[character] for character in part)

    def cut_off(self) -> str:
        wanted = (self.inputs or 0) + (self.outputs or 0)
        return f"the row has {len(self.part)} columns, {wanted} are wanted"

    def finish(self) -> Cover:
        if self.inputs is None or self.outputs is None:
            missing = ".i" if self.inputs is None else ".o"
            raise SpecError(f"{missing} is missing: this is not a PLA", source=self.source)
        if self.part:
            raise self.error(self.cut_off())
        if not self.ended and self.promised is not None and len(self.rows) < self.promised:
            raise SpecError(
                f".p promises {self.promised} rows, but the file ends after {len(self.rows)}, without .e: "
                "it seems to be cut off",
                source=self.source,
            )
        return Cover(self.inputs, self.outputs, self.kind, tuple(self.rows))

    def labels(self) -> Iterator[tuple[str, str]]:
        """The file's names of bits by ours; a predicate's output has no name of ours."""
        for bit, name in enumerate(self.names.get(".ilb", [])):
            yield f"{INPUT_WORD}[{bit}]", name
        if self.outputs != 1:
            for bit, name in enumerate(self.names.get(".ob", [])):
                yield f"{OUTPUT_WORD}[{bit}]", name

    def error(self, message: str) -> SpecError:
        number = self.part_line if self.part else self.number
        return SpecError(message, source=self.source, place=f"line {number}")
