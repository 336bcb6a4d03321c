"""Reading an OpenQASM file of either version into a circuit.

A file without a version line is read as OpenQASM 3 with the standard gates at hand, or as OpenQASM 2 where
it starts by including qelib1.inc.
"""

from __future__ import annotations

from dataclasses import dataclass
from pathlib import Path
from typing import Literal

from revsynth.circuit.model import Circuit
from revsynth.errors import CircuitFileError
from revsynth.qasm.fast_path import FastPath
from revsynth.qasm.gate_table import NegativeControls
from revsynth.qasm.interpreter import Interpreter
from revsynth.qasm.lexer import Lexer, Source
from revsynth.qasm.parser import Parser
from revsynth.qasm.recorder import Recorder
from revsynth.qasm.syntax import Declaration, Header, Include, Statement, VersionNumber


@dataclass(frozen=True)
class Program:
    """A circuit as read: the version it is written in, and the text of its comment lines in order."""

    circuit: Circuit
    version: Literal["2.0", "3.0"]
    comments: tuple[str, ...] = ()


def read(text: str, *, source: str = "", negctrl: NegativeControls | None = None) -> Program:
    """Read the text of an OpenQASM 2 or 3 file; qubits are numbered through the registers in order.

    Args:
        source: the file's name, for error messages.
        negctrl: how `negctrl(n)` with n > 1 is meant; without it such a modifier is refused.

    Raises:
        CircuitFileError: by line and column, for whatever is wrong or not understood.
    """
    text = text.removeprefix("\ufeff").replace("\r\n", "\n").replace("\r", "\n")
    lexer = Lexer(Source(text, source))
    parser = Parser(lexer)
    recorder = Recorder()
    interpreter = Interpreter(lexer.source, recorder, negctrl)
    version = _start(lexer, parser, interpreter)
    fast = FastPath(lexer, parser, interpreter)
    while True:
        fast.run()
        if parser.at_end():
            break
        line = fast.line_start()
        before = len(recorder.sequence)
        names = interpreter.names_declared
        comments = len(lexer.comments)
        interpreter.run(parser.top_level())
        unchanged = names == interpreter.names_declared and comments == len(lexer.comments)
        if line is not None and unchanged:
            fast.remember(line, recorder.sequence[before:])
    return Program(recorder.circuit(), "3.0" if version == 3 else "2.0", tuple(lexer.comments))


def _start(lexer: Lexer, parser: Parser, interpreter: Interpreter) -> VersionNumber:
    """Read the version line, or decide what a file without one is; brings the gates that need no include."""
    version: VersionNumber = 3
    first: Declaration | Statement | None = None
    implied = False
    word = lexer.peek().text
    if word in ("OPENQASM", "include"):
        first = parser.top_level()
    if isinstance(first, Header):
        version = first.version
    elif isinstance(first, Include):
        version = 2 if first.name == "qelib1.inc" else 3
    else:
        implied = True
    parser.version = interpreter.scope.version = version
    interpreter.gates.start(implied=implied)
    if isinstance(first, Include):
        interpreter.run(first)
    return version


def read_file(path: str | Path, *, negctrl: NegativeControls | None = None) -> Program:
    """Read a file from disk, in UTF-8.

    Raises:
        CircuitFileError: where it cannot be opened, is not text in UTF-8, or is refused by `read`.
    """
    try:
        data = Path(path).read_bytes()
    except OSError as error:
        raise CircuitFileError(f"cannot be read: {error.strerror or error}", source=str(path)) from None
    try:
        text = data.decode("utf-8")
    except UnicodeDecodeError as error:
        line = data.count(b"\n", 0, error.start) + 1
        column = error.start - data.rfind(b"\n", 0, error.start)
        raise CircuitFileError(
            f"the byte 0x{data[error.start]:02x} is not UTF-8: this is no text file",
            source=str(path),
            line=line,
            column=column,
        ) from None
    return read(text, source=str(path), negctrl=negctrl)
