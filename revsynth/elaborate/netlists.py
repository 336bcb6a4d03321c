"""From a netlist as read to a network of ANDs and XORs."""

from __future__ import annotations

from functools import lru_cache

from revsynth.logic.affine_classes import MOST_INPUTS, circuit
from revsynth.logic.clauses.forms import factored
from revsynth.logic.clauses.gates import window_table
from revsynth.logic.clauses.simplify import conjunction
from revsynth.logic.network import FALSE, Literal, Network
from revsynth.logic.network_builder import NetworkBuilder
from revsynth.spec.netlist import Netlist, NetlistGate, Signal


def netlist_network(netlist: Netlist) -> Network:
    """The network of a netlist: input i is its input i, one output for each of its outputs, in its order.

    Covers of up to five operands become circuits of the fewest ANDs, wider ones are factored as clauses are.
    """
    builder = NetworkBuilder(netlist.inputs)
    made: list[Literal] = [FALSE, *(builder.input(place) for place in range(netlist.inputs))]

    def literal(signal: Signal) -> Literal:
        return made[signal >> 1] ^ (signal & 1)

    for gate in netlist.gates:
        operands = [literal(signal) for signal in gate.operands]
        if gate.kind == "and":
            made.append(builder.all_of(operands))
        elif gate.kind == "or":
            made.append(builder.any_of(operands))
        elif gate.kind == "xor":
            made.append(builder.parity(operands))
        else:
            made.append(_cover(builder, gate, operands))
    return builder.build([literal(signal) for signal in netlist.outputs])


def _cover(builder: NetworkBuilder, gate: NetlistGate, operands: list[Literal]) -> Literal:
    """1 where some row fits: the complement of a conjunction of clauses, one a row, that says that it does
    not.
    """
    if len(operands) <= MOST_INPUTS:
        return builder.copy(circuit(len(operands), _cover_table(len(operands), gate.rows)), operands)[0]
    found = conjunction(map(_misfit, gate.rows), ())
    literals = dict(enumerate(operands, 1))
    return factored(builder, found, literals, (), 0) ^ 1


@lru_cache(maxsize=4096)
def _cover_table(operands: int, rows: tuple[str, ...]) -> int:
    """Bit p is 1 where some row fits, operand i being bit i of p."""
    everything = (1 << (1 << operands)) - 1
    misfits = [tuple(sorted(_misfit(row))) for row in rows]
    return everything ^ window_table(tuple(range(1, operands + 1)), misfits)


def _misfit(row: str) -> tuple[int, ...]:
    """The clause that holds where a row does not fit; variable i stands for operand i - 1."""
    return tuple(-place if digit == "1" else place for place, digit in enumerate(row, 1) if digit != "-")
