"""The solver's wrapper."""

from __future__ import annotations

from itertools import combinations

import pytest

from revsynth.solver import Solver


def test_gates_and_models() -> None:
    with Solver() as solver:
        a, b, both, odd = (solver.variable() for _ in range(4))
        solver.add_and(both, a, b)
        solver.add_xor(odd, a, b)
        assert solver.solve([odd, both]) is False
        assert solver.solve([odd, -a]) is True
        assert (solver.value(a), solver.value(b), solver.value(both)) == (False, True, False)


def test_no_model_after_a_no() -> None:
    with Solver() as solver:
        a = solver.variable()
        solver.add([a])
        assert solver.solve([-a]) is False
        with pytest.raises(ValueError, match="there is no model"):
            solver.value(a)


def test_a_conflict_limit_holds_for_one_question_only() -> None:
    # Ten lamps do not fit nine lockers.
    with Solver() as solver:
        place = [[solver.variable() for _ in range(9)] for _ in range(10)]
        for row in place:
            solver.add(row)
        for locker in range(9):
            for one, other in combinations(range(10), 2):
                solver.add([-place[one][locker], -place[other][locker]])
        assert solver.solve(conflicts=20) is None
        assert solver.solve([-place[0][0], place[0][1]], conflicts=20) is None
        assert solver.conflicts < 200
