"""That a CNF over its free variables has the models of the CNF, one for one."""

from __future__ import annotations

from revsynth.errors import UndecidedError
from revsynth.solver import Solver
from revsynth.spec.model import FreeVariables, Predicate, Spec
from revsynth.spec.netlist import Netlist

CONFLICTS = 100_000
"""Conflicts that the question about each variable may take."""


def check_free_variables(spec: Spec) -> list[str]:
    """Prove that no two models agree on all free variables: each follows from them by its definition.

    The other half needs no proof: the netlist puts the extended assignment to every clause of the file, so
    each marked input is a model. Returns what was done, in words; nothing for other specs. Raises
    AssertionError where a variable is not defined, UndecidedError where the solver reaches its limit.
    """
    body = spec.body
    if not isinstance(body, Predicate) or body.free_of is None or body.netlist is None:
        return []
    origin, clauses = body.free_of, body.free_of.clauses
    with Solver() as solver:
        variables = [solver.variable() for _ in range(clauses.variables)]
        for clause in clauses.clauses:
            solver.add(clause)
        for literals in clauses.xor_clauses:
            _add_sum(solver, literals)
        definitions = _definitions(solver, body.netlist, origin)
        undecided = 0
        for variable, defined in zip(variables, definitions, strict=True):
            for pair in ([variable, -defined], [-variable, defined]):
                answer = solver.solve(pair, CONFLICTS)
                if answer:
                    raise AssertionError(
                        f"a defect of revsynth: variable {variable} of {spec.source} does not follow from "
                        "the free ones"
                    )
                undecided += answer is None
    if undecided:
        raise UndecidedError(
            f"{spec.source}: it could not be settled whether {undecided} variables follow from the free ones"
        )
    return [
        f"spec: the {clauses.variables - len(origin.variables)} variables that are not free follow from the "
        f"{len(origin.variables)} free ones, proved by a solver, and every clause of the file is put to them"
    ]


def _add_sum(solver: Solver, literals: tuple[int, ...]) -> None:
    """The XOR of the literals is 1."""
    total = solver.variable()
    solver.add([-total])
    for literal in literals:
        following = solver.variable()
        solver.add_xor(following, total, literal)
        total = following
    solver.add([total])


def _definitions(solver: Solver, netlist: Netlist, origin: FreeVariables) -> list[int]:
    """The solver's literal for every variable as the netlist defines it by gates of two operands."""
    constant = solver.variable()
    solver.add([-constant])
    known = [constant, *origin.variables]

    def literal(signal: int) -> int:
        return -known[signal >> 1] if signal & 1 else known[signal >> 1]

    last = max((signal >> 1 for signal in origin.values), default=0)
    for kind, operands, _ in netlist.gates[: max(last - netlist.inputs, 0)]:
        out = solver.variable()
        (solver.add_xor if kind == "xor" else solver.add_and)(out, *map(literal, operands))
        known.append(out)
    return [literal(signal) for signal in origin.values]
