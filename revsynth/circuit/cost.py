"""What a circuit costs: every count is taken from the operations themselves.

Depth is as soon as possible over all qubits: a gate starts when its qubits are free, and a gate under `if`
also not before the measurement whose bit it reads has ended. T depth and Toffoli depth are the longest chains
of such gates on the same graph.
"""

from __future__ import annotations

from dataclasses import asdict, dataclass
from functools import lru_cache
from typing import Any

import numpy as np
from numpy.typing import NDArray

from revsynth.circuit.clifford import Class, classify
from revsynth.circuit.model import ANGLES, Circuit, Kind

COMPILED_FROM = 200_000
"""From this many operations on, compiling the depth pass pays."""


@dataclass(frozen=True)
class Cost:
    """Counts of a circuit.

    work: size of the register `work`; gates: every operation, measurements included; toffoli: X and Z with
    two controls; t: T, its inverse, and phases by odd multiples of pi/4; rotations: other one-qubit gates
    that are not Clifford; other: anything else that is not Clifford; cx, cz: X and Z with one control;
    measured: measurements.
    """

    qubits: int
    work: int
    gates: int
    toffoli: int
    t: int
    rotations: int
    other: int
    cx: int
    cz: int
    depth: int
    t_depth: int
    toffoli_depth: int
    measured: int

    def to_json(self, ands: int | None = None, cascade: int | None = None) -> dict[str, int | None]:
        """The cost object: `ands` and `cascade` describe the plan and are None where only a file is known."""
        counts = asdict(self)
        head = {name: counts.pop(name) for name in ("qubits", "work")}
        return {**head, "ands": ands, "cascade": cascade, **counts}


def measure(circuit: Circuit) -> Cost:
    """Count a circuit; gates under `if` count once."""
    classes = classes_of(circuit)
    count = np.bincount(classes, minlength=len(Class)).tolist()
    depth, t_depth, toffoli_depth = _depths(circuit, classes)
    work = circuit.register("work")
    return Cost(
        qubits=circuit.qubits,
        work=work.size if work else 0,
        gates=len(circuit),
        toffoli=count[Class.TOFFOLI],
        t=count[Class.T],
        rotations=count[Class.ROTATION],
        other=count[Class.OTHER],
        cx=count[Class.CX],
        cz=count[Class.CZ],
        depth=depth,
        t_depth=t_depth,
        toffoli_depth=toffoli_depth,
        measured=int((circuit.kind == Kind.MEASURE).sum()),
    )


def classes_of(circuit: Circuit) -> NDArray[np.uint8]:
    """The `Class` of every operation, uint8, one an operation."""
    operands = np.minimum(np.diff(circuit.offset), 7).astype(np.int64)
    code = circuit.kind.astype(np.int64) * 8 + operands
    table = np.zeros(int(code.max(initial=0)) + 1, dtype=np.uint8)
    for value in np.unique(code).tolist():
        kind = Kind(value // 8)
        if not ANGLES[kind]:
            table[value] = classify(kind, value % 8, ())
    classes: NDArray[np.uint8] = table[code]
    for index, angles in circuit.angles.items():
        classes[index] = _classify_angles(int(circuit.kind[index]), int(operands[index]), angles)
    return classes


@lru_cache(maxsize=4096)
def _classify_angles(kind: int, operands: int, angles: tuple[float, ...]) -> Class:
    return classify(Kind(kind), operands, angles)


def _depths(circuit: Circuit, classes: NDArray[np.uint8]) -> tuple[int, int, int]:
    """(depth, T depth, Toffoli depth)."""
    if not len(circuit):
        return 0, 0, 0
    control = np.ones(len(circuit.operand), dtype=np.int32)
    ends = circuit.offset[1:]
    touches = np.diff(circuit.offset) > 0
    control[ends[touches & (circuit.kind != Kind.GPHASE)] - 1] = 0
    control[ends[circuit.kind == Kind.SWAP] - 2] = 0
    read, read_start = _bits_read(circuit)
    weights = np.zeros((len(circuit), 3), dtype=np.uint8)
    weights[:, 0] = touches
    weights[:, 1] = classes == Class.T
    weights[:, 2] = classes == Class.TOFFOLI
    qubit_level = np.zeros((3, circuit.qubits), dtype=np.int64)
    bit_level = np.zeros((3, max(circuit.bits, 1)), dtype=np.int64)
    flat: tuple[Any, ...] = (circuit.offset, circuit.operand >> control, circuit.condition, circuit.bit)
    arrays = (*flat, read_start, read)
    if len(circuit) >= COMPILED_FROM:
        from revsynth.circuit.kernels import compiled_longest

        longest = compiled_longest()
        found = [longest(*arrays, weights[:, i].copy(), qubit_level[i], bit_level[i]) for i in range(3)]
    else:
        lists: list[Any] = [values.tolist() for values in arrays]
        found = [
            longest_chain(*(*lists, weights[:, i].tolist(), qubit_level[i].tolist(), bit_level[i].tolist()))
            for i in range(3)
            if weights[:, i].any()
        ]
        found = _with_zeros(found, weights)
    return int(found[0]), int(found[1]), int(found[2])


def _with_zeros(found: list[int], weights: NDArray[np.uint8]) -> list[int]:
    """Chains of no gates at all have length 0 and were not looked for."""
    rest = iter(found)
    return [next(rest) if weights[:, i].any() else 0 for i in range(3)]


def _bits_read(circuit: Circuit) -> tuple[NDArray[np.int64], NDArray[np.int64]]:
    """The bits that condition i reads: read[start[i]:start[i+1]]."""
    bits = [sorted({b >> 1 for guard in c for b in guard.bits}) for c in circuit.conditions]
    start = np.zeros(len(bits) + 1, dtype=np.int64)
    np.cumsum([len(found) for found in bits], out=start[1:])
    return np.array([b for found in bits for b in found], dtype=np.int64), start


def longest_chain(
    offset: Any,
    qubit: Any,
    condition: Any,
    bit: Any,
    read_start: Any,
    read: Any,
    weight: Any,
    qubit_level: Any,
    bit_level: Any,
) -> int:
    """The heaviest chain of operations that must follow one another; lists or arrays, plain or compiled.

    qubit_level, bit_level: zeros, one for each qubit and bit; they are changed.
    """
    longest = 0
    for index in range(len(weight)):
        level = 0
        begin, end = offset[index], offset[index + 1]
        for k in range(begin, end):
            here = qubit_level[qubit[k]]
            if here > level:
                level = here
        guard = condition[index]
        if guard >= 0:
            for k in range(read_start[guard], read_start[guard + 1]):
                here = bit_level[read[k]]
                if here > level:
                    level = here
        level += weight[index]
        for k in range(begin, end):
            qubit_level[qubit[k]] = level
        if bit[index] >= 0:
            bit_level[bit[index]] = level
        if level > longest:
            longest = level
    return longest
