"""The gates a file may call: standard ones and its own definitions, expanded to templates on demand."""

from __future__ import annotations

import math
from collections import ChainMap
from collections.abc import Mapping
from dataclasses import dataclass
from typing import Literal

from revsynth.errors import CircuitFileError
from revsynth.qasm.body_check import check_body
from revsynth.qasm.budget import Budget
from revsynth.qasm.lexer import Source, shown
from revsynth.qasm.scope import Scope, with_value
from revsynth.qasm.standard_gates import BUILT_IN, GPHASE, PUBLISHED, all_gates, standard_gate
from revsynth.qasm.syntax import (
    Barrier,
    Block,
    GateCall,
    GateDeclaration,
    Loop,
    Modifier,
    Number,
    Statement,
)
from revsynth.qasm.template import Piece, Template, broken_power, controlled, inverse, place, whole_power

NegativeControls = Literal["all-zero", "as-published"]
"""How `negctrl(n)` with n > 1 is read: fires where all n are 0, or wherever not all n are 1."""

_MAX_DEPTH = 150
_MAX_KEPT = 20_000
_MAX_EXPONENT = 1 << 62


@dataclass(eq=False)
class Gate:
    """A gate by name: `declaration` None for standard ones; `depth` counts definitions inside definitions."""

    name: str
    parameters: int
    qubits: int
    declaration: GateDeclaration | None = None
    may_be_defined: bool = False
    depth: int = 0


