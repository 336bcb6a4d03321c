"""Carrying out a plan without a line for any XOR: the lines hold an invertible linear map of the variables.

A sum is made by folding lines onto one of them, and nothing is undone before the mirror. Which line takes the
sum is decided by looking ahead over the next sums: the choice changes how many lines each of them is spread
over. The work grows with the square of the number of variables.
"""

from __future__ import annotations

from collections import deque
from collections.abc import Iterator

from revsynth.cascade.model import PHASE
from revsynth.synthesis.scratch.landing import Landing
from revsynth.synthesis.scratch.plan import ACT, ERASE, Operation
from revsynth.synthesis.scratch.sheet import Sheet
from revsynth.synthesis.scratch.units import Act, Sum, Units, Variable

LOOK_AHEAD = 72
"""Sums that the choice of a line takes into account."""

Mask = int
"""A set of lines or of variables as an integer's bits."""


def carry_out(
    units: Units,
    operations: list[Operation],
    landing: Landing,
    phase: bool,
    look_ahead: int = LOOK_AHEAD,
    hinted: bool = True,
) -> Sheet:
    """The forward run of a plan on lines inputs, outputs (none for phase), work.

    hinted: make sums that several gates read (`Units.hints`) as soon as that seems to pay.
    """
    run = _Run(units, operations, landing, phase, look_ahead, hinted)
    for operation in operations:
        index, kind = divmod(operation, 3)
        if kind == ACT:
            run.act(units.acts[index])
        elif kind == ERASE:
            run.erase(index)
        else:
            run.compute(index)
    return run.sheet


class _Request:
    """A sum that will be needed: its variables, what a line in it costs, and the lines it is spread over."""

    __slots__ = ("cost", "spread", "variables")

    def __init__(self, variables: Mask, cost: int) -> None:
        self.variables = variables
        self.cost = cost
        self.spread: Mask = 0


