"""Carrying out a plan with a fixed line for every variable; sums are folded onto one of them and unfolded.

A fold is undone only when its line is next needed as it was. So where a variable is not used again before the
mirror, its line simply keeps the sum, and an XOR unit whose operand is not used again takes over that line.
"""

from __future__ import annotations

from revsynth.cascade.model import PHASE
from revsynth.synthesis.scratch.landing import Landing
from revsynth.synthesis.scratch.plan import ACT, ERASE, Operation, reads_of
from revsynth.synthesis.scratch.sheet import Sheet
from revsynth.synthesis.scratch.units import Act, Sum, Units, Variable

_NEVER = 1 << 60


def carry_out(units: Units, operations: list[Operation], landing: Landing, phase: bool) -> Sheet:
    """The forward run of a plan on lines inputs, outputs (none for phase), work."""
    run = _Run(units, operations, landing, phase, _NEVER)
    run.all(operations)
    return run.sheet


def carry_out_once(units: Units, operations: list[Operation]) -> Sheet:
    """The forward run for outputs in 0, after which no mirror comes: the inputs are as they were.

    The lines that still hold something are the sheet's `kept` ones.
    """
    run = _Run(units, operations, Landing(), False, len(operations))
    run.all(operations)
    run.now = len(operations)
    for variable in range(units.inputs):
        run.clean(variable)
    run.sheet.kept = sorted({line for line in run.line[units.inputs :] if line >= 0})
    return run.sheet


