"""Random CNFs with a model: the same for the same seed, on every machine and Python."""

from __future__ import annotations

from random import Random

Cnf = tuple[tuple[int, ...], ...]


def planted(variables: int, clauses: int, seed: int) -> tuple[Cnf, tuple[int, ...]]:
    """Different 3-literal clauses that a random assignment satisfies; and that assignment, 0 or 1 a variable.

    Only `Random.random` is used, whose sequence Python promises to keep.
    """
    rng = Random(seed)

    def below(limit: int) -> int:
        return int(rng.random() * limit)

    model = tuple(below(2) for _ in range(variables))
    found: dict[tuple[int, ...], None] = {}
    while len(found) < clauses:
        chosen: dict[int, None] = {}
        while len(chosen) < 3:
            chosen[below(variables) + 1] = None
        clause = tuple(variable if below(2) else -variable for variable in sorted(chosen))
        if any((entry > 0) == model[abs(entry) - 1] for entry in clause):
            found[clause] = None
    return tuple(found), model


def dimacs(variables: int, clauses: Cnf) -> str:
    """The text of a CNF file."""
    lines = [f"p cnf {variables} {len(clauses)}", *(" ".join(map(str, (*clause, 0))) for clause in clauses)]
    return "\n".join(lines) + "\n"