class GateTable:
    """Looks gates up, takes definitions in, and makes templates, each once for the same parameters.

    `revision` counts how often a name came to mean another gate.
    """

    def __init__(self, scope: Scope, budget: Budget, negctrl: NegativeControls | None) -> None:
        self._scope = scope
        self._source: Source = scope.source
        self._budget = budget
        self._negctrl = negctrl
        self._gates: dict[str, Gate] = {}
        self._kept: dict[tuple[Gate, tuple[float, ...]], Template] = {}
        self.revision = 0

    def start(self, implied: bool = False) -> None:
        """Bring the gates that need no include; call when the version is known.

        Args:
            implied: bring the standard gates as well; the file is free to define any of them itself.
        """
        if implied:
            for gate in all_gates(self._scope.version):
                self._add_standard(gate.name, free=True)
        for name in BUILT_IN:
            self._add_standard(name, free=False)
        if self._scope.version == 3:
            self._gates["gphase"] = Gate(GPHASE.name, GPHASE.parameters, GPHASE.qubits)

    def include(self, file: str, position: int) -> None:
        """Bring the gates of a standard include file; any other file is refused."""
        if file not in PUBLISHED:
            raise self._source.error(
                f"{shown(file)} is not read: only the standard 'stdgates.inc' and 'qelib1.inc' are known",
                position,
            )
        for gate in all_gates(self._scope.version):
            name = gate.name
            known = self._gates.get(name)
            if known is not None and known.declaration is not None and name in PUBLISHED[file]:
                raise self._source.error(
                    f"{file!r} brings the gate '{name}', which this file already defines", position
                )
            if name in self._scope.taken and name in PUBLISHED[file]:
                raise self._source.error(
                    f"{file!r} brings the gate '{name}', which is already {self._scope.taken[name]}", position
                )
            if known is None and name not in self._scope.taken:
                self._add_standard(name, free=name not in PUBLISHED[file])
            elif known is not None and name in PUBLISHED[file]:
                known.may_be_defined = False

    def _add_standard(self, name: str, free: bool) -> None:
        gate = standard_gate(name, self._scope.version)
        self._gates[name] = Gate(name, gate.parameters, gate.qubits, may_be_defined=free)

    def release(self, name: str) -> None:
        """A register or constant takes a name: an unpublished standard gate of that name makes way."""
        known = self._gates.get(name)
        if known is not None and known.may_be_defined:
            del self._gates[name]
            self.revision += 1

    def is_taken(self, name: str) -> bool:
        """Whether a declaration of that name would clash with a gate."""
        return name in self._gates

    def define(self, declaration: GateDeclaration) -> None:
        """Take in `gate` or `opaque` after checking its body."""
        name = declaration.name
        self.release(name)
        if name in self._gates:
            raise self._source.error(f"the gate '{name}' is already defined", declaration.position)
        self._scope.declare(name, "a gate", declaration.position)
        gate = Gate(name, len(declaration.parameters), len(declaration.qubits), declaration)
        if declaration.body is not None:
            gate.depth = 1 + check_body(declaration, self, self._scope)
            if gate.depth > _MAX_DEPTH:
                raise self._source.error(
                    f"gate definitions use one another more than {_MAX_DEPTH} deep", declaration.position
                )
        self._gates[name] = gate

    def find(self, call: GateCall) -> Gate:
        """The gate of a call, the number of its parameters checked."""
        gate = self._gates.get(call.name)
        if gate is None:
            raise self._unknown(call)
        given = len(call.parameters)
        wanted = _count(gate.parameters, "parameter")
        if given != gate.parameters:
            raise self._source.error(
                f"'{call.name}' takes {wanted}, and {given} {_are(given)} given",
                call.position,
            )
        return gate

    def _unknown(self, call: GateCall) -> CircuitFileError:
        if call.name in self._scope.taken:
            return self._source.error(
                f"'{call.name}' is {self._scope.taken[call.name]}, not a gate", call.position
            )
        hint = ""
        if any(gate.name == call.name for gate in all_gates(self._scope.version)):
            file = "stdgates.inc" if self._scope.version == 3 else "qelib1.inc"
            hint = f': include "{file}" to use it'
        return self._source.error(f"the gate '{call.name}' is not defined{hint}", call.position)

    def template(
        self, call: GateCall, gate: Gate, constants: Mapping[str, Number], available: int
    ) -> Template:
        """The template of a call with its parameters and modifiers, its operands counted.

        Args:
            available: how many qubits there are: no gate can have more controls than that.
        """
        values = tuple(self._scope.angle(item, constants) for item in call.parameters)
        template = self._expand(gate, values, call.position)
        width = gate.qubits
        for modifier in reversed(call.modifiers):
            template, width = self._modified(template, width, modifier, constants, available)
        if len(call.operands) != width:
            given = len(call.operands)
            raise self._source.error(
                f"'{call.name}' acts on {_count(width, 'qubit')}"
                + (" with its modifiers" if call.modifiers else "")
                + f", and {given} {_are(given)} given",
                call.position,
            )
        return template

    def _expand(self, gate: Gate, values: tuple[float, ...], position: int) -> Template:
        if gate.declaration is None:
            standard = GPHASE if gate.name == "gphase" else standard_gate(gate.name, self._scope.version)
            return standard.build(*values)
        if gate.declaration.body is None:
            raise self._source.error(
                f"'{gate.name}' is declared opaque: what it does is not in this file", position
            )
        found = self._kept.get((gate, values))
        if found is None:
            constants = ChainMap(
                dict(zip(gate.declaration.parameters, values, strict=True)), self._scope.constants
            )
            pieces: list[Piece] = []
            formals = {name: index for index, name in enumerate(gate.declaration.qubits)}
            self._run(gate.declaration.body, constants, formals, pieces)
            found = tuple(pieces)
            if len(self._kept) >= _MAX_KEPT:
                self._kept.clear()
            self._kept[gate, values] = found
        return found

    def _run(
        self,
        body: tuple[Statement, ...],
        constants: Mapping[str, Number],
        formals: dict[str, int],
        pieces: list[Piece],
    ) -> None:
        """Expand the statements of a gate body (checked when it was defined)."""
        for statement in body:
            if isinstance(statement, GateCall):
                assert statement.gate is not None
                template = self.template(statement, statement.gate, constants, len(formals))
                self._budget.operations(_weight(template), statement.position)
                pieces.extend(place(template, [formals[operand.name] for operand in statement.operands]))
            elif isinstance(statement, Block):
                self._run(statement.body, constants, formals, pieces)
            elif isinstance(statement, Loop):
                for value in self._scope.rounds(statement.over, constants, statement.position):
                    self._budget.iteration(statement.position)
                    self._run(statement.body, with_value(constants, statement.name, value), formals, pieces)
            else:
                assert isinstance(statement, Barrier)

    def _modified(
        self,
        template: Template,
        width: int,
        modifier: Modifier,
        constants: Mapping[str, Number],
        available: int,
    ) -> tuple[Template, int]:
        if modifier.name == "inv":
            return inverse(template), width
        if modifier.name == "pow":
            return self._power(template, modifier, constants), width
        count = 1
        if modifier.argument is not None:
            count = self._scope.integer(modifier.argument, constants, "the number of controls")
        if not 1 <= count <= max(available - width, 1):
            raise self._source.error(
                f"{modifier.name} with this number of controls: 1 or more are needed, "
                f"and no more than there are qubits ({available})",
                modifier.position,
            )
        self._budget.operations(count * len(template) if count > 1 else 0, modifier.position)
        if modifier.name == "ctrl":
            return controlled(template, [0] * count, width), width + count
        return self._negative(template, count, width, modifier), width + count

    def _negative(self, template: Template, count: int, width: int, modifier: Modifier) -> Template:
        if count == 1 or self._negctrl == "all-zero":
            return controlled(template, [1] * count, width)
        if self._negctrl == "as-published":
            moved = place(template, range(count, count + width))
            return moved + controlled(inverse(template), [0] * count, width)
        raise self._source.error(
            f"negctrl({count}) has two readings: all {count} controls are 0, or (the published text) "
            "not all are 1; write one 'negctrl @' a control, or choose: --negctrl all-zero, "
            "--negctrl as-published",
            modifier.position,
        )

    def _power(self, template: Template, modifier: Modifier, constants: Mapping[str, Number]) -> Template:
        assert modifier.argument is not None
        exponent = self._scope.number(modifier.argument, constants)
        if isinstance(exponent, float) and exponent.is_integer():
            exponent = int(exponent)
        if not isinstance(exponent, int):
            found = broken_power(template, exponent) if math.isfinite(exponent) else None
            if found is None:
                raise self._source.error(
                    "a power that is no integer is read for single turns only (x, z, s, t, sx, p, rx, ry, rz "
                    "and the like, angles below a full turn)",
                    modifier.position,
                )
        elif abs(exponent) > _MAX_EXPONENT:
            raise self._source.error("this exponent is too large", modifier.position)
        else:
            found = whole_power(template, int(exponent))
            if found is None:
                self._budget.operations(abs(exponent) * _weight(template), modifier.position)
                found = (template if exponent > 0 else inverse(template)) * abs(exponent)
        if any(not math.isfinite(angle) for piece in found for angle in piece.angles):
            raise self._source.error("an angle must be a finite number", modifier.position)
        return found


def _weight(template: Template) -> int:
    return sum(1 + len(piece.controls) for piece in template)


def _count(number: int, noun: str) -> str:
    return f"{number or 'no'} {noun}{'' if number == 1 else 's'}"


def _are(number: int) -> str:
    return "is" if number == 1 else "are"
