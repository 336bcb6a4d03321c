"""A conjunction over its free variables alone: defined variables are replaced by what defines them."""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from dataclasses import dataclass, replace

from revsynth.logic.affine_classes import and_count, circuit
from revsynth.logic.clauses.definitions import choose_definitions
from revsynth.logic.clauses.equal_literals import merge_equal
from revsynth.logic.clauses.factoring import literal_of
from revsynth.logic.clauses.forms import Runs, factored
from revsynth.logic.clauses.gates import Gate, cofactors, find_gates, window_table
from revsynth.logic.clauses.linear_forms import Forms
from revsynth.logic.clauses.simplify import Clause, Conjunction, strengthened
from revsynth.logic.network import FALSE, TRUE, Literal, Network
from revsynth.logic.network_builder import NetworkBuilder


@dataclass(frozen=True)
class FreeForm:
    """variables: the free ones, ascending; variables[i] is input i of both networks.

    holds: one output; extension: one output for each variable, in ascending order.
    """

    variables: tuple[int, ...]
    holds: Network
    extension: Network


def free_form(found: Conjunction, variables: Iterable[int], runs: Runs, seed: int) -> FreeForm:
    """A conjunction over its free variables, and the value of each variable over them.

    `holds` is 1 where the extended assignment satisfies everything. Definitions give every defined variable
    a value for all values of the free ones, and no model has another one: so the models of the conjunction
    and the inputs at which the network is 1 correspond one to one. One variable stays free where all are
    defined, and where there is no model.
    """
    every = sorted(variables)
    merged = merge_equal(found)
    found = merged.found
    fixed = {abs(unit): TRUE if unit > 0 else FALSE for unit in found.units}
    if not found.consistent:
        fixed = dict.fromkeys(every, FALSE)
    gates = find_gates(found)
    kept = [variable for variable in every if variable not in fixed and variable not in merged.equals]
    definitions = choose_definitions(gates, kept)
    chosen, free = dict(definitions.chosen), definitions.free
    units: tuple[int, ...] = ()
    if not free:
        free = (next(variable for variable in every if variable not in merged.equals),)
        chosen.pop(free[0], None)
        units = tuple(unit for unit in found.units if abs(unit) == free[0])
        fixed.pop(free[0], None)
    builder = NetworkBuilder(len(free))
    literals: dict[int, Literal] = {**fixed}
    literals.update({variable: builder.input(place) for place, variable in enumerate(free)})
    for variable, gate in chosen.items():
        literals[variable] = _define(builder, variable, gate, literals)
    literals.update({v: literal_of(entry, literals) for v, entry in merged.equals.items()})
    rest = _unsettled(replace(found, units=units), chosen)
    holds = factored(builder, rest, literals, runs, seed)
    extension = builder.build([literals[variable] for variable in every])
    return FreeForm(free, builder.build([holds]), extension)


def _unsettled(found: Conjunction, chosen: Mapping[int, Gate]) -> Conjunction:
    """What does not hold by the definitions alone, as far as single gates and linear algebra tell."""
    settled: set[int] = set()
    for variable, gate in chosen.items():
        settled.update(_settled(variable, gate, found))
    linear = [Gate("sum", variables, variables, inverted=not value) for variables, value in found.sums]
    forms = Forms(chosen, linear)
    clauses = [clause for number, clause in enumerate(found.clauses) if number not in settled]
    return replace(
        found,
        clauses=strengthened([clause for clause in clauses if not forms.clause_holds(clause)]),
        sums=[entry for entry, gate in zip(found.sums, linear, strict=True) if forms.of_sum(gate)],
    )


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
