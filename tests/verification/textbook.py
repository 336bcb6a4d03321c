"""Hand-written circuits of the textbooks, for the verifier to be tried on; nothing here comes from lowering.

Toffoli from seven T gates: Nielsen, Chuang, "Quantum Computation and Quantum Information", 2000, figure 4.9
(from memory; the tests check its matrix). The relative-phase Toffoli from four T: Barenco and others, Phys.
Rev. A 52, 1995, section VI.B, in its Clifford+T form by Selinger, Phys. Rev. A 87, 2013. AND by four T and
its erasure by measurement: Jones, Phys. Rev. A 87, 2013.
"""

from __future__ import annotations

from collections.abc import Sequence

from revsynth.circuit.model import Circuit, CircuitBuilder, Guard, Op


def register_circuit(*registers: tuple[str, int], bits: int = 0) -> CircuitBuilder:
    """A builder with named registers, and bits `seen`."""
    builder = CircuitBuilder()
    for name, size in registers:
        builder.add_register(name, size)
    if bits:
        builder.add_bits("seen", bits)
    return builder


def toffoli(c: CircuitBuilder, a: int, b: int, t: int) -> None:
    """t ^= a b, exactly, with seven T."""
    c.h(t)
    c.cx(b, t)
    c.t(t, inverse=True)
    c.cx(a, t)
    c.t(t)
    c.cx(b, t)
    c.t(t, inverse=True)
    c.cx(a, t)
    c.t(b)
    c.t(t)
    c.h(t)
    c.cx(a, b)
    c.t(a)
    c.t(b, inverse=True)
    c.cx(a, b)


def relative_toffoli(c: CircuitBuilder, a: int, b: int, t: int) -> None:
    """t ^= a b up to a phase that depends on a, b and t, with four T."""
    c.h(t)
    c.t(t)
    c.cx(b, t)
    c.t(t, inverse=True)
    c.cx(a, t)
    c.t(t)
    c.cx(b, t)
    c.t(t, inverse=True)
    c.h(t)


def and_on_zero(c: CircuitBuilder, a: int, b: int, t: int) -> None:
    """A target in 0 becomes a b, exactly, with four T."""
    c.h(t)
    c.t(t)
    c.cx(b, t)
    c.t(t, inverse=True)
    c.cx(a, t)
    c.t(t)
    c.cx(b, t)
    c.t(t, inverse=True)
    c.cx(a, t)
    c.h(t)
    c.s(t)


def erase_and(c: CircuitBuilder, a: int, b: int, t: int, bit: int) -> None:
    """A target that holds a b goes back to 0 by a measurement in the X basis and corrections."""
    c.h(t)
    c.measure(t, bit)
    condition = (Guard((2 * bit,)),)
    c.z(b, (2 * a,), condition)
    c.x(t, condition=condition)


def with_steps(circuit: Circuit, change: Sequence[tuple[int, Op | None]]) -> Circuit:
    """The circuit with operations replaced: (index, None to leave it out, or an Op)."""
    changes = dict(change)
    builder = CircuitBuilder()
    for register in circuit.registers:
        builder.add_register(register.name, register.size)
    for register in circuit.bit_registers:
        builder.add_bits(register.name, register.size)
    for index, op in enumerate(circuit):
        new = changes.get(index, op)
        if new is None:
            continue
        condition = circuit.conditions[new.condition] if new.condition >= 0 else ()
        builder.add(new.kind, new.targets, new.controls, new.angles, condition, new.bit)
    return builder.build()
