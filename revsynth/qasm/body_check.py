"""Checking a gate body when it is defined: known names and gates, each qubit once, no recursion."""

from __future__ import annotations

from typing import TYPE_CHECKING

from revsynth.qasm.lexer import Source
from revsynth.qasm.scope import Scope
from revsynth.qasm.syntax import (
    Barrier,
    Block,
    Expression,
    GateCall,
    GateDeclaration,
    Loop,
    Operand,
    Span,
    Statement,
)

if TYPE_CHECKING:
    from revsynth.qasm.gate_table import GateTable


def check_body(declaration: GateDeclaration, gates: GateTable, scope: Scope) -> int:
    """Check the body and bind its calls to the gates known so far; gives the greatest depth of what it uses.

    Raises:
        CircuitFileError: at the first statement that a gate body cannot hold.
    """
    known = frozenset(declaration.parameters)
    check = _Check(declaration, gates, scope)
    return check.statements(declaration.body or (), known, 0)


class _Check:
    def __init__(self, declaration: GateDeclaration, gates: GateTable, scope: Scope) -> None:
        self._name = declaration.name
        self._qubits = frozenset(declaration.qubits)
        self._gates = gates
        self._scope = scope
        self._source: Source = scope.source

    def statements(self, body: tuple[Statement, ...], known: frozenset[str], level: int) -> int:
        deepest = level
        for statement in body:
            if isinstance(statement, GateCall):
                deepest = max(deepest, level + self._call(statement, known))
            elif isinstance(statement, Barrier):
                for operand in statement.operands:
                    self._operand(operand)
            elif isinstance(statement, Block):
                deepest = max(deepest, self.statements(statement.body, known, level + 1))
            elif isinstance(statement, Loop):
                self._span(statement.over, known)
                inner = known | {statement.name}
                deepest = max(deepest, self.statements(statement.body, inner, level + 1))
            else:
                raise self._source.error(
                    "a gate body holds gates only: no measurement, reset or condition", statement.position
                )
        return deepest

    def _call(self, call: GateCall, known: frozenset[str]) -> int:
        if call.name == self._name:
            raise self._source.error(f"the gate '{call.name}' uses itself", call.position)
        gate = self._gates.find(call)
        call.gate = gate
        for expression in call.parameters:
            self._expression(expression, known)
        for modifier in call.modifiers:
            if modifier.argument is not None:
                self._expression(modifier.argument, known)
        seen: set[str] = set()
        for operand in call.operands:
            self._operand(operand)
            if operand.name in seen:
                raise self._source.error(f"the qubit '{operand.name}' is used twice", operand.position)
            seen.add(operand.name)
        has_controls = any(modifier.name in ("ctrl", "negctrl") for modifier in call.modifiers)
        if not has_controls and len(call.operands) != gate.qubits:
            raise self._source.error(
                f"'{call.name}' acts on {gate.qubits} qubits, and {len(call.operands)} are given",
                call.position,
            )
        return gate.depth

    def _operand(self, operand: Operand) -> None:
        if operand.name not in self._qubits:
            raise self._source.error(
                f"'{operand.name}' is not a qubit of the gate '{self._name}'", operand.position
            )
        if operand.selectors:
            raise self._source.error(
                f"'{operand.name}' is a single qubit here and takes no index", operand.position
            )

    def _span(self, over: Span | tuple[Expression, ...], known: frozenset[str]) -> None:
        items = (over.start, over.step, over.stop) if isinstance(over, Span) else over
        for item in items:
            if item is not None:
                self._expression(item, known)

    def _expression(self, expression: Expression, known: frozenset[str]) -> None:
        for step in expression.steps:
            if step.what != "name":
                continue
            name = getattr(step.value, "name", "")
            if name not in known and name not in self._scope.constants:
                raise self._source.error(
                    f"'{name}' is neither a parameter of '{self._name}' nor a constant", step.position
                )