class _Run:
    """The state of the lines.

    spread[v]: the lines whose XOR is variable v (0 while it is not there); holders[l]: the variables with l
    in their spread; content[l]: the variables whose XOR is on line l.
    """

    def __init__(
        self,
        units: Units,
        operations: list[Operation],
        landing: Landing,
        phase: bool,
        look_ahead: int,
        hinted: bool,
    ) -> None:
        n = units.inputs
        self.units = units
        self.landing = landing
        self.phase = phase
        self.sheet = Sheet(n, 0 if phase else len(units.constants))
        self.spread: list[Mask] = [1 << v for v in range(n)] + [0] * len(units)
        self.holders: dict[int, Mask] = {v: 1 << v for v in range(n)}
        self.content: dict[int, Mask] = {v: 1 << v for v in range(n)}
        self.requests = _requests(units, operations)
        self.window: deque[_Request] = deque()
        self.look_ahead = look_ahead
        self.hints: dict[int, list[Sum]] = {}
        for hint in units.hints if hinted else ():
            self.hints.setdefault(max(hint), []).append(hint)
        for _ in range(look_ahead):
            self._refill()
        for variable in range(-1, n):
            self._follow_hints(variable)

    def _refill(self) -> None:
        request = next(self.requests, None)
        if request is not None:
            for variable in _bits(request.variables):
                request.spread ^= self.spread[variable]
            self.window.append(request)

    def _next(self) -> Mask:
        """Take the first request off the window; its spread."""
        self._refill()
        return self.window.popleft().spread

    def scores(self, lines: Mask) -> list[tuple[Mask, int]]:
        """(spread, change in cost) of each request, if a line in its spread took the sum of `lines`."""
        result = []
        for request in self.window:
            spread = request.spread
            if spread & lines:
                change = (spread ^ lines).bit_count() + 1 - spread.bit_count()
                if change:
                    result.append((spread, change * request.cost))
        return result

    def best(self, lines: Mask, avoid: int = -1) -> tuple[int, int]:
        """(change in cost of the requests ahead, line) of the best line of `lines` for their sum."""
        scores = self.scores(lines)
        found = (1 << 60, -1)
        for line in _bits(lines):
            if line != avoid:
                change = sum(change for spread, change in scores if spread >> line & 1)
                if change < found[0]:
                    found = (change, line)
        return found

    def fold(self, lines: Mask, pivot: int) -> None:
        """XOR the other lines onto the pivot."""
        rest = lines ^ 1 << pivot
        held = self.holders[pivot]
        for line in _bits(rest):
            self.sheet.cnot(line, pivot)
            self.content[pivot] ^= self.content[line]
            self.holders[line] ^= held
        for variable in _bits(held):
            self.spread[variable] ^= rest
        for request in self.window:
            if request.spread >> pivot & 1:
                request.spread ^= rest

    def place(self, lines: Mask, avoid: int = -1) -> int:
        """A line other than `avoid` that holds the sum of `lines`, made so."""
        if lines & (lines - 1) == 0:
            return lines.bit_length() - 1
        pivot = self.best(lines, avoid)[1]
        self.fold(lines, pivot)
        return pivot

    def product(self, flips: int, targets: list[int]) -> tuple[int, int]:
        """XOR the AND of the next two requests onto the targets; the lines of the two."""
        one = self.place(self._next())
        other = self.place(self._next(), one)
        self.write(one, other, flips, targets)
        return one, other

    def write(self, one: int, other: int, flips: int, targets: list[int]) -> None:
        """The AND of two lines, complemented by flips, onto all targets."""
        for target in targets[1:]:
            self.sheet.cnot(targets[0], target)
        self.sheet.put(targets[0], 2 * one | (flips & 1), 2 * other | flips >> 1)
        for target in targets[1:]:
            self.sheet.cnot(targets[0], target)

    def compute(self, unit: int) -> None:
        """Bring the unit onto a line."""
        units = self.units
        landing = self.landing.line_of(unit)
        line = self.sheet.take() if landing is None else landing
        if units.left[unit]:
            self.product(units.flips[unit], [line])
            if landing is not None:
                self._land(unit, line)
            elif self.landing.keep:
                self.sheet.keep(line)
        if units.tail[unit]:
            for source in _bits(self._next()):
                self.sheet.cnot(source, line)
        variable = units.inputs + unit
        self.spread[variable] = 1 << line
        self.holders[line] = self.content[line] = 1 << variable
        self._toggle(variable, 1 << line)
        self._follow_hints(variable)

    def _toggle(self, variable: Variable, lines: Mask) -> None:
        for request in self.window:
            if request.variables >> variable & 1:
                request.spread ^= lines

    def _land(self, unit: int, target: int) -> None:
        """The product is on its output line for good: in the mirror the rest of the output joins it."""
        lines = 0
        for variable in self.landing.rest[unit]:
            lines ^= self.spread[variable]
        self.sheet.instead[len(self.sheet) - 1] = [(target, 2 * line, -1) for line in _bits(lines)]

    def _follow_hints(self, variable: Variable) -> None:
        """Make sums that several gates read, now that the last of their variables is there."""
        for hint in self.hints.pop(variable, ()):
            lines = 0
            for member in hint:
                lines ^= self.spread[member]
            if lines & (lines - 1):
                change, pivot = self.best(lines)
                if change + 2 * (lines.bit_count() - 1) < 0:
                    self.fold(lines, pivot)

    def erase(self, unit: int) -> None:
        """Free the unit's line; no other line may hold a part of it then."""
        units, variable = self.units, self.units.inputs + unit
        one = other = -1
        if units.left[unit]:
            one = self.place(self._next())
            other = self.place(self._next(), one)
        lines = self._next()
        line = lines.bit_length() - 1
        if lines & (lines - 1):
            apart = lines & ~(1 << one if one >= 0 else 0) & ~(1 << other if other >= 0 else 0)
            line = min((self._change(lines, p), p) for p in _bits(apart))[1]
            self.fold(lines, line)
        bit = 1 << variable
        for carrier in [at for at, held in self.content.items() if held & bit and at != line]:
            self.fold(1 << carrier | 1 << line, carrier)
        if units.tail[unit]:
            for source in _bits(self._next()):
                self.sheet.cnot(source, line)
        if units.left[unit]:
            self.write(one, other, units.flips[unit], [line])
        self.spread[variable] = 0
        del self.holders[line], self.content[line]
        self._toggle(variable, 1 << line)
        self.sheet.give(line)

    def _change(self, lines: Mask, line: int) -> int:
        return sum(change for spread, change in self.scores(lines) if spread >> line & 1)

    def act(self, act: Act) -> None:
        """Add a product or a sum to outputs, or turn the phase by it."""
        targets = [PHASE] if self.phase else [self.units.inputs + output for output in act.outputs]
        start = len(self.sheet)
        if act.right:
            self.product(act.flips, targets)
        else:
            lines = self._next()
            count = lines.bit_count()
            if count > 1 and not self.phase:
                change, pivot = self.best(lines)
                if change + 2 * (count - 1) + len(targets) < count * len(targets):
                    self.fold(lines, pivot)
                    lines = 1 << pivot
            for line in _bits(lines):
                for target in targets:
                    self.sheet.put(target, 2 * line)
        self.sheet.acted(start, set(targets))


def _requests(units: Units, operations: list[Operation]) -> Iterator[_Request]:
    """The sums in the order in which the operations ask for them; a CNOT of a fold is done twice."""
    for operation in operations:
        index, kind = divmod(operation, 3)
        if kind == ACT:
            act = units.acts[index]
            if act.right:
                yield _Request(_mask(act.left), 2)
                yield _Request(_mask(act.right), 2)
            else:
                yield _Request(_mask(act.left), 1)
            continue
        if units.left[index]:
            yield _Request(_mask(units.left[index]), 2)
            yield _Request(_mask(units.right[index]), 2)
        if kind == ERASE:
            yield _Request(1 << (units.inputs + index), 2)
        if units.tail[index]:
            yield _Request(_mask(units.tail[index]), 2)


def _mask(variables: Sum) -> Mask:
    mask = 0
    for variable in variables:
        mask |= 1 << variable
    return mask


def _bits(mask: Mask) -> Iterator[int]:
    """The numbers of the bits that are 1, lowest first."""
    while mask:
        low = mask & -mask
        yield low.bit_length() - 1
        mask ^= low
