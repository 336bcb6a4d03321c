"""From a block to a circuit in a gate set: the order of the steps, and the registers."""

from __future__ import annotations

import math
from collections.abc import Sequence

import numpy as np

from revsynth.circuit.model import Circuit, CircuitBuilder, Guard, Kind
from revsynth.lowering.assemble import Gates
from revsynth.lowering.cancel import cancel_neighbours
from revsynth.lowering.constructions import Style
from revsynth.lowering.expand import expand
from revsynth.lowering.fan_out import gather_units, units_of
from revsynth.lowering.multi_control import write_cascade
from revsynth.lowering.plan import clean_products, steps_of
from revsynth.lowering.scratch import check_budget
from revsynth.lowering.sharing import order_units
from revsynth.lowering.variants import cheapest
from revsynth.options import Aim, GateSet, Oracle, Uncompute
from revsynth.synthesis.interface import Block, known_lines

SEEN_BITS = 1 << 16
"""Every measurement has a bit of its own up to this many; after that, bits are used again in turn."""


def lower(
    block: Block,
    registers: Sequence[tuple[str, int]],
    *,
    oracle: Oracle,
    gates: GateSet,
    uncompute: Uncompute,
    max_qubits: int | None = None,
    aim: Aim = "t",
) -> Circuit:
    """The circuit of a block in a gate set, exact in phase.

    registers: (name, size) of the block's lines in order, without its work lines; index 0 of a register is
    the least significant bit. The register `work` is added where there are work lines (first) or scratch; the
    bits `seen` where something is measured. Raises BudgetError where `max_qubits` is too small, saying how
    many are needed, and ValueError where the registers do not add up to the block's lines.
    """
    lines = block.cascade.lines
    if sum(size for _, size in registers) != lines - block.work:
        raise ValueError(f"registers {list(registers)} do not add up to {lines - block.work} lines")
    if gates == "cascade":
        check_budget(lines, max_qubits)
        builder = CircuitBuilder()
        _add_registers(builder, registers, block.work)
        write_cascade(builder, block.cascade)
        return builder.build()
    style = Style(gates, uncompute, aim)
    once = gates == "clifford+t" or aim != "gates"
    units = gather_units(lines, block.cascade) if once else units_of(block.cascade)
    known = known_lines(block, oracle)
    ordered = order_units(units, lines)
    steps = steps_of(ordered, lines, known)
    if known and ordered != units:
        given = steps_of(units, lines, known)
        if clean_products(given) > clean_products(steps):
            steps = given
    best = cheapest(steps, lines, max_qubits, style)
    written = cancel_neighbours(expand(best.gates, style), lines + best.scratch)
    return _circuit(written, registers, block.work + best.scratch, best.minus)


def _add_registers(builder: CircuitBuilder, registers: Sequence[tuple[str, int]], work: int) -> None:
    for name, size in registers:
        builder.add_register(name, size)
    if work:
        builder.add_register("work", work)


def _circuit(gates: Gates, registers: Sequence[tuple[str, int]], work: int, minus: bool) -> Circuit:
    builder = CircuitBuilder()
    _add_registers(builder, registers, work)
    bits = min(gates.bits, SEEN_BITS)
    if bits:
        builder.add_bits("seen", bits)
    if minus:
        builder.add(Kind.GPHASE, (), angles=(math.pi,))
    frame = builder.build()
    bit, condition = gates.bit, gates.condition
    if gates.bits > SEEN_BITS:
        bit = np.where(bit >= 0, bit % SEEN_BITS, bit).astype(np.int32)
        condition = np.where(condition >= 0, condition % SEEN_BITS, condition).astype(np.int32)
    return Circuit(
        frame.registers,
        frame.bit_registers,
        np.concatenate([gates.kind, frame.kind]),
        np.concatenate([gates.offset, frame.offset[1:] + gates.offset[-1]]),
        np.concatenate([gates.operand, frame.operand]),
        np.concatenate([condition, frame.condition]),
        np.concatenate([bit, frame.bit]),
        {len(gates): (math.pi,)} if minus else {},
        [(Guard((2 * number,)),) for number in range(bits)],
    )
