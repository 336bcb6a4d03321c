"""Whole lines at once: lines seen before by look-up, plain new ones by one pattern, the rest by the parser.

A line is remembered with the operations it stands for. That is sound at the top level because what a
statement appends depends on its text and the declared names alone, and names are never declared twice.
"""

from __future__ import annotations

import re
from itertools import chain

import numpy as np

from revsynth.circuit.model import Condition, Guard, Kind
from revsynth.errors import CircuitFileError
from revsynth.qasm.conditions import ConditionReader, as_condition
from revsynth.qasm.interpreter import Interpreter
from revsynth.qasm.lexer import Lexer, Source, comment_text
from revsynth.qasm.parser import Parser
from revsynth.qasm.recorder import OpNumber
from revsynth.qasm.syntax import GateCall
from revsynth.qasm.template import Template

_HEAD = r"((?:(?:neg)?ctrl(?:\([0-9]{1,3}\))? @ )*[A-Za-z_][A-Za-z0-9_]*(?:\([^()\n;]*\))?)"
_TAIL = r"([A-Za-z_][A-Za-z0-9_\[\], ]*)"
_GATE = re.compile(rf"[ \t]*{_HEAD}[ \t]+{_TAIL};[ \t]*(?://.*)?")
_CONDITIONAL = re.compile(
    rf"[ \t]*if \(((?:[^(){{}}/;]|\([^(){{}}/;]*\))*)\) \{{ {_HEAD} {_TAIL}; \}}[ \t]*(?://.*)?"
)
_BIT = r"([A-Za-z_][A-Za-z0-9_]*)\[([0-9]{1,9})\]"
_MEASURE = re.compile(rf"[ \t]*{_BIT} = measure {_BIT};[ \t]*(?://.*)?")
_OLD_MEASURE = re.compile(rf"[ \t]*measure {_BIT}[ \t]*->[ \t]*{_BIT};[ \t]*(?://.*)?")
_QUBIT = re.compile(_BIT)
_BLANK = re.compile(r"[ \t]*")
_ELSE = re.compile(r"\belse\b")
_LONGEST = 4096
_MOST_AT_ONCE = 4096
_LONGEST_MEMORY = 256


