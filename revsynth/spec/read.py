"""Reading a spec of any format. A new format is one reader and one line in READERS."""

from __future__ import annotations

import sys
from collections.abc import Callable
from dataclasses import dataclass, replace
from pathlib import Path
from typing import Any, Literal

from revsynth.errors import SpecError
from revsynth.spec.aiger import parse_aiger
from revsynth.spec.bench import parse_bench
from revsynth.spec.blif import parse_blif
from revsynth.spec.bristol import parse_bristol
from revsynth.spec.dimacs import parse_dimacs
from revsynth.spec.model import Spec
from revsynth.spec.pla import parse_pla
from revsynth.spec.toml_reader import parse_toml

STANDARD_INPUT = "-"


@dataclass(frozen=True)
class Reader:
    """A format: its name for `--from`, its file endings, and what the file holds to Spec.

    holds: "utf-8" where the whole text must be; "text" where only what matters must be (comments of old files
    may be in any encoding); "bytes" where `parse` wants them as they are.
    """

    name: str
    endings: tuple[str, ...]
    parse: Callable[[Any, str], Spec]
    holds: Literal["utf-8", "text", "bytes"] = "text"


READERS = (
    Reader("toml", (".toml",), parse_toml, holds="utf-8"),
    Reader("cnf", (".cnf", ".dimacs"), parse_dimacs),
    Reader("pla", (".pla",), parse_pla),
    Reader("blif", (".blif",), parse_blif),
    Reader("bench", (".bench",), parse_bench),
    Reader("aiger", (".aag", ".aig"), parse_aiger, holds="bytes"),
    Reader("bristol", (".bristol",), parse_bristol),
)


def read_spec(path: str, *, from_format: str | None = None) -> Spec:
    """Read a spec file by its ending, or in the format named; "-" is standard input (TOML unless named).

    Raises SpecError (one line) where the file cannot be read, is no text, or is no spec.
    """
    from_stdin = path == STANDARD_INPUT
    source = "standard input" if from_stdin else _one_line(Path(path).name)
    reader = _reader(path, from_format)
    content: bytes | str = _bytes(path)
    if isinstance(content, bytes) and reader.holds != "bytes":
        shown = source if from_stdin else _one_line(path)
        content = _decode(content, shown, strict=reader.holds == "utf-8")
    told_by_name = reader is READERS[0] if from_stdin else Path(path).suffix.lower() in reader.endings
    return replace(reader.parse(content, source), from_format=None if told_by_name else reader.name)


def _one_line(path: str) -> str:
    """A path as messages show it: characters that cannot be printed are escaped."""
    return path if path.isprintable() else ascii(path)[1:-1]


def _reader(path: str, from_format: str | None) -> Reader:
    if not path:
        raise SpecError("the name of the spec file is empty ('-' is standard input)")
    if from_format is not None:
        for reader in READERS:
            if from_format.lower() == reader.name or f".{from_format.lower()}" in reader.endings:
                return reader
        raise SpecError(f"--from {from_format[:40]!r} is unknown: {_names()} are known")
    if path == STANDARD_INPUT:
        return READERS[0]
    ending = Path(path).suffix.lower()
    for reader in READERS:
        if ending in reader.endings:
            return reader
    if Path(path).is_dir():
        raise SpecError("this is a directory: name a spec file in it", source=_one_line(path))
    found = f"the ending {ending!r} is unknown" if ending else "the name has no ending"
    known = ", ".join(ending for reader in READERS for ending in reader.endings)
    raise SpecError(
        f"{found}: {known} are known, or name the format (--from {_names()})", source=_one_line(path)
    )


def _names() -> str:
    names = [reader.name for reader in READERS]
    return f"{', '.join(names[:-1])} or {names[-1]}"


def _bytes(path: str) -> bytes:
    if path == STANDARD_INPUT:
        return sys.stdin.buffer.read()
    try:
        return Path(path).read_bytes()
    except IsADirectoryError:
        raise SpecError("this is a directory: name a spec file in it", source=_one_line(path)) from None
    except FileNotFoundError:
        raise SpecError("there is no such file", source=_one_line(path)) from None
    except (OSError, ValueError) as error:
        reason = getattr(error, "strerror", None) or "the name is not one of a file"
        raise SpecError(f"cannot be read: {reason}", source=_one_line(path)) from None


def _decode(data: bytes, source: str, strict: bool) -> str:
    if data.startswith((b"\xff\xfe", b"\xfe\xff")):
        raise SpecError("this is UTF-16 text: save it as UTF-8", source=source)
    if b"\0" in data:
        place = f"byte {data.index(0)}"
        raise SpecError("this is not a text file: it has a zero byte", source=source, place=place)
    try:
        text = data.decode("utf-8-sig", errors="strict" if strict else "replace")
    except UnicodeDecodeError as error:
        line = data.count(b"\n", 0, error.start) + 1
        raise SpecError(
            "this is not UTF-8 text: save the file as UTF-8", source=source, place=f"line {line}"
        ) from None
    return text.replace("\r\n", "\n").replace("\r", "\n") if not strict else text
