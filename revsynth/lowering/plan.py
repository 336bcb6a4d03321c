"""From a cascade to pieces: which template goes onto which qubits, gate by gate.

Controls that wait for 0 are met by flipping their line, lazily: each line remembers whether it is held
flipped, a NOT of the cascade only changes that, and an X is written where a gate needs the other polarity. So
neighbouring X pairs never arise, and no X is written for a negative control of a CNOT.
"""

from __future__ import annotations

from array import array
from collections import Counter
from collections.abc import Sequence
from dataclasses import dataclass, field
from typing import NamedTuple

import numpy as np

from revsynth.cascade.line_values import LineValues
from revsynth.circuit.model import Kind
from revsynth.lowering.constructions import Choice, Style
from revsynth.lowering.draft import Draft, Template, Tip
from revsynth.lowering.fan_out import Unit
from revsynth.lowering.fold import Shape
from revsynth.lowering.scratch import Demand
from revsynth.lowering.sharing import arrange


def _one(kind: Kind, qubits: int) -> Template:
    draft = Draft()
    draft.put(kind, range(qubits))
    return draft.template()


FLIP = _one(Kind.X, 1)
SIGN = _one(Kind.Z, 1)
COPY = _one(Kind.X, 2)


MOST_ZEROS = 256
"""Lines in 0 that one step takes notice of."""


class Step(NamedTuple):
    """One unit of the cascade with what is known at that moment.

    controls: literals of the product (of a phase gate all but the last); target: where the tip goes, -1 for
    none; before, after: targets that are changed too, by CNOTs from the target before or after the tip;
    zeros: further lines known to be in 0 that the unit does not touch.
    """

    controls: tuple[int, ...]
    tip: Tip
    target: int
    last: int = -1
    before: tuple[int, ...] = ()
    after: tuple[int, ...] = ()
    zeros: tuple[int, ...] = ()


def steps_of(units: Sequence[Unit], lines: int, known: dict[int, int]) -> list[Step]:
    """Steps with tips by what is known of the lines; `known` gives those that start in 0 or 1 for certain."""
    if not known:
        return [_plain_step(unit) for unit in units]
    state = LineValues.start(lines, known)
    values = state.values
    zero = bytearray(not value for value in values)
    steps: list[Step] = []
    for unit in units:
        controls, targets = unit
        if len(controls) == 1 and len(targets) == 1:
            # Nearly all units of a large network are CNOTs; this is what the rest of the loop makes of one.
            target = targets[0]
            value = values[target] = values[target] ^ state.factor(controls[0])
            tip = Tip.NOT if value and not zero[target] else Tip.FROM_ZERO if value else Tip.TO_ZERO
            zero[target] = not value
            steps.append(Step._make((controls, tip, target, -1, (), (), ())))
            continue
        before = [t for t in targets if zero[t]]
        state.apply(controls, targets)
        after = [t for t in targets if not values[t]]
        zeros: tuple[int, ...] = ()
        if len(controls) > 2 or (len(controls) == 2 and not (before or after)):
            zeros = _idle_zeros(unit, zero)
        for t in targets:
            zero[t] = not values[t]
        steps.append(_not_step(unit, before, after, zeros) if targets else _plain_step(unit, zeros))
    return steps


def clean_products(steps: Sequence[Step]) -> int:
    """How many products are written on a line in 0 or bring one back: an order of gates may spoil that."""
    return sum(len(step.controls) >= 2 and step.tip in (Tip.FROM_ZERO, Tip.TO_ZERO) for step in steps)


def _idle_zeros(unit: Unit, zero: bytearray) -> tuple[int, ...]:
    """The first of the lines in 0 that the unit does not touch: as many as any construction could use."""
    touched = {*unit.targets, *(c >> 1 for c in unit.controls)}
    first = np.flatnonzero(np.frombuffer(zero, dtype=np.uint8))[: MOST_ZEROS + len(touched)].tolist()
    return tuple([line for line in first if line not in touched][:MOST_ZEROS])