class _Run:
    """The state of the lines.

    line[v]: the line of variable v; folded[v]: the variables XORed onto it at the moment, besides v itself;
    sharers[v]: variables onto whose lines v is folded; uses[v]: times at which v is needed, last first.
    """

    def __init__(
        self, units: Units, operations: list[Operation], landing: Landing, phase: bool, inputs_needed: int
    ) -> None:
        """inputs_needed: a time after the last operation at which the inputs are needed, _NEVER for none."""
        variables = units.inputs + len(units)
        self.units = units
        self.landing = landing
        self.phase = phase
        self.sheet = Sheet(units.inputs, 0 if phase else len(units.constants))
        self.line = list(range(units.inputs)) + [-1] * len(units)
        self.folded: dict[Variable, Sum] = {}
        self.sharers: dict[Variable, list[Variable]] = {}
        self.holder: dict[Sum, Variable] = {}
        self.taken_over: dict[int, Variable] = {}
        self.now = 0
        self.uses: list[list[int]] = [[] for _ in range(variables)]
        if inputs_needed < _NEVER:
            for uses in self.uses[: units.inputs]:
                uses.append(inputs_needed)
        for time in range(len(operations) - 1, -1, -1):
            for variable in reads_of(units, operations[time]):
                self.uses[variable].append(time)
            for variable in landing.rest_at(operations[time]):
                self.uses[variable].append(time)

    def all(self, operations: list[Operation]) -> None:
        """Do all operations."""
        for time, operation in enumerate(operations):
            self.now = time
            index, kind = divmod(operation, 3)
            if kind == ACT:
                self.act(self.units.acts[index])
            elif kind == ERASE:
                self.erase(index)
            else:
                self.compute(index)

    def next_use(self, variable: Variable, after: int) -> int:
        """The first time from `after` on at which the variable is needed."""
        uses = self.uses[variable]
        while uses and uses[-1] < self.now:
            uses.pop()
        if uses and uses[-1] >= after:
            return uses[-1]
        return next((time for time in reversed(uses) if time >= after), _NEVER)

    def clean(self, variable: Variable) -> None:
        """Undo the fold on the variable's line, if there is one."""
        members = self.folded.pop(variable, None)
        if members is None:
            return
        line = self.line
        target = line[variable]
        for member in members:
            self.sheet.cnot(line[member], target)
            self.sharers[member].remove(variable)
        self.holder.pop(_joined(members, variable), None)

    def release(self, variable: Variable) -> None:
        """Before the variable's line changes: undo the folds that hold it, or forget those of no more use."""
        for other in list(self.sharers.get(variable, ())):
            if self.next_use(other, self.now) < _NEVER:
                self.clean(other)
            else:
                self._forget(other)

    def _forget(self, variable: Variable) -> None:
        """The fold on the variable's line stays until the mirror."""
        members = self.folded.pop(variable)
        for member in members:
            self.sharers[member].remove(variable)
        self.holder.pop(_joined(members, variable), None)

    def fold(self, sum_: Sum, pivot: Variable) -> None:
        """XOR all other members, which are clean, onto the pivot's line."""
        self.release(pivot)
        members = tuple(v for v in sum_ if v != pivot)
        target = self.line[pivot]
        for member in members:
            self.sheet.cnot(self.line[member], target)
            self.sharers.setdefault(member, []).append(pivot)
        self.folded[pivot] = members
        self.holder[sum_] = pivot

    def pivot(self, sum_: Sum, avoid: Sum) -> Variable:
        """The member outside `avoid` that is needed again last."""
        best, when = -1, -1
        for variable in sum_:
            if variable not in avoid:
                time = self.next_use(variable, self.now + 1)
                if time > when:
                    best, when = variable, time
        return best

    def place(self, sum_: Sum, other: Sum) -> int:
        """The line that holds the sum now; `other` is a sum whose lines must stay as they are."""
        held = self.holder.get(sum_)
        if held is not None and held not in other:
            return self.line[held]
        for variable in sum_:
            self.clean(variable)
        if len(sum_) == 1:
            return self.line[sum_[0]]
        pivot = self.pivot(sum_, other)
        self.fold(sum_, pivot)
        return self.line[pivot]

    def product(self, left: Sum, right: Sum, flips: int, targets: list[int]) -> None:
        """XOR the AND of two different sums onto the targets; PHASE alone turns the phase."""
        if len(right) > 1 and set(right) < set(left):
            left, right, flips = right, left, flips >> 1 | (flips & 1) << 1
        if len(left) > 1 and set(left) < set(right):
            self._nested_product(left, right, flips, targets)
            return
        for variable in (*left, *right):
            if not (self._held_apart(variable, left, right) or self._held_apart(variable, right, left)):
                self.clean(variable)
        one = self.place(left, right)
        other = self.place(right, left)
        self._write(2 * one | (flips & 1), 2 * other | flips >> 1, targets)

    def _held_apart(self, variable: Variable, sum_: Sum, other: Sum) -> bool:
        """Whether the variable's line holds just that sum, and the other sum can do without it."""
        return variable not in other and self.holder.get(sum_) == variable

    def _nested_product(self, left: Sum, right: Sum, flips: int, targets: list[int]) -> None:
        """Left is part of right: the sum of right minus left goes onto a line of its own part."""
        rest = tuple(v for v in right if v not in left)
        for variable in right:
            self.clean(variable)
        one = self.place(left, rest)
        other = self.place(rest, left)
        self.sheet.cnot(one, other)
        self._write(2 * one | (flips & 1), 2 * other | flips >> 1, targets)
        self.sheet.cnot(one, other)

    def _write(self, first: int, second: int, targets: list[int]) -> None:
        for target in targets[1:]:
            self.sheet.cnot(targets[0], target)
        self.sheet.put(targets[0], first, second)
        for target in targets[1:]:
            self.sheet.cnot(targets[0], target)

    def compute(self, unit: int) -> None:
        """Bring the unit onto its line."""
        units, variable = self.units, self.units.inputs + unit
        tail = units.tail[unit]
        if not units.left[unit]:
            self._compute_sum(variable, tail)
            return
        line = self.landing.line_of(unit)
        target = self.sheet.take() if line is None else line
        self.product(units.left[unit], units.right[unit], units.flips[unit], [target])
        if line is not None:
            self._land(unit, target)
        elif self.landing.keep:
            self.sheet.keep(target)
        self.line[variable] = target
        self._add(tail, target)

    def _compute_sum(self, variable: Variable, tail: Sum) -> None:
        held = self.holder.get(tail)
        if held is not None and self.next_use(held, self.now + 1) == _NEVER:
            self._forget(held)
            self._take_over(variable, held)
            return
        if held is None:
            for member in tail:
                self.clean(member)
            for base in tail:
                if self.next_use(base, self.now + 1) == _NEVER:
                    self._take_over(variable, base)
                    for member in tail:
                        if member != base:
                            self.sheet.cnot(self.line[member], self.line[variable])
                    return
        self.line[variable] = self.sheet.take()
        self._add(tail, self.line[variable])

    def _take_over(self, variable: Variable, base: Variable) -> None:
        """The line of `base`, which is not needed again, becomes that of the variable."""
        self.release(base)
        self.line[variable] = self.line[base]
        self.taken_over[variable - self.units.inputs] = base

    def _add(self, sum_: Sum, target: int) -> None:
        """XOR a sum of variables onto a line that holds none of them."""
        held = self.holder.get(sum_)
        if held is not None:
            self.sheet.cnot(self.line[held], target)
            return
        for member in sum_:
            self.clean(member)
        for member in sum_:
            self.sheet.cnot(self.line[member], target)

    def _land(self, unit: int, target: int) -> None:
        """The product is on its output line for good: in the mirror the rest of the output joins it."""
        sources: dict[int, None] = {}
        for member in self.landing.rest[unit]:
            for variable in (member, *self.folded.get(member, ())):
                line = self.line[variable]
                if sources.pop(line, 0) == 0:
                    sources[line] = None
        self.sheet.instead[len(self.sheet) - 1] = [(target, 2 * line, -1) for line in sources]

    def erase(self, unit: int) -> None:
        """Bring the unit's line back to what it was."""
        units, variable = self.units, self.units.inputs + unit
        self.clean(variable)
        self.release(variable)
        line = self.line[variable]
        if unit in self.taken_over:
            base = self.taken_over.pop(unit)
            rest = tuple(v for v in units.tail[unit] if v != base)
            self._add(rest, line)
        else:
            self._add(units.tail[unit], line)
            if units.left[unit]:
                self.product(units.left[unit], units.right[unit], units.flips[unit], [line])
            self.sheet.give(line)
        self.line[variable] = -1

    def act(self, act: Act) -> None:
        """Add a product or a sum to outputs, or turn the phase by it."""
        targets = [PHASE] if self.phase else [self.units.inputs + output for output in act.outputs]
        if act.right:
            # Folds that the product makes stay and are mirrored; only the product itself is done once.
            start = len(self.sheet)
            self.product(act.left, act.right, act.flips, targets)
            self.sheet.acted(start, set(targets))
            return
        for variable in act.left:
            self.clean(variable)
        start = len(self.sheet)
        for variable in act.left:
            for target in targets:
                self.sheet.put(target, 2 * self.line[variable])
        self.sheet.acted(start, set(targets))


def _joined(members: Sum, variable: Variable) -> Sum:
    return tuple(sorted((*members, variable)))
