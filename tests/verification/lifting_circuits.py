"""Wide circuits for lifting: ripple adders in place, alone and in rounds, lowered to any gate set."""

from __future__ import annotations

from revsynth.cascade.model import PHASE, Cascade, Gate
from revsynth.circuit.model import Circuit
from revsynth.lowering import lower
from revsynth.options import GateSet, Oracle, Uncompute
from revsynth.synthesis.interface import Block


def ripple_adder(a: list[int], b: list[int], carry: list[int]) -> list[Gate]:
    """b += a modulo 2**n with carries on lines in 0, which are erased: Gidney, Quantum 2, 2018."""
    gates: list[Gate] = []

    def cnot(control: int, target: int) -> None:
        gates.append(Gate(target, (2 * control,)))

    def both(one: int, other: int, target: int) -> None:
        gates.append(Gate(target, tuple(sorted((2 * one, 2 * other)))))

    last = len(a) - 1
    for i in range(last):
        if i:
            cnot(carry[i - 1], a[i])
            cnot(carry[i - 1], b[i])
        both(a[i], b[i], carry[i])
        if i:
            cnot(carry[i - 1], carry[i])
    cnot(a[last], b[last])
    if last:
        cnot(carry[last - 1], b[last])
    for i in reversed(range(last)):
        if i:
            cnot(carry[i - 1], carry[i])
        both(a[i], b[i], carry[i])
        if i:
            cnot(carry[i - 1], a[i])
        cnot(a[i], b[i])
    return gates


def adder(bits: int, gates: GateSet, uncompute: Uncompute) -> Circuit:
    """b += a on words of so many bits: registers a, b, work."""
    a, b = list(range(bits)), list(range(bits, 2 * bits))
    work = list(range(2 * bits, 3 * bits - 1))
    return lowered(3 * bits - 1, ripple_adder(a, b, work), bits - 1, gates, uncompute)


def rounds(words: int, bits: int, count: int, gates: GateSet, uncompute: Uncompute) -> Circuit:
    """Add, rotate and XOR round after round, all in place; one register v of all words, then work."""
    line = [[word * bits + i for i in range(bits)] for word in range(words)]
    work = list(range(words * bits, (words + 1) * bits - 1))
    found: list[Gate] = []
    for turn in range(count):
        one, other, third = (line[(turn + shift) % words] for shift in (0, 1, 2))
        found += ripple_adder(one, other, work)
        found += [Gate(third[(i + 7) % bits], (2 * other[i],)) for i in range(bits)]
    return lowered((words + 1) * bits - 1, found, bits - 1, gates, uncompute)


def equality_with_products(bits: int, gates: GateSet, uncompute: Uncompute) -> Circuit:
    """The sign -1 where all of `bits` qubits are 1, as one gate of a cascade."""
    phase = [Gate(PHASE, tuple(2 * line for line in range(bits)))]
    return lowered(bits, phase, 0, gates, uncompute, "phase")


def lowered(
    lines: int, gates: list[Gate], work: int, kind: GateSet, uncompute: Uncompute, oracle: Oracle = "inplace"
) -> Circuit:
    """The circuit of a cascade whose last `work` lines are scratch."""
    block = Block(Cascade.from_gates(lines, gates), "by hand", inputs=lines - work, work=work)
    return lower(block, [("v", lines - work)], oracle=oracle, gates=kind, uncompute=uncompute)
