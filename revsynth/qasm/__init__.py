"""OpenQASM 2 and 3: writing circuits, reading files from anywhere, and register names that suit both."""

from revsynth.qasm.prepare import prepare
from revsynth.qasm.reader import Program, read, read_file
from revsynth.qasm.writer import with_header, write

__all__ = ["Program", "prepare", "read", "read_file", "with_header", "write"]