def arrange_steps(steps: Sequence[Step], shape: Shape) -> list[Step]:
    """The same steps, the literals of each in an order that lets neighbours share products (`sharing`)."""
    literals = [(*step.controls, step.last) if step.tip is Tip.Z else step.controls for step in steps]
    following: list[tuple[int, ...]] = [()] * len(steps)
    later: tuple[int, ...] = ()
    for index in range(len(steps) - 1, -1, -1):
        following[index] = later
        later = literals[index] if len(literals[index]) > 1 else later
    arranged: list[Step] = []
    previous: list[int] = []
    changed: set[int] = set()
    for index, step in enumerate(steps):
        if len(literals[index]) <= 1 and not step.before and not step.after:
            if step.tip is not Tip.Z:
                changed.add(step.target)
            arranged.append(step)
            continue
        if len(literals[index]) > 1:
            previous = arrange(literals[index], previous, changed, following[index], shape)
            changed = set()
            if step.tip is Tip.Z:
                last = previous[-1]
                step = step._replace(controls=tuple(previous[:-1]), target=last >> 1, last=last)
            else:
                step = step._replace(controls=tuple(previous))
        if step.tip is not Tip.Z:
            changed.update((step.target, *step.before, *step.after))
        arranged.append(step)
    return arranged


def _plain_step(unit: Unit, zeros: tuple[int, ...] = ()) -> Step:
    if unit.targets:
        return _not_step(unit, [], [], zeros)
    if not unit.controls:
        return Step((), Tip.Z, -1)
    return Step(unit.controls[:-1], Tip.Z, unit.controls[-1] >> 1, unit.controls[-1], zeros=zeros)


def _not_step(unit: Unit, before: list[int], after: list[int], zeros: tuple[int, ...]) -> Step:
    tip, target = Tip.NOT, unit.targets[0]
    if after:
        tip, target = Tip.TO_ZERO, after[0]
    elif before:
        tip, target = Tip.FROM_ZERO, before[0]
    others = tuple(t for t in unit.targets if t != target)
    return Step(
        unit.controls,
        tip,
        target,
        before=() if tip is Tip.FROM_ZERO else others,
        after=() if tip is Tip.TO_ZERO else others,
        zeros=zeros,
    )


@dataclass
class Pieces:
    """Templates and the qubits they go to: piece i has its qubits in `qubits` from `start[i]` on."""

    templates: list[Template] = field(default_factory=list)
    template: array[int] = field(default_factory=lambda: array("i"))
    start: array[int] = field(default_factory=lambda: array("q"))
    qubits: array[int] = field(default_factory=lambda: array("i"))
    _number: dict[int, int] = field(default_factory=dict)

    def put(self, template: Template, qubits: Sequence[int]) -> None:
        """Append a piece."""
        number = self._number.get(id(template))
        if number is None:
            number = self._number[id(template)] = len(self.templates)
            self.templates.append(template)
        self.template.append(number)
        self.start.append(len(self.qubits))
        self.qubits.extend(qubits)


@dataclass(frozen=True)
class Plan:
    """Pieces on the lines and then `scratch` scratch qubits; `minus` where the constant -1 is left over."""

    pieces: Pieces
    scratch: int
    minus: bool


def plan(steps: Sequence[Step], lines: int, scratch: int, style: Style) -> Plan:
    """Write every step with that many scratch qubits, which must suffice."""
    choices: dict[tuple[int, ...], Choice] = {}
    writer = _Writer(lines, scratch)
    for step in steps:
        choice = None
        if step.controls:
            key = (len(step.controls), step.tip, len(step.zeros))
            choice = choices.get(key)
            if choice is None:
                choice = choices[key] = _chosen(_demand(key, lines), scratch, style)
        writer.write(step, choice)
    writer.finish()
    return Plan(writer.pieces, scratch, writer.minus)


