"""An AND-XOR graph as flat arrays: what a lifted circuit computes, for simulation and for solvers."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import NDArray

if TYPE_CHECKING:
    from revsynth.verification.lifting.parities import Parities

WORDS_AT_A_TIME = 64
COMPILED_FROM = 1 << 22
"""From this many node-words on, compiling pays."""


@dataclass(frozen=True)
class Graph:
    """Node 0 is the constant 0, nodes 1 ... inputs are the inputs, gates follow, operands first.

    is_xor: bool (g,), an AND where it is False; left, right: int32 (g,), outputs: int32 (m,): literals, 2 *
    node + complement. Gates read no complements: only outputs have them.
    """

    inputs: int
    is_xor: NDArray[np.bool_]
    left: NDArray[np.int32]
    right: NDArray[np.int32]
    outputs: NDArray[np.int32]

    def __len__(self) -> int:
        return len(self.is_xor)

    @property
    def nodes(self) -> int:
        """The constant, the inputs and the gates."""
        return 1 + self.inputs + len(self.is_xor)

    @property
    def ands(self) -> int:
        """Number of ANDs."""
        return int(len(self.is_xor) - self.is_xor.sum())

    @staticmethod
    def below(parities: Parities, variables: Sequence[int], literals: Sequence[int]) -> Graph:
        """The nodes that some literals depend on, with input i the free literal `variables[i]`.

        Raises ValueError where they depend on a free variable that is not among them.
        """
        from revsynth.verification.lifting.parities import AND, XOR

        kind, left, right = parities.kind, parities.left, parities.right
        number = {0: 0} | {variable >> 1: place for place, variable in enumerate(variables, 1)}
        needed: set[int] = set()
        stack = [literal >> 1 for literal in literals]
        while stack:
            node = stack.pop()
            if node in needed or node in number:
                continue
            if kind[node] not in (AND, XOR):
                raise ValueError("a literal depends on a free variable that is no input")
            needed.add(node)
            stack.append(left[node])
            stack.append(right[node])
        gates = sorted(needed)
        for place, node in enumerate(gates, len(variables) + 1):
            number[node] = place
        return Graph(
            inputs=len(variables),
            is_xor=np.array([kind[node] == XOR for node in gates], dtype=np.bool_),
            left=np.array([2 * number[left[node]] for node in gates], dtype=np.int32),
            right=np.array([2 * number[right[node]] for node in gates], dtype=np.int32),
            outputs=np.array(
                [2 * number[literal >> 1] | (literal & 1) for literal in literals], dtype=np.int32
            ),
        )

    def support(self) -> list[int]:
        """The inputs (from 0) that the outputs depend on by structure, ascending."""
        used = np.zeros(self.nodes, dtype=np.bool_)
        used[self.outputs >> 1] = True
        left, right = (self.left >> 1).tolist(), (self.right >> 1).tolist()
        flags = used.tolist()
        for gate in range(len(self) - 1, -1, -1):
            if flags[gate + 1 + self.inputs]:
                flags[left[gate]] = flags[right[gate]] = True
        return [place for place in range(self.inputs) if flags[place + 1]]

    def simulate(self, inputs: NDArray[np.uint64]) -> NDArray[np.uint64]:
        """Outputs, uint64 (outputs, words), for inputs, uint64 (inputs, words): 64 cases a word.

        Raises ValueError for another shape or type.
        """
        values = self.simulate_nodes(inputs, self.outputs >> 1)
        values[(self.outputs & 1).astype(np.bool_)] ^= np.uint64(0xFFFFFFFFFFFFFFFF)
        return values

    def simulate_nodes(self, inputs: NDArray[np.uint64], nodes: NDArray[np.integer]) -> NDArray[np.uint64]:
        """Values of the given nodes, uint64 (nodes, words), in blocks of 64 words."""
        if inputs.dtype != np.uint64 or inputs.ndim != 2 or len(inputs) != self.inputs:
            raise ValueError(
                f"inputs must be uint64 of shape ({self.inputs}, words), not {inputs.dtype} {inputs.shape}"
            )
        words = inputs.shape[1]
        found = np.empty((len(nodes), words), dtype=np.uint64)
        compiled = len(self) * words >= COMPILED_FROM
        for begin in range(0, words, WORDS_AT_A_TIME):
            block = inputs[:, begin : begin + WORDS_AT_A_TIME]
            values = np.zeros((self.nodes, block.shape[1]), dtype=np.uint64)
            values[1 : 1 + self.inputs] = block
            self._fill(values, compiled)
            found[:, begin : begin + WORDS_AT_A_TIME] = values[nodes]
        return found

    def _fill(self, values: NDArray[np.uint64], compiled: bool) -> None:
        if compiled:
            from revsynth.verification.lifting.kernels import compiled_fill

            compiled_fill()(self.is_xor, self.left, self.right, self.inputs + 1, values)
            return
        gates = zip(self.is_xor.tolist(), (self.left >> 1).tolist(), (self.right >> 1).tolist(), strict=True)
        rows = list(values)
        for place, (is_xor, left, right) in enumerate(gates, self.inputs + 1):
            (np.bitwise_xor if is_xor else np.bitwise_and)(rows[left], rows[right], out=rows[place])

    def clauses(self) -> list[list[int]]:
        """The gates as clauses (Tseitin): node k is variable k + 1, a negative number its complement."""
        found = [[-1]]
        gates = zip(self.is_xor.tolist(), (self.left >> 1).tolist(), (self.right >> 1).tolist(), strict=True)
        for place, (is_xor, left, right) in enumerate(gates, self.inputs + 2):
            a, b = left + 1, right + 1
            if is_xor:
                found += [[-place, a, b], [-place, -a, -b], [place, -a, b], [place, a, -b]]
            else:
                found += [[-place, a], [-place, b], [place, -a, -b]]
        return found

    def variable(self, output: int) -> int:
        """The literal of an output in `clauses`."""
        literal = int(self.outputs[output])
        variable = (literal >> 1) + 1
        return -variable if literal & 1 else variable
