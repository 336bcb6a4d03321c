"""Variables as exclusive sums of others, and what holds by linear algebra.

A form is an integer: bit 0 the constant 1, the other bits one variable each.
"""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from typing import TypeAlias

from revsynth.logic.clauses.gates import Gate
from revsynth.logic.clauses.simplify import Clause

Form: TypeAlias = int


class Forms:
    """The forms of variables over those that no sum defines; made from definitions in order."""

    def __init__(self, chosen: Mapping[int, Gate], sums: Iterable[Gate]) -> None:
        linear = [gate for gate in (*chosen.values(), *sums) if gate.kind == "sum"]
        self.variables = sorted({variable for gate in linear for variable in gate.variables})
        self.place = {variable: number + 1 for number, variable in enumerate(self.variables)}
        self.forms: dict[int, Form] = {variable: 1 << self.place[variable] for variable in self.variables}
        for variable, gate in chosen.items():
            if gate.kind == "sum":
                self.forms[variable] = self.of_sum(gate) ^ self.forms[variable]

    def of_sum(self, gate: Gate) -> Form:
        """The form that is 0 where a sum holds."""
        form = 0 if gate.inverted else 1
        for variable in gate.variables:
            form ^= self.forms[variable]
        return form

    def within(self, form: Form) -> list[int]:
        """The variables of a form, ascending."""
        return [variable for variable in self.variables if form >> self.place[variable] & 1]

    def clause_holds(self, clause: Clause) -> bool:
        """Whether some literal of a clause is 1 for all values: their complements contradict each other.

        A variable in no sum can take any value, so its literal adds nothing.
        """
        rows: list[Form] = []
        for entry in clause:
            form = self.forms.get(abs(entry))
            if form is None:
                continue
            form ^= entry < 0
            for row in rows:
                form = min(form, form ^ row)
            if form == 1:
                return True
            if form:
                rows.append(form)
        return False