class FastPath:
    """Takes whole lines from the lexer's place on, as many as it can."""

    def __init__(self, lexer: Lexer, parser: Parser, interpreter: Interpreter) -> None:
        self._lexer = lexer
        self._parser = parser
        self._interpreter = interpreter
        self._recorder = interpreter.recorder
        self._lines = lexer.text.split("\n")
        lengths = np.fromiter(map(len, self._lines), dtype=np.int64, count=len(self._lines))
        self._starts = np.concatenate([np.zeros(1, dtype=np.int64), np.cumsum(lengths + 1)])
        self._memory: dict[str, tuple[OpNumber, ...]] = {"": ()}
        self._heads: dict[str, tuple[Template, int]] = {}
        self._qubits: dict[str, int] = {}
        self._conditions: dict[str, Condition] = {}
        self._revision = 0
        has_else = "else" in lexer.text and _ELSE.search(lexer.text) is not None
        self._whole_branches = parser.version == 3 and not has_else

    def run(self) -> None:
        """Take lines until one needs the parser; leaves the lexer at the start of that line."""
        first = self._next_line()
        if first is None:
            return
        if self._revision != self._interpreter.gates.revision:
            self._revision = self._interpreter.gates.revision
            self._heads.clear()
            self._memory.clear()
        place = first
        while place < len(self._lines):
            place += self._block(place)
            if place == len(self._lines):
                break
            numbers = self._memory.get(self._lines[place])
            if numbers is None:
                numbers = self._take(self._lines[place])
                if numbers is None:
                    break
            if len(numbers) > 1:
                self._interpreter.budget.operations(len(numbers), int(self._starts[place]))
            self._recorder.sequence.extend(numbers)
            place += 1
        self._lexer.jump(min(int(self._starts[place]), len(self._lexer.text)))

    def _block(self, place: int) -> int:
        """Take the lines from a place on that stand for one operation or none each: how many.

        They are taken many at a time, twice as many each time that all of them are of this kind.
        """
        size, first, memory = 1, place, self._memory
        while place < len(self._lines):
            some = self._lines[place : place + size]
            for index, line in enumerate(some):
                if line not in memory and self._operations(line) is None:
                    del some[index:]
                    break
            found = [memory[line] for line in some]
            if max(map(len, found), default=0) > 1:
                del found[next(index for index, numbers in enumerate(found) if len(numbers) > 1) :]
            self._recorder.sequence.extend(chain.from_iterable(found))
            place += len(found)
            if len(found) < size:
                break
            size = min(2 * size, _MOST_AT_ONCE)
        return place - first

    def line_start(self) -> int | None:
        """The number of the line that starts where the lexer is, if one does."""
        position = self._lexer.boundary()
        line = int(np.searchsorted(self._starts, position, side="right")) - 1
        return line if line < len(self._lines) and self._starts[line] == position else None

    def remember(self, line: int, numbers: list[OpNumber]) -> None:
        """Keep what the parser made of a whole line, for the next time."""
        if (
            self._lexer.boundary() == self._starts[line] + len(self._lines[line])
            and len(numbers) < _LONGEST_MEMORY
        ):
            self._memory[self._lines[line]] = tuple(numbers)

    def _next_line(self) -> int | None:
        """The line to start with: this one where nothing precedes the place, the next where none follows."""
        position = self._lexer.boundary()
        line = int(np.searchsorted(self._starts, position, side="right")) - 1
        if line >= len(self._lines):
            return None
        text = self._lines[line]
        column = position - int(self._starts[line])
        if _blank_until(text, 0) >= column:
            return line
        return line + 1 if _blank_until(text, column) == len(text) else None

    def _take(self, line: str) -> tuple[OpNumber, ...] | None:
        """What a line not seen before stands for; None where the parser has to look."""
        if len(line) > _LONGEST:
            return None
        numbers = self._operations(line)
        if numbers is not None:
            return numbers
        stripped = line.strip(" \t")
        if stripped.startswith("//"):
            self._lexer.comments.append(comment_text(stripped))
            return ()
        return None if stripped else ()

    def _operations(self, line: str) -> tuple[OpNumber, ...] | None:
        """The operations of a line not seen before, which is remembered; None where it is of another kind."""
        if len(line) > _LONGEST:
            return None
        numbers = self._gate(line) or self._measurement(line) or self._conditional(line)
        if numbers is not None:
            self._memory[line] = numbers
        return numbers

    def _gate(self, line: str) -> tuple[OpNumber, ...] | None:
        head, _, operands = line.partition(" ")
        if head in self._heads and operands.endswith(";"):
            numbers = self._numbers(head, operands[:-1], ())
            if numbers is not None:
                return numbers
        found = _GATE.fullmatch(line)
        return None if found is None else self._numbers(found[1], found[2], ())

    def _conditional(self, line: str) -> tuple[OpNumber, ...] | None:
        found = _CONDITIONAL.fullmatch(line)
        if found is None or not self._whole_branches:
            return None
        condition = self._condition(found[1])
        return self._numbers(found[2], found[3], condition) if condition else None

    def _measurement(self, line: str) -> tuple[OpNumber, ...] | None:
        found = _MEASURE.fullmatch(line)
        if found is not None and self._parser.version == 3:
            bit, qubit = (found[1], found[2]), (found[3], found[4])
        else:
            found = _OLD_MEASURE.fullmatch(line)
            if found is None:
                return None
            qubit, bit = (found[1], found[2]), (found[3], found[4])
        scope = self._interpreter.scope
        source, into = scope.qubits.get(qubit[0]), scope.bits.get(bit[0])
        if source is None or into is None or source.single or into.single:
            return None
        if int(qubit[1]) >= len(source.members) or int(bit[1]) >= len(into.members):
            return None
        number = self._recorder.number(
            Kind.MEASURE, (source.members[int(qubit[1])],), bit=into.members[int(bit[1])]
        )
        return (number,)

    def _numbers(self, head: str, operands: str, condition: Condition) -> tuple[OpNumber, ...] | None:
        """The operations of `head operands` under a condition; None leaves any complaint to the parser."""
        qubits: list[int] = []
        for text in operands.split(","):
            qubit = self._qubits.get(text, -1)
            if qubit < 0:
                qubit = self._qubit(text)
                if qubit < 0:
                    return None
            qubits.append(qubit)
        if len(qubits) > 1 and len(set(qubits)) != len(qubits):
            return None
        known = self._heads.get(head)
        if known is None:
            known = self._head(head, len(qubits))
            if known is None:
                return None
        template, width = known
        if width != len(qubits):
            return None
        number = self._recorder.number
        numbers: list[OpNumber] = []
        for kind, controls, targets, angles in template:
            where = [2 * qubits[control >> 1] | (control & 1) for control in controls]
            where += [qubits[target] for target in targets]
            numbers.append(number(kind, tuple(where), angles, condition))
        return tuple(numbers)

    def _qubit(self, text: str) -> int:
        """The number of the qubit that the text names; -1 where it names none by register and index."""
        found = _QUBIT.fullmatch(text.strip(" "))
        place = self._interpreter.scope.qubits.get(found[1]) if found else None
        if found is None or place is None or place.single or int(found[2]) >= len(place.members):
            return -1
        qubit = place.members[int(found[2])]
        self._qubits[text] = qubit
        return qubit

    def _snippet(self, text: str) -> Parser:
        parser = Parser(Lexer(Source(text, "")))
        parser.version = self._parser.version
        return parser

    def _head(self, head: str, width: int) -> tuple[Template, int] | None:
        """A gate with its parameters and modifiers, worked out by the parser itself."""
        names = ", ".join(f"a{index}" for index in range(width))
        try:
            call = self._snippet(f"{head} {names};").top_level()
            if not isinstance(call, GateCall):
                return None
            gates = self._interpreter.gates
            scope = self._interpreter.scope
            template = gates.template(call, gates.find(call), scope.constants, self._recorder.qubits)
        except CircuitFileError:
            return None
        if len(template) > _LONGEST_MEMORY:
            return None
        self._heads[head] = (template, width)
        return template, width

    def _condition(self, text: str) -> Condition | None:
        """The condition in the brackets of an `if`; None where it is constant, or refused by the parser."""
        known = self._conditions.get(text)
        if known is None:
            known = self._one_bit(text)
        if known is None:
            parser = self._snippet(text)
            scope = self._interpreter.scope
            try:
                expression = parser.expression()
                if not parser.at_end():
                    return None
                formula = ConditionReader(scope).read(expression, scope.constants)
                known = as_condition(formula, expression, scope) or ()
            except CircuitFileError:
                return None
            self._conditions[text] = known
        return known or None

    def _one_bit(self, text: str) -> Condition | None:
        """The condition that one bit, named by register and index, is 1, the most common one."""
        found = _QUBIT.fullmatch(text)
        register = self._interpreter.scope.bits.get(found[1]) if found else None
        if found is None or register is None or register.single or int(found[2]) >= len(register.members):
            return None
        known = self._conditions[text] = (Guard((2 * register.members[int(found[2])],)),)
        return known


def _blank_until(line: str, column: int) -> int:
    """Where the blanks that start at `column` end."""
    found = _BLANK.match(line, column)
    return found.end() if found else column
