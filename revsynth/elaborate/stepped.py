"""Steps of a permutation as a program that works in place, with what must not happen as checks."""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import dataclass

from revsynth.elaborate.bitwise import truth
from revsynth.elaborate.expressions import Expressions
from revsynth.elaborate.linear import modulo_power, plain
from revsynth.elaborate.model import Check
from revsynth.elaborate.numbers import Number, Sum, pattern_of
from revsynth.errors import SpecError
from revsynth.logic.in_place_program import (
    Add,
    Moves,
    Operation,
    Program,
    ProgramStep,
    ShiftAdd,
    Source,
    Swaps,
    Xor,
    apply,
    odd_factors,
)
from revsynth.logic.network import FALSE, TRUE, Literal, Network
from revsynth.logic.network_builder import NetworkBuilder
from revsynth.spec.model import Permutation, Spec
from revsynth.spec.step_reference import run_steps
from revsynth.spec.steps import Step, parse_steps


@dataclass(frozen=True)
class Stepped:
    """A program for a permutation by steps.

    checks: as in `Elaboration`, over the bits at the start. domain: one output, 1 inside; None: every input.
    """

    program: Program
    checks: tuple[Check, ...]
    domain: Network | None
    warnings: tuple[str, ...]


def elaborate_steps(spec: Spec) -> Stepped:
    """The program of a spec by steps; raises SpecError and ExpressionError as `parse_steps` does."""
    body = spec.body
    assert isinstance(body, Permutation)
    assert body.steps is not None
    steps = parse_steps(spec, body.steps)
    parts = [_StepBuilder(spec, step) for step in steps]
    for part in parts:
        part.build()
    program = Program(spec.input_bits, tuple(part.made() for part in parts))
    domain, checks = _checks(spec, steps, parts, program)
    warnings = dict.fromkeys(warning for part in parts for warning in part.expressions.warnings)
    return Stepped(program, checks, domain, tuple(warnings))


def program_of_steps(spec: Spec, steps: tuple[Step, ...]) -> Program:
    """The program of steps already read, without checks of what is undefined in them."""
    parts = [_StepBuilder(spec, step) for step in steps]
    for part in parts:
        part.build()
    return Program(spec.input_bits, tuple(part.made() for part in parts))


@dataclass(frozen=True)
class _RunsInto:
    """The error that an input runs into."""

    spec: Spec
    steps: tuple[Step, ...]

    def __call__(self, index: int) -> SpecError:
        try:
            run_steps(self.spec, self.steps, index)
        except SpecError as error:
            return error
        raise ValueError(f"nothing is wrong at input {index}")


def _checks(
    spec: Spec, steps: tuple[Step, ...], parts: Sequence[_StepBuilder], program: Program
) -> tuple[Network | None, tuple[Check, ...]]:
    """The domain, and where a step reaches an operation that is undefined, over the bits at the start."""
    builder = NetworkBuilder(spec.input_bits)
    expressions = Expressions(spec, builder)
    inside = TRUE if spec.domain is None else expressions.condition(spec.domain, "[domain] where")
    domain = None if inside == TRUE else builder.build([inside])
    found = list(expressions.checks())
    bits = [builder.input(place) for place in range(spec.input_bits)]
    left = sum(len(part.wrong) for part in parts)
    for part, step in zip(parts, program.steps, strict=True):
        if not left:
            break
        wrong = builder.copy(part.builder.build([literal for literal, _ in part.wrong]), bits)
        for literal, (_, message) in zip(wrong, part.wrong, strict=True):
            reached = builder.and_(literal, inside)
            if reached != FALSE:
                found.append(Check(builder.build([reached]), message, _RunsInto(spec, steps)))
        left -= len(part.wrong)
        sources = builder.copy(step.sources, bits)
        for operation in step.operations:
            apply(operation, builder, bits, sources)
    return domain, tuple(found)


