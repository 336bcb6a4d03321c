"""An order of the steps that keeps few superpositions and few undecided measurements open at once.

A circuit squeezed for depth does many things side by side; simulated in that order it would hold the product
of all their branches. Steps that commute may be exchanged: two steps commute where every qubit they share is
used by both as a control or phase ("along Z"), or by both as the target of a NOT ("along X"; common
practice). So the steps are taken up again by what they are for: each closing Hadamard, and each
measurement with the steps that read its bit, pulls in what it depends on and nothing else.
"""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
from numpy.typing import NDArray

from revsynth.circuit.model import Condition
from revsynth.verification.steps import FLIP, HADAMARD, MEASURE, RESET, Step

_ALONG_Z = 0
_ALONG_X = 1
_OTHER = 2


def close_early(steps: Sequence[Step], qubits: int, conditions: Sequence[Condition]) -> list[Step]:
    """The same steps in an order with the same meaning, superpositions closed as early as possible."""
    every = list(steps)
    return [every[index] for index in early_order(every, qubits, conditions).tolist()]


def early_order(steps: Sequence[Step], qubits: int, conditions: Sequence[Condition]) -> NDArray[np.int64]:
    """The indices of the steps in that order."""
    steps = list(steps)
    nodes = _dependencies(steps, qubits, conditions)
    readers = _readers(steps, conditions)
    order: list[int] = []
    done = bytearray(len(nodes))
    for index in _events(steps, qubits):
        for wanted in (index, *readers.get(index, ())):
            _run(wanted, nodes, done, len(steps), order)
    for index in range(len(steps)):
        _run(index, nodes, done, len(steps), order)
    return np.array(order, dtype=np.int64)


def bits_read(step: Step, conditions: Sequence[Condition]) -> list[int]:
    """The classical bits that a step's condition reads."""
    if step.condition < 0:
        return []
    return [literal >> 1 for guard in conditions[step.condition] for literal in guard.bits]


class _Wire:
    """The last uses of a qubit or bit: a running group of uses that commute, and what came before it."""

    __slots__ = ("before", "kind", "members")

    def __init__(self) -> None:
        self.kind = _OTHER
        self.members: list[int] = []
        self.before = -1

    def use(self, node: int, kind: int, nodes: list[list[int]]) -> None:
        """Add a use; where it does not commute with the group, all of the group comes first."""
        if self.members and (kind != self.kind or kind == _OTHER):
            self.before = len(nodes)
            nodes.append(self.members)
            self.members = []
        self.kind = kind
        self.members.append(node)
        if self.before >= 0:
            nodes[node].append(self.before)


def _dependencies(steps: Sequence[Step], qubits: int, conditions: Sequence[Condition]) -> list[list[int]]:
    """What each step needs done first; numbers from len(steps) on stand for whole groups of steps."""
    nodes: list[list[int]] = [[] for _ in steps]
    wires = [_Wire() for _ in range(qubits)]
    bits: dict[int, _Wire] = {}
    for index, step in enumerate(steps):
        for literal in step.literals:
            wires[literal >> 1].use(index, _ALONG_Z, nodes)
        if step.target >= 0:
            wires[step.target].use(index, _ALONG_X if step.act == FLIP else _OTHER, nodes)
        for bit in bits_read(step, conditions):
            if step.act != MEASURE or bit != step.bit:
                bits.setdefault(bit, _Wire()).use(index, _ALONG_Z, nodes)
        if step.act == MEASURE:
            bits.setdefault(step.bit, _Wire()).use(index, _OTHER, nodes)
    return nodes


def _readers(steps: Sequence[Step], conditions: Sequence[Condition]) -> dict[int, list[int]]:
    """For each measurement, the steps that read its outcome."""
    latest: dict[int, int] = {}
    readers: dict[int, list[int]] = {}
    for index, step in enumerate(steps):
        for bit in bits_read(step, conditions):
            if bit in latest:
                readers.setdefault(latest[bit], []).append(index)
        if step.act == MEASURE:
            latest[step.bit] = index
    return readers


def _events(steps: Sequence[Step], qubits: int) -> list[int]:
    """Measurements, resets, and every second Hadamard on a qubit since it was last a basis state."""
    open_qubits = bytearray(qubits)
    events = []
    for index, step in enumerate(steps):
        if step.act in (MEASURE, RESET):
            open_qubits[step.target] = 0
            events.append(index)
        elif step.act == HADAMARD:
            open_qubits[step.target] ^= 1
            if not open_qubits[step.target]:
                events.append(index)
    return events


def _run(wanted: int, nodes: list[list[int]], done: bytearray, steps: int, order: list[int]) -> None:
    """Append a step after everything it still needs, in the order of the circuit where that is free."""
    stack = [wanted]
    while stack:
        node = stack[-1]
        if done[node]:
            stack.pop()
            continue
        missing = [need for need in nodes[node] if not done[need]]
        if missing:
            stack.extend(sorted(missing, reverse=True))
            continue
        stack.pop()
        done[node] = 1
        if node < steps:
            order.append(node)