def _chosen(demand: Demand, scratch: int, style: Style) -> Choice:
    choice = demand.choice(scratch, style)
    if choice is None:
        raise ValueError(f"no construction for {demand} with {scratch} scratch qubits")
    return choice


def demands_of(steps: Sequence[Step], lines: int) -> Counter[Demand]:
    """How often each demand comes up."""
    counts = Counter((len(step.controls), step.tip, len(step.zeros)) for step in steps if step.controls)
    return Counter({_demand(key, lines): count for key, count in counts.items()})


def _demand(key: tuple[int, ...], lines: int) -> Demand:
    """The demand of steps with so many controls, a tip, and so many lines known to be in 0."""
    controls, tip, zeros = key
    return Demand(controls, Tip(tip), zeros, lines - controls - 1 - zeros)


class _Writer:
    """Writes steps to pieces, holding lines flipped."""

    def __init__(self, lines: int, scratch: int) -> None:
        self.pieces = Pieces()
        self.minus = False
        self._lines = lines
        self._scratch = list(range(lines, lines + scratch))
        self._flipped = bytearray(lines + scratch)

    def write(self, step: Step, choice: Choice | None) -> None:
        """One step; without controls it needs no choice."""
        if step.tip is Tip.Z and not self._ready_for_phase(step):
            return
        if choice is None:
            if step.tip is Tip.Z:
                self.pieces.put(SIGN, (step.target,))
                return
            for target in (step.target, *step.before, *step.after):
                self._flipped[target] ^= 1
            return
        if len(step.controls) == 1 and step.tip is not Tip.Z:
            self._write_cnots(step)
            return
        controls = [control >> 1 for control in step.controls]
        for control in step.controls:
            if (control & 1) != self._flipped[control >> 1]:
                self._flip(control >> 1)
        if step.tip in (Tip.FROM_ZERO, Tip.TO_ZERO):
            self._unflip(step.target)
        for other in step.before:
            self.pieces.put(COPY, (step.target, other))
        self.pieces.put(choice.template, self._place(step, controls, choice))
        for other in step.after:
            self.pieces.put(COPY, (step.target, other))

    def _ready_for_phase(self, step: Step) -> bool:
        """Meet the last literal of a phase gate; False where nothing but a constant is left to do."""
        if step.target < 0:
            self.minus = not self.minus
            return False
        wrong = (step.last & 1) != self._flipped[step.target]
        if wrong and step.controls:
            self._flip(step.target)
        elif wrong:
            self.minus = not self.minus
        return True

    def _write_cnots(self, step: Step) -> None:
        control = step.controls[0] >> 1
        flips = (step.controls[0] & 1) ^ self._flipped[control]
        if not step.before and not step.after:
            self.pieces.put(COPY, (control, step.target))
            self._flipped[step.target] ^= flips
            return
        for target in dict.fromkeys((step.target, *step.before, *step.after)):
            self.pieces.put(COPY, (control, target))
            self._flipped[target] ^= flips

    def _place(self, step: Step, controls: list[int], choice: Choice) -> list[int]:
        """The qubits of a template: controls, target, clean ones, borrowed ones."""
        needs = choice.needs
        if not any(needs):
            return [*controls, step.target]
        clean = [*self._scratch, *sorted(step.zeros, key=lambda line: (self._flipped[line], line))]
        taken = clean[: needs.clean]
        for line in taken:
            self._unflip(line)
        busy = {*controls, step.target, *taken}
        borrowed: list[int] = []
        if needs.borrowed:
            everything = range(self._lines + len(self._scratch))
            borrowed = [line for line in everything if line not in busy][: needs.borrowed]
        return [*controls, step.target, *taken, *borrowed]

    def _flip(self, line: int) -> None:
        self.pieces.put(FLIP, (line,))
        self._flipped[line] ^= 1

    def _unflip(self, line: int) -> None:
        if self._flipped[line]:
            self._flip(line)

    def finish(self) -> None:
        """Bring every line back to where it should be."""
        for line in range(self._lines):
            self._unflip(line)
