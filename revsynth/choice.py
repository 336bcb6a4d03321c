"""Comparing what the methods gave: one cost, one order for each aim, settled here for all methods.

Circuits are compared by the cost of what would be written; cascades too large to lower one and all are
ranked by the estimate of `cascade.price` first.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

import numpy as np

from revsynth.cascade.line_values import LineValues
from revsynth.cascade.model import PHASE
from revsynth.cascade.price import held_t
from revsynth.circuit.cost import Cost, measure
from revsynth.circuit.model import Circuit
from revsynth.options import Aim, BuildOptions, Oracle
from revsynth.synthesis.interface import Block, known_lines


def by_name(method: str) -> dict[str, str]:
    """`products, fewest T` as JSON has it: the method's name alone, and the variant."""
    name, _, variant = method.partition(", ")
    return {"method": name} | ({"variant": variant} if variant else {})


@dataclass(frozen=True)
class Trial:
    """What one method (or variant) gave, for the JSON key `tried`."""

    method: str
    t: int | None = None
    qubits: int | None = None
    gates: int | None = None
    depth: int | None = None
    estimated: bool = False
    failed: str | None = None

    @classmethod
    def of(cls, candidate: Candidate) -> Trial:
        """The record of a lowered candidate."""
        cost = candidate.cost
        return cls(candidate.block.method, cost.t, cost.qubits, cost.gates, cost.depth)

    def to_json(self) -> dict[str, Any]:
        """Only what is known."""
        known = {
            **by_name(self.method),
            "t": self.t,
            "qubits": self.qubits,
            "gates": self.gates,
            "depth": self.depth,
            "failed": self.failed,
        }
        found: dict[str, Any] = {key: value for key, value in known.items() if value is not None}
        return found | ({"estimated": True} if self.estimated else {})


@dataclass(frozen=True)
class Candidate:
    """A block, the circuit it became, what that circuit costs, and the T gates that were planned."""

    block: Block
    circuit: Circuit
    cost: Cost
    planned: int

    @classmethod
    def of(cls, block: Block, circuit: Circuit, planned: int) -> Candidate:
        """Measure the circuit."""
        return cls(block, circuit, measure(circuit), planned)


def and_count(block: Block, oracle: Oracle) -> int:
    """ANDs of the plan: k - 1 for a NOT with k >= 2 controls or a phase on k >= 2 literals.

    A product that brings a line back to 0 is an erasure and not counted.
    """
    cascade = block.cascade
    controls = np.diff(cascade.offset)
    total = int(np.maximum(controls - 1, 0).sum())
    known = known_lines(block, oracle)
    if not known:
        return total
    state = LineValues.start(cascade.lines, known)
    for gate in cascade:
        if gate.target == PHASE:
            continue
        started_in_zero = state.is_zero(gate.target)
        state.apply(gate.controls, (gate.target,))
        if len(gate.controls) >= 2 and not started_in_zero and state.is_zero(gate.target):
            total -= len(gate.controls) - 1
    return total


def planned_t(block: Block, oracle: Oracle, options: BuildOptions) -> int:
    """The estimate of a block's T gates before it is lowered."""
    return held_t(block.cascade, known_lines(block, oracle), options.uncompute)


def estimate(block: Block, t: int, options: BuildOptions) -> tuple[int, ...]:
    """The sort key of a block with that many planned T gates before lowering, cheapest first."""
    cascade = block.cascade
    keys: dict[Aim, tuple[int, ...]] = {
        "t": (t, len(cascade), cascade.lines),
        "qubits": (cascade.lines, t, len(cascade)),
        "depth": (t, len(cascade), cascade.lines),
        "gates": (len(cascade), t, cascade.lines),
    }
    return keys[options.aim]


def hopeless(t: int, candidates: list[Candidate], options: BuildOptions) -> bool:
    """Whether lowering a block cannot pay: its planned T gates are over twice what is at hand.

    Sharing products saves a third of the estimate at most on what was measured, so half is a safe margin.
    """
    if options.aim != "t":
        return False
    return all(t > 2 * _t(candidate, options) + 20 for candidate in candidates)


def cheapest(candidates: list[Candidate], options: BuildOptions) -> Candidate:
    """The first of the cheapest for the aim."""
    return min(candidates, key=lambda candidate: _key(candidate, options))


def _t(candidate: Candidate, options: BuildOptions) -> int:
    """T gates, those that Toffolis and whole cascade gates will take included."""
    if options.gates == "cascade":
        return candidate.planned
    return candidate.cost.t + candidate.cost.toffoli * (4 if options.uncompute == "measured" else 7)


def _key(candidate: Candidate, options: BuildOptions) -> tuple[int, ...]:
    cost = candidate.cost
    t = _t(candidate, options)
    two_qubit = cost.cx + cost.cz
    keys: dict[Aim, tuple[int, ...]] = {
        "t": (t, cost.qubits, two_qubit, cost.gates, cost.depth),
        "qubits": (cost.qubits, t, two_qubit, cost.gates, cost.depth),
        "depth": (cost.depth, t, cost.qubits, two_qubit, cost.gates),
        "gates": (cost.gates, t, cost.qubits, two_qubit, cost.depth),
    }
    return keys[options.aim]


def within(candidate: Candidate, options: BuildOptions) -> str | None:
    """Why the candidate misses a budget, or None where it keeps them all."""
    cost = candidate.cost
    for name, used, allowed in (
        ("qubits", cost.qubits, options.qubits),
        ("T gates", cost.t, options.t),
        ("layers of depth", cost.depth, options.depth),
    ):
        if allowed is not None and used > allowed:
            return f"needs {used} {name}, {allowed} allowed"
    return None
