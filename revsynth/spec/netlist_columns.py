"""The columns of a netlist's outputs, gate by gate and bit-parallel, in blocks of inputs."""

from __future__ import annotations

import numpy as np

from revsynth.logic.truth_table import ALL_ONES, Column, Columns, last_word_mask, variable, words_for
from revsynth.spec.netlist import Netlist, NetlistGate, Signal

MOST_WORDS = 1 << 13
"""Words of a column that are worked out at a time: 64 KB."""
MOST_LIVE = 1 << 25
"""Words of all columns that are held at a time: 256 MB."""


def netlist_columns(netlist: Netlist) -> Columns:
    """Values of each output, uint64 (outputs, words), packed as in `truth_table`.

    Columns are forgotten behind their last reader, so that memory follows the width of the netlist.
    """
    inputs, words = netlist.inputs, words_for(netlist.inputs)
    needed, dies, live = _lifetimes(netlist)
    size = min(words, MOST_WORDS)
    while size > 1 and size * live > MOST_LIVE:
        size //= 2
    found = np.zeros((len(netlist.outputs), words), dtype=np.uint64)
    for begin in range(0, words, size):
        columns: dict[int, Column] = {0: np.zeros(size, dtype=np.uint64)}
        for bit in range(inputs):
            columns[bit + 1] = _input_column(inputs, bit, begin, size)
        for place in needed:
            columns[inputs + 1 + place] = _gate_column(netlist.gates[place], columns, size)
            for number in dies.get(place, ()):
                del columns[number]
        for output, signal in enumerate(netlist.outputs):
            found[output, begin : begin + size] = _column(columns, signal)
    found &= last_word_mask(inputs)
    return found


def _lifetimes(netlist: Netlist) -> tuple[list[int], dict[int, list[int]], int]:
    """The gates that outputs depend on; of each the gates that it reads last; the most columns at once."""
    first = netlist.inputs + 1
    kept = {signal >> 1 for signal in netlist.outputs}
    read: set[int] = set()
    needed: list[int] = []
    dies: dict[int, list[int]] = {}
    for place in range(len(netlist.gates) - 1, -1, -1):
        if first + place not in kept and first + place not in read:
            continue
        needed.append(place)
        for number in (signal >> 1 for signal in netlist.gates[place].operands):
            if number >= first and number not in kept and number not in read:
                read.add(number)
                dies.setdefault(place, []).append(number)
    needed.reverse()
    live = most = first
    for place in needed:
        live += 1
        most = max(most, live)
        live -= len(dies.get(place, ()))
    return needed, dies, most


def _input_column(inputs: int, bit: int, begin: int, size: int) -> Column:
    """Words begin ... begin + size - 1 of the column of an input bit; size is a power of two."""
    low = min(inputs, 6 + size.bit_length() - 1)
    if bit < low:
        return variable(low, bit)
    return np.full(size, ALL_ONES if begin >> (bit - 6) & 1 else 0, dtype=np.uint64)


def _column(columns: dict[int, Column], signal: Signal) -> Column:
    column = columns[signal >> 1]
    return ~column if signal & 1 else column


def _gate_column(gate: NetlistGate, columns: dict[int, Column], size: int) -> Column:
    """The column of a gate; bits that stand for no input may be anything."""
    if gate.kind == "cover":
        found = np.zeros(size, dtype=np.uint64)
        for row in gate.rows:
            fits = np.full(size, ALL_ONES, dtype=np.uint64)
            for signal, digit in zip(gate.operands, row, strict=True):
                if digit != "-":
                    fits &= _column(columns, signal ^ (digit == "0"))
            found |= fits
        return found
    join = {"and": np.bitwise_and, "or": np.bitwise_or, "xor": np.bitwise_xor}[gate.kind]
    found = np.full(size, ALL_ONES if gate.kind == "and" else 0, dtype=np.uint64)
    for signal in gate.operands:
        join(found, _column(columns, signal), out=found)
    return found
