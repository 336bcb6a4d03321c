"""Running statements: names become qubit numbers, gates their operations, blocks what is in them.

Every statement ends as operations in the recorder. What a statement appends depends on its text and on the
names declared so far alone, which is what lets the fast path remember lines.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass

from revsynth.circuit.model import Condition, Kind
from revsynth.qasm.budget import Budget
from revsynth.qasm.conditions import ConditionReader, as_condition, bits_read
from revsynth.qasm.expressions import cast
from revsynth.qasm.formula import ALWAYS, NEVER, Formula, canonical, negation
from revsynth.qasm.gate_table import GateTable, NegativeControls
from revsynth.qasm.lexer import Source
from revsynth.qasm.recorder import Recorder
from revsynth.qasm.scope import Place, Scope, with_value
from revsynth.qasm.syntax import (
    Alias,
    Barrier,
    BitDeclaration,
    Block,
    Branch,
    ConstantDeclaration,
    Declaration,
    GateCall,
    GateDeclaration,
    Header,
    Include,
    Loop,
    Measurement,
    Number,
    Operand,
    QubitDeclaration,
    Reset,
    Statement,
)
from revsynth.qasm.template import Template

_WIDEST = 4096


@dataclass
class _Held:
    """A condition that holds around the statements being run, with those around it; `stale` once a bit that
    it reads has been measured anew."""

    condition: Condition
    reads: frozenset[int]
    stale: bool = False


class Interpreter:
    """Runs declarations and statements of one file."""

    def __init__(self, source: Source, recorder: Recorder, negctrl: NegativeControls | None) -> None:
        self.source = source
        self.recorder = recorder
        self.budget = Budget(source)
        self.scope = Scope(source, self.budget)
        self.gates = GateTable(self.scope, self.budget, negctrl)
        self.names_declared = 0
        self._conditions = ConditionReader(self.scope)
        self._held: list[_Held] = []

    def run(self, statement: Declaration | Statement) -> None:
        """Run one statement of the top level."""
        if isinstance(statement, GateCall | Measurement | Reset | Barrier | Branch | Loop | Block):
            self._execute(statement, self.scope.constants)
            return
        self.names_declared += 1
        self._declare(statement)

    # -- declarations

    def _declare(self, statement: Declaration) -> None:
        if isinstance(statement, QubitDeclaration):
            self._declare_qubits(statement)
        elif isinstance(statement, BitDeclaration):
            self._declare_bits(statement)
        elif isinstance(statement, ConstantDeclaration):
            self._declare_constant(statement)
        elif isinstance(statement, Alias):
            self._declare_alias(statement)
        elif isinstance(statement, GateDeclaration):
            self.gates.define(statement)
        elif isinstance(statement, Include):
            self.gates.include(statement.name, statement.position)
        else:
            assert isinstance(statement, Header)
            raise self.source.error("the version must be the first statement of the file", statement.position)

    def _take_name(self, name: str, what: str, position: int) -> None:
        self.gates.release(name)
        if self.gates.is_taken(name):
            raise self.source.error(f"'{name}' is already a gate", position)
        self.scope.declare(name, what, position)

    def _declare_qubits(self, statement: QubitDeclaration) -> None:
        size = self.scope.size(statement.size)
        self.budget.qubits(size, statement.position)
        self._take_name(statement.name, "a register of qubits", statement.position)
        members = self.recorder.add_register(statement.name, size)
        self.scope.qubits[statement.name] = Place(members, single=statement.size is None)

    def _declare_bits(self, statement: BitDeclaration) -> None:
        size = self.scope.size(statement.size)
        self.budget.bits(size, statement.position)
        if statement.value is not None:
            start = self._conditions.read(statement.value, self.scope.constants)
            if start != NEVER:
                raise self.source.error(
                    "bits start at 0: any other value must come from a measurement", statement.value.position
                )
        self._take_name(statement.name, "a register of bits", statement.position)
        members = self.recorder.add_bits(statement.name, size)
        self.scope.bits[statement.name] = Place(members, single=statement.size is None)
        if statement.source is not None:
            into = Operand(statement.name, (), statement.position)
            self._measure(Measurement(statement.source, into, statement.position), self.scope.constants)

    def _declare_constant(self, statement: ConstantDeclaration) -> None:
        if statement.type == "angle" and statement.width is not None:
            raise self.source.error(
                "an angle of a stated width is rounded: write 'const float' or leave the width out",
                statement.position,
            )
        value = self.scope.number(statement.value, self.scope.constants)
        broken = isinstance(value, float) and not value.is_integer()
        if (statement.type in ("int", "uint") and broken) or (statement.type == "uint" and value < 0):
            raise self.source.error(
                f"'{statement.name}' is declared as {statement.type}, and its value is {value!r}",
                statement.value.position,
            )
        try:
            value = cast(statement.type, value)
        except OverflowError:
            raise self.source.error("this value is too large", statement.value.position) from None
        if statement.width is not None:
            self._check_width(statement, value)
        self._take_name(statement.name, "a constant", statement.position)
        self.scope.constants[statement.name] = value

    def _check_width(self, statement: ConstantDeclaration, value: Number) -> None:
        assert statement.width is not None
        width = self.scope.integer(statement.width, self.scope.constants, "the width of a type")
        if not 1 <= width <= _WIDEST:
            raise self.source.error(f"a width must be 1 ... {_WIDEST}", statement.width.position)
        bounds = {"int": (-(1 << (width - 1)), 1 << (width - 1)), "uint": (0, 1 << width)}
        if statement.type not in bounds:
            return
        lowest, end = bounds[statement.type]
        if not lowest <= value < end:
            raise self.source.error(
                f"this value does not fit {statement.type}[{width}]", statement.value.position
            )

    def _declare_alias(self, statement: Alias) -> None:
        quantum = statement.parts[0].name in self.scope.qubits
        find = self.scope.quantum if quantum else self.scope.classical
        places = [find(part, self.scope.constants) for part in statement.parts]
        if len(places) == 1:
            place = places[0]
        else:
            members = tuple(member for found in places for member in found.members)
            self.budget.operations(len(members), statement.position)
            place = Place(members)
        if len(set(place.members)) != len(place.members):
            raise self.source.error("this alias names the same qubit or bit twice", statement.position)
        self._take_name(statement.name, "an alias", statement.position)
        (self.scope.qubits if quantum else self.scope.bits)[statement.name] = place

    # -- statements

    def _execute(self, statement: Statement, constants: Mapping[str, Number]) -> None:
        if isinstance(statement, GateCall):
            self._call(statement, constants)
        elif isinstance(statement, Measurement):
            self._measure(statement, constants)
        elif isinstance(statement, Reset):
            self._reset(statement, constants)
        elif isinstance(statement, Branch):
            self._branch(statement, constants)
        elif isinstance(statement, Loop):
            for value in self.scope.rounds(statement.over, constants, statement.position):
                self.budget.iteration(statement.position)
                inner = with_value(constants, statement.name, value)
                for entry in statement.body:
                    self._execute(entry, inner)
        elif isinstance(statement, Block):
            for entry in statement.body:
                self._execute(entry, constants)
        else:
            for operand in statement.operands:
                self.scope.quantum(operand, constants)

    def _condition(self, position: int) -> Condition:
        """The condition on what is run now."""
        if not self._held:
            return ()
        if any(held.stale for held in self._held):
            raise self.source.error(
                "a bit that the condition reads was measured anew before this: what the condition was then "
                "is no longer known; measure into another bit",
                position,
            )
        return self._held[-1].condition

    def _call(self, call: GateCall, constants: Mapping[str, Number]) -> None:
        gate = self.gates.find(call)
        template = self.gates.template(call, gate, constants, self.recorder.qubits)
        places = [self.scope.quantum(operand, constants) for operand in call.operands]
        condition = self._condition(call.position)
        rounds = self._rounds(places, call.operands)
        charge = len(template) * max(len(places), 1) * rounds if rounds > 1 or len(template) > 1 else 0
        if self._held or charge:
            self.budget.operations(max(charge, 1), call.position)
        for index in range(rounds):
            qubits = [place.members[0 if place.single else index] for place in places]
            if len(set(qubits)) != len(qubits):
                self._complain_of_repetition(qubits, call.operands)
            self.append(template, qubits, condition)

    def append(self, template: Template, qubits: Sequence[int], condition: Condition) -> None:
        """Append a template's operations on these qubits."""
        number = self.recorder.number
        append = self.recorder.sequence.append
        for kind, controls, targets, angles in template:
            operands = [2 * qubits[control >> 1] | (control & 1) for control in controls]
            operands += [qubits[target] for target in targets]
            append(number(kind, tuple(operands), angles, condition))

    def _rounds(self, places: Sequence[Place], operands: Sequence[Operand]) -> int:
        """How often a statement on these places acts: once, or once for each index of its registers."""
        rounds = 1
        first: Operand | None = None
        for place, operand in zip(places, operands, strict=True):
            if place.single:
                continue
            size = len(place.members)
            if first is not None and size != rounds:
                raise self.source.error(
                    f"'{operand.name}' has {size} where '{first.name}' has {rounds}: registers acted on "
                    "together must be of one size",
                    operand.position,
                )
            first, rounds = operand, size
        return rounds

    def _complain_of_repetition(self, qubits: list[int], operands: Sequence[Operand]) -> None:
        for place, qubit in enumerate(qubits):
            if qubit in qubits[:place]:
                raise self.source.error(
                    f"'{operands[place].name}' names a qubit that this gate already acts on",
                    operands[place].position,
                )

    def _measure(self, statement: Measurement, constants: Mapping[str, Number]) -> None:
        source = self.scope.quantum(statement.source, constants)
        into = self.scope.classical(statement.into, constants)
        if len(source.members) != len(into.members):
            raise self.source.error(
                f"{len(source.members)} qubits are measured into {len(into.members)} bits", statement.position
            )
        self.budget.operations(len(source.members) - 1, statement.position)
        for qubit, bit in zip(source.members, into.members, strict=True):
            condition = self._condition(statement.position)
            self.recorder.sequence.append(
                self.recorder.number(Kind.MEASURE, (qubit,), condition=condition, bit=bit)
            )
            for held in self._held:
                held.stale = held.stale or bit in held.reads

    def _reset(self, statement: Reset, constants: Mapping[str, Number]) -> None:
        place = self.scope.quantum(statement.what, constants)
        condition = self._condition(statement.position)
        self.budget.operations(len(place.members) - 1, statement.position)
        for qubit in place.members:
            self.recorder.sequence.append(self.recorder.number(Kind.RESET, (qubit,), condition=condition))

    def _branch(self, statement: Branch, constants: Mapping[str, Number]) -> None:
        formula = self._conditions.read(statement.condition, constants)
        stale = self._run_if(formula, statement, statement.then, constants, stale=False)
        self._run_if(negation(formula), statement, statement.otherwise, constants, stale=stale)

    def _run_if(
        self,
        formula: Formula,
        statement: Branch,
        body: tuple[Statement, ...],
        constants: Mapping[str, Number],
        stale: bool,
    ) -> bool:
        """Run statements under a condition; says whether they measured a bit that it reads."""
        if not body:
            return False
        found = () if formula == ALWAYS else as_condition(formula, statement.condition, self.scope)
        if self._held and found is not None:
            found = canonical(self._held[-1].condition + found)
        if found is None:
            return False
        self._held.append(_Held(found, bits_read(found), stale))
        for entry in body:
            self._execute(entry, constants)
        return self._held.pop().stale
