"""A conjunction over its free variables alone: defined variables are replaced by what defines them."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import replace

from revsynth.logic.affine_classes import and_count, circuit
from revsynth.logic.clauses.definitions import choose_definitions
from revsynth.logic.clauses.factoring import literal_of
from revsynth.logic.clauses.forms import Runs, factored
from revsynth.logic.clauses.gates import Gate, cofactors, find_gates, window_table
from revsynth.logic.clauses.simplify import Clause, Conjunction
from revsynth.logic.network import FALSE, TRUE, Literal, Network
from revsynth.logic.network_builder import NetworkBuilder


def free_form(
    found: Conjunction, variables: Iterable[int], runs: Runs, seed: int
) -> tuple[tuple[int, ...], Network]:
    """The free variables, ascending, and a network over them, input i being the i-th, of one output.

    It is 1 where the assignment extended by the definitions satisfies everything. Definitions give every
    defined variable a value for all values of the free ones, and no model has another one: so the models of
    the conjunction and the inputs at which the network is 1 correspond one to one. One variable stays free
    where all are defined.
    """
    every = sorted(variables)
    fixed = {abs(unit): TRUE if unit > 0 else FALSE for unit in found.units}
    gates = find_gates(found)
    definitions = choose_definitions(gates, (variable for variable in every if variable not in fixed))
    chosen, free = dict(definitions.chosen), definitions.free
    units: tuple[int, ...] = ()
    if not free:
        free = (every[0],)
        chosen.pop(free[0], None)
        units = tuple(unit for unit in found.units if abs(unit) == free[0])
        fixed.pop(free[0], None)
    builder = NetworkBuilder(len(free))
    literals: dict[int, Literal] = {**fixed}
    literals.update({variable: builder.input(place) for place, variable in enumerate(free)})
    settled: set[int] = set()
    used: set[tuple[int, ...]] = set()
    for variable, gate in chosen.items():
        literals[variable] = _define(builder, variable, gate, literals)
        settled.update(_settled(variable, gate, found))
        if gate.kind == "sum":
            used.add(gate.variables)
    rest = replace(
        found,
        units=units,
        clauses=[clause for number, clause in enumerate(found.clauses) if number not in settled],
        sums=[entry for entry in found.sums if entry[0] not in used],
    )
    return free, builder.build([factored(builder, rest, literals, runs, seed)])


def _define(builder: NetworkBuilder, variable: int, gate: Gate, literals: dict[int, Literal]) -> Literal:
    """The literal of a variable by its gate."""
    operands = [literals[other] for other in gate.operands(variable)]
    if gate.kind == "sum":
        return builder.parity(operands) ^ 1 ^ gate.inverted
    if gate.kind == "product":
        return builder.all_of(literal_of(entry, literals) for entry in gate.literals) ^ gate.inverted
    table = definition_table(gate, variable)
    return builder.copy(circuit(len(operands), table), operands)[0]


def definition_table(gate: Gate, variable: int) -> int:
    """The value of a window's output, over its operands: of the two that its clauses leave, that of fewer
    ANDs.
    """
    operands = len(gate.variables) - 1
    zero, one = cofactors(gate.table, gate.variables.index(variable), operands + 1)
    everything = (1 << (1 << operands)) - 1
    return min((one, everything ^ zero), key=lambda table: (and_count(operands, table), table))


def _settled(variable: int, gate: Gate, found: Conjunction) -> list[int]:
    """The clauses of a gate that hold by the definition alone; the others of a window still matter."""
    if gate.kind != "window":
        return list(gate.clauses)
    place = gate.variables.index(variable)
    size = len(gate.variables)
    value = definition_table(gate, variable)
    everything = (1 << (1 << (size - 1))) - 1

    def holds(clause: Clause) -> bool:
        zero, one = cofactors(window_table(gate.variables, [clause]), place, size)
        return (value & one) | (everything & ~value & zero) == everything

    return [number for number in gate.clauses if holds(found.clauses[number])]
