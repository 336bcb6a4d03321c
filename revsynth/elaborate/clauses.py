"""From a CNF to networks: over all its variables in several forms, or over its free ones alone."""

from __future__ import annotations

from dataclasses import dataclass
from functools import lru_cache

from revsynth.logic.clauses.forms import factored, flat, windowed
from revsynth.logic.clauses.free_form import free_form
from revsynth.logic.clauses.gates import find_gates
from revsynth.logic.clauses.simplify import conjunction
from revsynth.logic.network import Network
from revsynth.logic.network_builder import NetworkBuilder
from revsynth.logic.network_function import NetworkFunction
from revsynth.spec.model import Clauses

RUNS = {"low": (20_000,), "normal": (80_000, 80_000), "high": (100_000, 300_000, 600_000)}
"""Steps of the runs of annealing, by effort: about a microsecond each."""


def clause_networks(clauses: Clauses, effort: str = "normal", seed: int = 0) -> list[tuple[str, Network]]:
    """Networks of one output over all variables (variable i is input i - 1): 1 where every clause holds.

    Named "flat" (each clause an OR), "factored" (both polarities of a variable share one AND) and "windows"
    (sets of clauses over at most five variables as one function), the fewest ANDs first.
    """
    found = conjunction(clauses.clauses, clauses.xor_clauses)
    literals = {variable: 2 * variable for variable in range(1, clauses.variables + 1)}
    runs = RUNS[effort]
    made = []
    for name in ("factored", "windows", "flat"):
        builder = NetworkBuilder(clauses.variables)
        if name == "flat":
            literal = flat(builder, found, literals)
        elif name == "factored":
            literal = factored(builder, found, literals, runs, seed)
        else:
            gates = find_gates(found)
            if not any(gate.kind == "window" for gate in gates):
                continue
            literal = windowed(builder, found, gates, literals, runs, seed)
        made.append((name, builder.build([literal])))
    return sorted(made, key=lambda entry: entry[1].ands)


@dataclass(frozen=True)
class FreeInputs:
    """A CNF over its free variables: variables[i], ascending, is input i of both networks.

    function: one output, 1 where the extended assignment satisfies every clause.
    extension: one output for each variable of the CNF, its value; variable i is output i - 1.
    """

    variables: tuple[int, ...]
    function: NetworkFunction
    extension: Network


@lru_cache(maxsize=2)
def free_inputs(clauses: Clauses, effort: str = "normal", seed: int = 0) -> FreeInputs:
    """The CNF over its free variables: the others are defined by gates found in the clauses.

    The function is 1 where the free variables, extended by the definitions, satisfy every clause, and no two
    models agree on all free variables: so there are as many such inputs as models. Variables in no clause are
    free.
    """
    found = conjunction(clauses.clauses, clauses.xor_clauses, keep=True)
    form = free_form(found, range(1, clauses.variables + 1), RUNS[effort], seed)
    return FreeInputs(form.variables, NetworkFunction(form.holds), form.extension)
