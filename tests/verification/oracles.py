"""Small oracles written by hand, one a form, for mutation tests: (name, spec, circuit, oracle)."""

from __future__ import annotations

from dataclasses import dataclass

import revsynth
from revsynth.circuit.model import Circuit, Kind
from revsynth.options import Oracle
from revsynth.qasm import Program
from revsynth.spec.model import Spec
from tests.verification.textbook import and_on_zero, erase_and, register_circuit, relative_toffoli, toffoli


@dataclass(frozen=True)
class Example:
    """A spec and a circuit that is right for it."""

    name: str
    spec: Spec
    circuit: Circuit
    oracle: Oracle
    comments: tuple[str, ...] = ()

    def program(self, circuit: Circuit | None = None) -> Program:
        """The circuit, or another in its place, as if read from a file."""
        return as_program(circuit or self.circuit, *self.comments)


def as_program(circuit: Circuit, *comments: str) -> Program:
    """A circuit as if read from an OpenQASM 3 file."""
    return Program(circuit, "3.0", comments)


def lamp_code() -> Example:
    """Phase -1 where all three lamps are lit: an AND with four T, a CZ, the erasure by measurement."""
    c = register_circuit(("lamp", 3), ("work", 1), bits=1)
    and_on_zero(c, 0, 1, 3)
    c.z(3, (2 * 2,))
    erase_and(c, 0, 1, 3, 0)
    return Example("lamp code", revsynth.predicate("lamp == 7", inputs={"lamp": 3}), c.build(), "phase")


def lamp_code_both_ways() -> Example:
    """The same with a unitary way back."""
    c = register_circuit(("lamp", 3), ("work", 1))
    relative_toffoli(c, 0, 1, 3)
    c.z(3, (2 * 2,))
    relative_toffoli(c, 0, 1, 3)
    return Example(
        "lamp code, both ways", revsynth.predicate("lamp == 7", inputs={"lamp": 3}), c.build(), "phase"
    )


def locker_mark() -> Example:
    """mark ^= (locker == 5) on three bits: an AND ladder with a seven-T Toffoli on top, measured erasure."""
    c = register_circuit(("locker", 3), ("mark", 1), ("work", 1), bits=1)
    c.x(1)
    and_on_zero(c, 0, 1, 4)
    toffoli(c, 2, 4, 3)
    erase_and(c, 0, 1, 4, 0)
    c.x(1)
    return Example("locker mark", revsynth.predicate("locker == 5", inputs={"locker": 3}), c.build(), "bit")


def watch_sum() -> Example:
    """total ^= a + b for two one-bit watches."""
    c = register_circuit(("a", 1), ("b", 1), ("total", 2))
    c.cx(0, 2)
    c.cx(1, 2)
    toffoli(c, 0, 1, 3)
    spec = revsynth.outputs({"total": "a + b"}, inputs={"a": 1, "b": 1})
    return Example("watch sum", spec, c.build(), "bit")


def fresh_products() -> Example:
    """both = a b and either = a or b on outputs that start in 0."""
    c = register_circuit(("a", 1), ("b", 1), ("both", 1), ("either", 1))
    and_on_zero(c, 0, 1, 2)
    c.cx(0, 3)
    c.cx(1, 3)
    c.cx(2, 3)
    spec = revsynth.outputs({"both": "a & b", "either": "a | b"}, inputs={"a": 1, "b": 1})
    return Example("fresh products", spec, c.build(), "fresh")


def channel_rotation() -> Example:
    """v + 1 modulo 8 in place, as a cascade."""
    c = register_circuit(("v", 3))
    c.x(2, (0, 2))
    c.x(1, (0,))
    c.x(0)
    return Example("channel rotation", revsynth.permutation([1, 2, 3, 4, 5, 6, 7, 0]), c.build(), "inplace")


def beacon_cascade() -> Example:
    """A phase oracle with controls of both polarities: -1 at 1 and at 6."""
    c = register_circuit(("beacon", 3))
    c.x(1, (2 * 0 + 1,))
    c.z(2, (2 * 0 + 1, 2 * 1 + 1))
    c.z(2, (2 * 0, 2 * 1 + 1))
    c.z(1, (2 * 0,))
    c.z(0)
    c.z(0, (2 * 2,))
    c.z(0, (2 * 1, 2 * 2))
    c.x(1, (2 * 0 + 1,))
    marked = _signs(c.build())
    table = "".join(map(str, marked))
    return Example("beacon cascade", revsynth.truth_table(table, inputs={"beacon": 3}), c.build(), "phase")


def kept_products() -> Example:
    """mark = a b c with the product a b left in keep."""
    c = register_circuit(("a", 1), ("b", 1), ("c", 1), ("mark", 1), ("keep", 1))
    and_on_zero(c, 0, 1, 4)
    and_on_zero(c, 4, 2, 3)
    spec = revsynth.predicate("a == 1 and b == 1 and c == 1", inputs={"a": 1, "b": 1, "c": 1})
    return Example("kept products", spec, c.build(), "compute")


def half_adder() -> Example:
    """a + b on three lines: the sum's low bit in place of b, a left over, the carry on a line preset to 0."""
    c = register_circuit(("line", 3))
    toffoli(c, 0, 1, 2)
    c.cx(0, 1)
    spec = revsynth.outputs({"total": "a + b"}, inputs={"a": 1, "b": 1})
    comments = (
        "line 0: a before, leftover after",
        "line 1: b before, total[0] after",
        "line 2: 0 before, total[1] after",
    )
    return Example("half adder", spec, c.build(), "embedded", comments)


def _signs(circuit: Circuit) -> list[int]:
    """Which inputs of a diagonal cascade get the sign -1, gate by gate."""
    found = []
    for x in range(1 << circuit.qubits):
        state, sign = x, 0
        for op in circuit:
            met = all((state >> (control >> 1) & 1) != control & 1 for control in op.controls)
            if met and op.kind is Kind.X:
                state ^= 1 << op.targets[0]
            elif met:
                sign ^= state >> op.targets[0] & 1
        assert state == x
        found.append(sign)
    return found


EXAMPLES = [
    lamp_code(),
    lamp_code_both_ways(),
    locker_mark(),
    watch_sum(),
    fresh_products(),
    channel_rotation(),
    beacon_cascade(),
    kept_products(),
    half_adder(),
]
