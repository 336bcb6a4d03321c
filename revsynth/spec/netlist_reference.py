"""A netlist evaluated a second time: plain Python integers, one bit an input, each gate as defined."""

from __future__ import annotations

from collections.abc import Sequence

from revsynth.spec.netlist import Netlist, NetlistGate

LANES = 1024
"""Inputs that are evaluated together."""


def netlist_values(netlist: Netlist, indices: Sequence[int]) -> list[tuple[int, ...]]:
    """The output bits, lowest first, at each of the inputs given by combined index."""
    found: list[tuple[int, ...]] = []
    for begin in range(0, len(indices), LANES):
        some = indices[begin : begin + LANES]
        outputs = _outputs(netlist, some)
        found += [tuple(value >> lane & 1 for value in outputs) for lane in range(len(some))]
    return found


def _outputs(netlist: Netlist, indices: Sequence[int]) -> list[int]:
    """Each output as an integer; bit i is its value at indices[i]."""
    everywhere = (1 << len(indices)) - 1
    values = [0]
    for bit in range(netlist.inputs):
        values.append(sum(1 << lane for lane, index in enumerate(indices) if index >> bit & 1))
    for gate in netlist.gates:
        operands = [values[signal >> 1] ^ (everywhere if signal & 1 else 0) for signal in gate.operands]
        values.append(_value(gate, operands, everywhere))
    return [values[signal >> 1] ^ (everywhere if signal & 1 else 0) for signal in netlist.outputs]


def _value(gate: NetlistGate, operands: list[int], everywhere: int) -> int:
    if gate.kind == "xor":
        total = 0
        for operand in operands:
            total ^= operand
        return total
    if gate.kind == "or":
        return everywhere ^ _all([everywhere ^ operand for operand in operands], everywhere)
    if gate.kind == "and":
        return _all(operands, everywhere)
    no_row = everywhere
    for row in gate.rows:
        wrong = 0
        for operand, digit in zip(operands, row, strict=True):
            if digit == "0":
                wrong |= operand
            elif digit == "1":
                wrong |= everywhere ^ operand
        no_row &= wrong
    return everywhere ^ no_row


def _all(operands: list[int], everywhere: int) -> int:
    total = everywhere
    for operand in operands:
        total &= operand
    return total
