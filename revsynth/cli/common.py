"""What the commands share: the spec arguments, progress on a terminal, JSON output."""

from __future__ import annotations

import json
import sys
from collections.abc import Callable
from typing import TYPE_CHECKING, Any, TypeVar

import click

from revsynth.errors import UsageError
from revsynth.one_line import one_line
from revsynth.spec.model import Spec

if TYPE_CHECKING:
    from revsynth.qasm import Program

F = TypeVar("F", bound=Callable[..., Any])

MOST_WARNINGS = 8
"""So many warnings are shown; the rest are counted."""

SAFE_INTEGER = (1 << 53) - 1
"""Integers beyond are written as decimal strings: many JSON readers keep 53 bits."""


def spec_options(command: F) -> F:
    """The options that stand in for a spec file, and `--from`."""
    for option in (
        click.option(
            "--free-inputs",
            is_flag=True,
            help="Of a CNF: make inputs of the free variables only; the others follow from them.",
        ),
        click.option(
            "--from",
            "from_format",
            metavar="FORMAT",
            help="Format of SPEC: toml, cnf, pla, blif, bench, aiger, bristol. Default: by the ending, "
            "toml for '-'.",
        ),
        click.option("--domain", metavar="EXPR", help="With --where: the inputs that matter. Default: all."),
        click.option(
            "--constant",
            "constants",
            multiple=True,
            metavar="NAME=JSON",
            help="With --where: a constant, such as edges=[[0,1],[1,2]].",
        ),
        click.option(
            "--input",
            "inputs",
            multiple=True,
            metavar="NAME=BITS",
            help="With --where: a word; k=3s is signed, cell=2x5 five words of 2 bits.",
        ),
        click.option("--where", metavar="EXPR", help="A predicate in place of SPEC."),
    ):
        command = option(command)
    return command


def load_spec(
    path: str | None,
    where: str | None,
    inputs: tuple[str, ...],
    constants: tuple[str, ...],
    domain: str | None,
    from_format: str | None,
    free_inputs: bool = False,
) -> Spec:
    """The spec from a file, standard input ('-'), or the command line."""
    if where is not None:
        if path is not None or from_format is not None:
            raise UsageError("--where stands in place of SPEC: give one of them")
        if free_inputs:
            raise UsageError("--free-inputs goes with a CNF file, not with --where")
        from revsynth.spec.inline import inline_spec

        return inline_spec(where, inputs, constants, domain)
    for name, given in (("--input", inputs), ("--constant", constants), ("--domain", domain)):
        if given:
            raise UsageError(f"{name} goes with --where, not with a spec file")
    if path is None:
        raise UsageError("name a spec file ('-' for standard input), or give --where and --input")
    from revsynth.spec.read import read_spec

    spec = read_spec(path, from_format=from_format)
    if not free_inputs:
        return spec
    from revsynth.elaborate.free_spec import free_spec

    return free_spec(spec).spec


def load_program(file: str, negctrl: Any) -> Program:
    """The circuit of an OpenQASM file, or of standard input ('-')."""
    from revsynth.qasm import read, read_file

    if file == "-":
        return read(
            sys.stdin.buffer.read().decode("utf-8", "replace"), source="standard input", negctrl=negctrl
        )
    return read_file(file, negctrl=negctrl)


def shown_file(file: str) -> str:
    """The name of a file as results show it."""
    return "standard input" if file == "-" else one_line(file)


def progress_line() -> Callable[[str], None]:
    """Progress on one line of a terminal's standard error; silent where it is piped."""
    if not sys.stderr.isatty():
        return lambda _: None

    def show(text: str) -> None:
        sys.stderr.write(f"\r\x1b[K{text[:100]}")
        sys.stderr.flush()

    return show


def clear_progress() -> None:
    """Take the progress line away before results are shown."""
    if sys.stderr.isatty():
        sys.stderr.write("\r\x1b[K")
        sys.stderr.flush()


def warn(texts: tuple[str, ...]) -> None:
    """Warnings go to standard error, one line each; of very many, the first few."""
    for text in texts[:MOST_WARNINGS]:
        click.echo(f"warning: {text}", err=True)
    if len(texts) > MOST_WARNINGS:
        click.echo(f"warning: and {len(texts) - MOST_WARNINGS} more", err=True)


def echo_json(value: Any) -> None:
    """One JSON object on standard output; integers of more than 53 bits as decimal strings."""
    click.echo(json.dumps(_safe(value), indent=2, ensure_ascii=False))


def _safe(value: Any) -> Any:
    if isinstance(value, dict):
        return {key: _safe(entry) for key, entry in value.items()}
    if isinstance(value, (list, tuple)):
        return [_safe(entry) for entry in value]
    if isinstance(value, int) and not isinstance(value, bool) and abs(value) > SAFE_INTEGER:
        return str(value)
    return value
