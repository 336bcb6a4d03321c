"""The spec of a CNF over its free variables: a netlist that extends an input and puts it to every clause."""

from __future__ import annotations

from dataclasses import dataclass, replace

from revsynth.elaborate.clauses import FreeInputs, free_inputs
from revsynth.errors import SpecError
from revsynth.spec.dimacs import WORD
from revsynth.spec.model import Clauses, FreeVariables, Predicate, Spec, Word
from revsynth.spec.netlist import Netlist, NetlistGate


@dataclass(frozen=True)
class FreeSpec:
    """spec: bit i of its word `v` is variable `found.variables[i]` of the CNF, and labelled so.

    found: the same function as a network of few ANDs, to build from; the spec is there to verify against.
    Which variables are free depends on the CNF alone.
    """

    spec: Spec
    found: FreeInputs


def free_spec(spec: Spec, effort: str = "normal", seed: int = 0) -> FreeSpec:
    """A CNF's spec over its free variables. Raises SpecError where the spec is no CNF.

    Its netlist is what a reader can check: definitions of the other variables, and then the clauses as they
    stand in the file, all of them.
    """
    body = spec.body
    if not isinstance(body, Predicate) or body.clauses is None:
        raise SpecError(
            "free inputs are for a CNF: other specs define no inputs by others", source=spec.source
        )
    found = free_inputs(body.clauses, effort, seed)
    labels = {f"{WORD}[{bit}]": f"variable {variable}" for bit, variable in enumerate(found.variables)}
    netlist = _netlist(body.clauses, found)
    words = (Word(WORD, len(found.variables)),)
    origin = FreeVariables(body.clauses, found.variables, tuple(found.extension.outputs.tolist()))
    free = replace(spec, inputs=words, body=Predicate(netlist=netlist, free_of=origin), labels=labels)
    return FreeSpec(free, found)


def _netlist(clauses: Clauses, found: FreeInputs) -> Netlist:
    """Networks and netlists number constants, inputs and gates alike, so that the extension is copied as it
    is.
    """
    network = found.extension
    rows = zip(network.is_xor.tolist(), network.left.tolist(), network.right.tolist(), strict=True)
    gates = [NetlistGate("xor" if is_xor else "and", (left, right)) for is_xor, left, right in rows]
    values = network.outputs.tolist()

    def signal(entry: int) -> int:
        return int(values[abs(entry) - 1]) ^ (entry < 0)

    gates += [NetlistGate("or", tuple(map(signal, clause))) for clause in clauses.clauses]
    gates += [NetlistGate("xor", tuple(map(signal, clause))) for clause in clauses.xor_clauses]
    first = 1 + network.inputs + network.gates
    held = tuple(2 * number for number in range(first, 1 + network.inputs + len(gates)))
    gates.append(NetlistGate("and", held))
    return Netlist(network.inputs, tuple(gates), (2 * (network.inputs + len(gates)),))
