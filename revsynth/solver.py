"""The SAT solver: the one module that imports it (CaDiCaL, through python-sat).

Clauses are lists of nonzero integers, as in DIMACS. Importing takes a while, so this module is imported where
a proof needs it. Deterministic: the same clauses and questions in the same order give the same answers.
"""

from __future__ import annotations

from collections.abc import Iterable, Sequence


class Solver:
    """An incremental solver; close it, or use it in a `with` statement."""

    def __init__(self) -> None:
        from pysat.solvers import Solver as Engine

        self._engine = Engine(name="cadical195")
        self._variables = 0
        self._model: list[int] | None = None

    def __enter__(self) -> Solver:
        return self

    def __exit__(self, *_: object) -> None:
        self.close()

    def close(self) -> None:
        """Frees the memory."""
        self._engine.delete()

    def variable(self) -> int:
        """A new variable, 1, 2, ..."""
        self._variables += 1
        return self._variables

    def add(self, clause: Iterable[int]) -> None:
        """Adds a clause for good."""
        self._engine.add_clause(list(clause))

    def add_and(self, out: int, a: int, b: int) -> None:
        """out = a AND b."""
        for clause in ([-out, a], [-out, b], [out, -a, -b]):
            self._engine.add_clause(clause)

    def add_xor(self, out: int, a: int, b: int) -> None:
        """out = a XOR b."""
        for clause in ([-out, a, b], [-out, -a, -b], [out, -a, b], [out, a, -b]):
            self._engine.add_clause(clause)

    def solve(self, assumptions: Sequence[int] = (), conflicts: int | None = None) -> bool | None:
        """True: satisfiable (see `value`); False: not; None: undecided within the conflict limit."""
        self._engine.conf_budget(-1 if conflicts is None else max(conflicts, 1))
        answer: bool | None = self._engine.solve_limited(assumptions=list(assumptions))
        self._model = self._engine.get_model() if answer else None
        return answer

    def value(self, variable: int) -> bool:
        """The value of a variable in the last model; False where the model leaves it open.

        Raises ValueError where the last question had no answer or the answer no.
        """
        if self._model is None:
            raise ValueError("there is no model: the last question was not answered with yes")
        place = variable - 1
        return place < len(self._model) and self._model[place] > 0

    @property
    def conflicts(self) -> int:
        """Conflicts met so far, over all questions: the work spent."""
        return int(self._engine.accum_stats()["conflicts"])
