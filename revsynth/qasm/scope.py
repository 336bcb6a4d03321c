"""What the names of a file stand for, and which qubits or bits an operand names."""

from __future__ import annotations

import math
from collections import ChainMap
from collections.abc import Mapping, Sequence
from dataclasses import dataclass

from revsynth.qasm.budget import MAX_QUBITS, Budget
from revsynth.qasm.expressions import evaluate
from revsynth.qasm.lexer import Source
from revsynth.qasm.syntax import Expression, Number, Operand, Selector, Span, VersionNumber

BUILT_IN: dict[str, Number] = {
    "pi": math.pi,
    "π": math.pi,
    "tau": math.tau,
    "τ": math.tau,
    "euler": math.e,
    "ℇ": math.e,
}


@dataclass(frozen=True)
class Place:
    """Qubits or bits by number, index 0 of the register first; `single` for one without a register."""

    members: Sequence[int]
    single: bool = False


class Scope:
    """Registers, bits and constants by name; one name means one thing in a file."""

    def __init__(self, source: Source, budget: Budget) -> None:
        self.source = source
        self.version: VersionNumber = 3
        self.qubits: dict[str, Place] = {}
        self.bits: dict[str, Place] = {}
        self.constants: dict[str, Number] = dict(BUILT_IN)
        self.taken: dict[str, str] = {}
        self._budget = budget

    def declare(self, name: str, what: str, position: int) -> None:
        """Take a name for good; raises CircuitFileError where it is taken."""
        if name in self.taken:
            raise self.source.error(f"'{name}' is already {self.taken[name]}", position)
        if name in BUILT_IN:
            raise self.source.error(f"'{name}' is a built-in constant", position)
        self.taken[name] = what

    def number(self, expression: Expression, constants: Mapping[str, Number]) -> Number:
        """The value of a constant expression."""
        return evaluate(expression, constants, self.source, self.version)

    def integer(self, expression: Expression, constants: Mapping[str, Number], what: str) -> int:
        """The value as an integer; `what` names it in the error."""
        value = self.number(expression, constants)
        if isinstance(value, bool) or not isinstance(value, int):
            raise self.source.error(f"{what} must be an integer, not {value!r}", expression.position)
        return value

    def angle(self, expression: Expression, constants: Mapping[str, Number]) -> float:
        """The value as a finite angle in radians."""
        value = self.number(expression, constants)
        try:
            angle = float(value)
        except OverflowError:
            angle = math.inf
        if isinstance(value, bool) or not math.isfinite(angle):
            raise self.source.error("an angle must be a finite number", expression.position)
        return angle

    def size(self, expression: Expression | None) -> int:
        """The size of a register to declare (1 where left out)."""
        if expression is None:
            return 1
        size = self.integer(expression, self.constants, "the size of a register")
        if not 1 <= size <= MAX_QUBITS:
            shown = size if abs(size) < 10**12 else "this number"
            raise self.source.error(
                f"a register of {shown}: the size must be 1 ... {MAX_QUBITS:,}", expression.position
            )
        return size

    def quantum(self, operand: Operand, constants: Mapping[str, Number]) -> Place:
        """The qubits an operand names."""
        return self._find(operand, constants, self.qubits, "qubits", self.bits, "bits")

    def classical(self, operand: Operand, constants: Mapping[str, Number]) -> Place:
        """The bits an operand names."""
        return self._find(operand, constants, self.bits, "bits", self.qubits, "qubits")

    def _find(
        self,
        operand: Operand,
        constants: Mapping[str, Number],
        among: dict[str, Place],
        wanted: str,
        others: dict[str, Place],
        found: str,
    ) -> Place:
        place = among.get(operand.name)
        if place is None:
            if operand.name in others:
                message = f"'{operand.name}' holds {found} where {wanted} are needed"
            else:
                message = f"'{operand.name}' is not declared as {wanted}"
            raise self.source.error(message, operand.position)
        for selector in operand.selectors:
            place = self._select(place, selector, operand, constants)
        return place

    def _select(
        self, place: Place, selector: Selector, operand: Operand, constants: Mapping[str, Number]
    ) -> Place:
        if place.single:
            raise self.source.error(
                f"'{operand.name}' is a single one here and takes no index", operand.position
            )
        if isinstance(selector, Expression):
            return Place((place.members[self._index(place, selector, operand, constants)],), single=True)
        if isinstance(selector, Span):
            return Place(self._range(place, selector, operand, constants))
        indices = [self._index(place, item, operand, constants) for item in selector]
        return Place(tuple(place.members[index] for index in indices))

    def _index(
        self, place: Place, expression: Expression, operand: Operand, constants: Mapping[str, Number]
    ) -> int:
        """An index from 0; in OpenQASM 3 negative ones count from the end."""
        value = self.integer(expression, constants, "an index")
        size = len(place.members)
        lowest = -size if self.version == 3 else 0
        if not lowest <= value < size:
            shown = value if abs(value) < 10**12 else "this index"
            raise self.source.error(
                f"{shown} is out of range: '{operand.name}' has indices 0 ... {size - 1}", expression.position
            )
        return value % size

    def _range(
        self, place: Place, span: Span, operand: Operand, constants: Mapping[str, Number]
    ) -> Sequence[int]:
        """Both ends of a range are included."""
        step = 1 if span.step is None else self.integer(span.step, constants, "a step")
        if step == 0:
            raise self.source.error("the step of a range must not be 0", span.position)
        size = len(place.members)
        first, last = (0, size - 1) if step > 0 else (size - 1, 0)
        start = first if span.start is None else self._index(place, span.start, operand, constants)
        stop = last if span.stop is None else self._index(place, span.stop, operand, constants)
        found = [place.members[index] for index in range(start, stop + (1 if step > 0 else -1), step)]
        if not found:
            raise self.source.error("this range is empty", span.position)
        self._budget.operations(len(found), span.position)
        return tuple(found)

    def rounds(
        self, over: Span | tuple[Expression, ...], constants: Mapping[str, Number], position: int
    ) -> Sequence[int]:
        """The values of a loop variable, both ends of a range included."""
        if not isinstance(over, Span):
            return [self.integer(item, constants, "a value of a loop") for item in over]
        if over.start is None or over.stop is None:
            raise self.source.error("the range of a loop needs both ends", over.position)
        start = self.integer(over.start, constants, "the start of a range")
        stop = self.integer(over.stop, constants, "the end of a range")
        step = 1 if over.step is None else self.integer(over.step, constants, "a step")
        if step == 0:
            raise self.source.error("the step of a range must not be 0", over.position)
        return range(start, stop + (1 if step > 0 else -1), step)


def with_value(constants: Mapping[str, Number], name: str, value: Number) -> Mapping[str, Number]:
    """The constants with one more in front of them (a loop variable)."""
    return ChainMap({name: value}, constants)  # type: ignore[arg-type]
