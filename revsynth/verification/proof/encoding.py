"""Nodes as variables of a solver, each with its clauses when it is first asked about."""

from __future__ import annotations

from collections.abc import Sequence

from revsynth.solver import Solver
from revsynth.verification.lifting.parities import FALSE, FREE, XOR, Literal, Parities


class Encoding:
    """A solver that knows the nodes of one `Parities`; close it in the end."""

    def __init__(self, parities: Parities) -> None:
        self.parities = parities
        self.solver = Solver()
        constant = self.solver.variable()
        self.solver.add([-constant])
        self._variable = {0: constant}

    def close(self) -> None:
        """Free the solver's memory."""
        self.solver.close()

    def variable(self, literal: Literal) -> int:
        """The solver's literal for one of ours; clauses of all that it rests on are added."""
        variable = self._variable.get(literal >> 1) or self._add(literal >> 1)
        return -variable if literal & 1 else variable

    def _add(self, top: int) -> int:
        parities, known = self.parities, self._variable
        stack = [top]
        while stack:
            node = stack[-1]
            if node in known:
                stack.pop()
                continue
            if parities.kind[node] == FREE:
                known[node] = self.solver.variable()
                continue
            a, b = known.get(parities.left[node]), known.get(parities.right[node])
            if a is None or b is None:
                stack += [part for part in (parities.left[node], parities.right[node]) if part not in known]
                continue
            known[node] = self.solver.variable()
            join = self.solver.add_xor if parities.kind[node] == XOR else self.solver.add_and
            join(known[node], a, b)
        return known[top]

    def size(self, literals: Sequence[Literal]) -> int:
        """How many nodes the solver knows, these literals and all that they rest on included."""
        for literal in literals:
            self.variable(literal)
        return len(self._variable)

    def ever(self, literals: Sequence[Literal], conflicts: int | None) -> bool | None:
        """Whether all the literals are 1 for some input; None where the limit of conflicts was reached."""
        if FALSE in literals:
            return False
        return self.solver.solve([self.variable(literal) for literal in literals], conflicts)

    def never(self, literal: Literal) -> None:
        """The literal has been shown to be 0 for every input: further questions may use it."""
        self.solver.add([-self.variable(literal)])

    def same(self, a: Literal, b: Literal, conflicts: int) -> bool | None:
        """Whether two literals are equal for every input; what is proved is learnt for good."""
        one, other = self.variable(a), self.variable(b)
        for pair in ([one, -other], [-one, other]):
            answer = self.solver.solve(pair, conflicts)
            if answer is not False:
                return None if answer is None else False
            self.solver.add([-pair[0], -pair[1]])
        return True

    def model(self, variables: Sequence[Literal]) -> list[int]:
        """The values (0 or 1) of free variables in the last model; 0 for those it does not rest on."""
        known = self._variable
        return [
            int(literal >> 1 in known and self.solver.value(known[literal >> 1])) for literal in variables
        ]