class _StepBuilder:
    """One step."""

    def __init__(self, spec: Spec, step: Step) -> None:
        self.spec = spec
        self.step = step
        self.builder = NetworkBuilder(spec.input_bits)
        self.expressions = Expressions(spec, self.builder)
        self.operations: list[Operation] = []
        self._sources: dict[Literal, Source] = {}

    @property
    def wrong(self) -> list[tuple[Literal, str]]:
        """Where an operation is undefined, and the message."""
        return [(literal, message) for literal, message, _ in self.expressions.found]

    def made(self) -> ProgramStep:
        """The step with its network."""
        return ProgramStep(self.builder.build(list(self._sources)), tuple(self.operations))

    def build(self) -> None:
        """Work out the operations."""
        step = self.step
        condition = TRUE
        if step.condition is not None:
            _, number = self.expressions.number(step.condition.text, step.place)
            condition = truth(self.builder, number)
            if condition == FALSE:
                return
            self.expressions.domain = condition
        target = tuple(step.target.range)
        if step.other is not None:
            self._swap(tuple(zip(target, step.other.range, strict=True)), condition)
        elif step.kind == "rotate":
            self._rotate(target, condition)
        elif step.kind == "multiply":
            self._multiply(target, condition)
        elif step.kind == "shift":
            self.operations.append(Moves(_shift_pairs(target, step.amount), self._under(condition)))
        elif step.kind in ("invert", "negate"):
            self._invert(target, condition)
            if step.kind == "negate":
                self._add_one(target, condition)
        else:
            self._combine(target, condition)

    def _source(self, literal: Literal) -> Source:
        return self._sources.setdefault(literal, len(self._sources))

    def _under(self, condition: Literal) -> Source | None:
        return None if condition == TRUE else self._source(condition)

    def _all(self, literals: Iterable[Literal]) -> tuple[Source, ...]:
        return tuple(self._source(literal) for literal in literals)

    def _combine(self, target: tuple[int, ...], condition: Literal) -> None:
        """+=, -= and ^= with an expression."""
        step = self.step
        assert step.operand is not None
        _, number = self.expressions.number(step.operand.text, step.place)
        if step.kind != "xor" and condition == TRUE and isinstance(number, Sum) and number.modulo is None:
            self._add_rows(target, number)
            return
        kept = self._low_bits(number, len(target))
        sources = self._all(self.builder.and_(condition, literal) for literal in kept)
        if step.kind == "xor":
            self.operations.append(Xor(target, sources))
        else:
            self.operations.append(Add(target, sources, step.kind == "subtract"))

    def _low_bits(self, number: Number, size: int) -> list[Literal]:
        return pattern_of(plain(self.builder, modulo_power(self.builder, number, size)), size)

    def _add_rows(self, target: tuple[int, ...], number: Sum) -> None:
        """A sum that is not added up yet is added row by row, which takes no more ANDs and no scratch."""
        size = len(target)
        columns: dict[bool, list[list[Literal]]] = {
            minus: [[] for _ in range(size)] for minus in (False, True)
        }
        for literal, coefficient in number.coefficients.items():
            for place, minus in _digits(coefficient % (1 << size), size):
                columns[minus][place].append(literal)
        for minus, rows in columns.items():
            for row in range(max(len(column) for column in rows)):
                literals = [column[row] if row < len(column) else FALSE for column in rows]
                subtract = minus != (self.step.kind == "subtract")
                self.operations.append(Add(target, self._all(literals), subtract))
        constant = number.constant % (1 << size)
        if constant:
            sources = self._all(constant >> place & 1 for place in range(size))
            self.operations.append(Add(target, sources, self.step.kind == "subtract"))

    def _invert(self, target: tuple[int, ...], condition: Literal) -> None:
        self.operations.append(Xor(target, self._all([condition] * len(target))))

    def _add_one(self, target: tuple[int, ...], condition: Literal) -> None:
        self.operations.append(Add(target, self._all([condition] + [FALSE] * (len(target) - 1))))

    def _multiply(self, target: tuple[int, ...], condition: Literal) -> None:
        negate, subtract, shifts = odd_factors(self.step.amount, len(target))
        if negate:
            self._invert(target, condition)
            self._add_one(target, condition)
        for shift in shifts:
            self.operations.append(ShiftAdd(target, shift, subtract, self._under(condition)))

    def _swap(self, pairs: tuple[tuple[int, int], ...], condition: Literal) -> None:
        self.operations.append(Swaps(pairs, self._under(condition)))

    def _rotate(self, target: tuple[int, ...], condition: Literal) -> None:
        size = len(target)
        if self.step.operand is None:
            self._swap(_rotation(target, self.step.amount), condition)
            return
        _, number = self.expressions.number(self.step.operand.text, self.step.place)
        known = plain(self.builder, number)
        if isinstance(known, int):
            self._swap(_rotation(target, known % size), condition)
            return
        for place, literal in enumerate(known.literals):
            weight = 1 << place
            if known.lo < 0 and place == len(known.literals) - 1:
                weight = -weight
            pairs = _rotation(target, weight % size)
            under = self.builder.and_(condition, literal)
            if pairs and under != FALSE:
                self._swap(pairs, under)


def _digits(number: int, size: int) -> list[tuple[int, bool]]:
    """(place, negative) of the digits of a number modulo 2**size: binary, or signed where those are fewer."""
    binary = [(place, False) for place in range(size) if number >> place & 1]
    signed: list[tuple[int, bool]] = []
    place = 0
    while number and place < size:
        if number & 1:
            minus = number & 3 == 3
            signed.append((place, minus))
            number += 1 if minus else -1
        number >>= 1
        place += 1
    return signed if len(signed) < len(binary) else binary


def _shift_pairs(target: Sequence[int], amount: int) -> tuple[tuple[int, int], ...]:
    """x ^= x << amount from the top down, or x ^= x >> -amount from the bottom up."""
    size = len(target)
    if amount > 0:
        return tuple((target[place - amount], target[place]) for place in range(size - 1, amount - 1, -1))
    return tuple((target[place - amount], target[place]) for place in range(size + amount))


def _rotation(target: Sequence[int], amount: int) -> tuple[tuple[int, int], ...]:
    """Swaps that move the bit at place i to place i + amount, around the end: size - gcd of them."""
    size = len(target)
    pairs: list[tuple[int, int]] = []
    seen = [False] * size
    for first in range(size):
        place = first
        while not seen[place]:
            seen[place] = True
            following = (place + amount) % size
            if following != first:
                pairs.append((target[first], target[following]))
            place = following
    return tuple(pairs)
