"""Networks of ANDs and XORs with complemented edges: functions too wide for a truth table.

A *literal* is `2 * node + 1` for the complement of a node, `2 * node` for the node itself. Node 0 is the
constant 0, nodes 1 ... inputs are the inputs (bit i of the combined index is node i + 1), the gates follow in
topological order. Normal form: the operands of an XOR are not complemented (the complement moves to its
literal), those of an AND may be; the smaller literal stands left.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from functools import cached_property
from typing import TypeAlias

import numpy as np
from numpy.typing import NDArray

Literal: TypeAlias = int
Node: TypeAlias = int

FALSE: Literal = 0
TRUE: Literal = 1


@dataclass(frozen=True, eq=False)
class Network:
    """A network in flat arrays.

    is_xor: bool (g,), False for an AND; left, right: int32 (g,), operand literals; outputs: int32 (m,),
    literals, the least significant output bit first. Gate i is node `inputs + 1 + i`.
    """

    inputs: int
    is_xor: NDArray[np.bool_]
    left: NDArray[np.int32]
    right: NDArray[np.int32]
    outputs: NDArray[np.int32]

    @property
    def gates(self) -> int:
        """Number of ANDs and XORs."""
        return len(self.is_xor)

    @property
    def nodes(self) -> int:
        """Number of nodes, the constant and the inputs included."""
        return 1 + self.inputs + len(self.is_xor)

    @cached_property
    def ands(self) -> int:
        """Number of ANDs."""
        return int(np.count_nonzero(~self.is_xor))

    @property
    def xors(self) -> int:
        """Number of XORs."""
        return self.gates - self.ands

    def __eq__(self, other: object) -> bool:
        if not isinstance(other, Network):
            return NotImplemented
        return self.inputs == other.inputs and all(
            np.array_equal(getattr(self, name), getattr(other, name))
            for name in ("is_xor", "left", "right", "outputs")
        )

    __hash__ = None  # type: ignore[assignment]

    def __repr__(self) -> str:
        return (
            f"<Network of {self.ands} ANDs and {self.xors} XORs, {self.inputs} inputs, "
            f"{len(self.outputs)} outputs>"
        )

    def used(self) -> NDArray[np.bool_]:
        """bool (nodes,): what the outputs depend on by structure, inputs included; the constant never."""
        used = np.zeros(self.nodes, dtype=np.bool_)
        used[self.outputs >> 1] = True
        first = 1 + self.inputs
        left, right = (self.left >> 1).tolist(), (self.right >> 1).tolist()
        marks = used.tolist()
        for gate in range(self.gates - 1, -1, -1):
            if marks[first + gate]:
                marks[left[gate]] = marks[right[gate]] = True
        marks[0] = False
        return np.array(marks, dtype=np.bool_)

    def reachable(self) -> Network:
        """The same outputs without gates that none of them needs; all inputs stay."""
        kept = self.used()
        kept[: 1 + self.inputs] = True
        if kept.all():
            return self
        number = np.cumsum(kept, dtype=np.int32) - 1
        gates = kept[1 + self.inputs :]

        def moved(literals: NDArray[np.int32]) -> NDArray[np.int32]:
            place: NDArray[np.int32] = 2 * number[literals >> 1] + (literals & 1)
            return place

        return Network(
            self.inputs,
            self.is_xor[gates],
            moved(self.left[gates]),
            moved(self.right[gates]),
            moved(self.outputs),
        )

    def select(self, outputs: Sequence[int]) -> Network:
        """The network of some of the outputs, by number, in the order given; without dead gates."""
        chosen = self.outputs[list(outputs)]
        return Network(self.inputs, self.is_xor, self.left, self.right, chosen).reachable()

    def and_depth(self) -> NDArray[np.int32]:
        """int32 (nodes,): most ANDs on a path from an input to each node, its own included."""
        depth = [0] * self.nodes
        first = 1 + self.inputs
        rows = zip(self.is_xor.tolist(), (self.left >> 1).tolist(), (self.right >> 1).tolist(), strict=True)
        for gate, (is_xor, left, right) in enumerate(rows):
            depth[first + gate] = max(depth[left], depth[right]) + (not is_xor)
        return np.array(depth, dtype=np.int32)


def evaluate(network: Network, bits: Sequence[int]) -> list[int]:
    """The output bits for one input; bits[i] is 0 or 1 for input i. Plain Python, for reference."""
    values = [0, *bits]
    if len(values) != 1 + network.inputs:
        raise ValueError(f"{network.inputs} input bits wanted, not {len(bits)}")
    rows = zip(network.is_xor.tolist(), network.left.tolist(), network.right.tolist(), strict=True)
    for is_xor, left, right in rows:
        one, other = values[left >> 1] ^ (left & 1), values[right >> 1] ^ (right & 1)
        values.append(one ^ other if is_xor else one & other)
    return [values[literal >> 1] ^ (literal & 1) for literal in network.outputs.tolist()]
