"""The nodes that some literals rest on, with what they give for given inputs."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
from numpy.typing import NDArray

from revsynth.verification.lifting.graph import Graph
from revsynth.verification.lifting.parities import AND, XOR, Literal, Parities

Words = NDArray[np.uint64]


class Cone:
    """The ANDs and XORs under some literals of a `Parities`, ascending, over all free `variables`."""

    def __init__(self, parities: Parities, variables: Sequence[Literal], literals: Sequence[Literal]) -> None:
        kind, left, right = parities.kind, parities.left, parities.right
        seen: set[int] = set()
        stack = [literal >> 1 for literal in literals]
        while stack:
            node = stack.pop()
            if node not in seen and kind[node] in (AND, XOR):
                seen.add(node)
                stack += (left[node], right[node])
        self.variables = [literal >> 1 for literal in variables]
        self.gates = sorted(seen)
        self._kind = kind
        self._row = {0: 0} | {node: place for place, node in enumerate((*self.variables, *self.gates), 1)}
        self._graph = Graph(
            inputs=len(self.variables),
            is_xor=np.array([kind[node] == XOR for node in self.gates], dtype=np.bool_),
            left=np.array([2 * self._row[left[node]] for node in self.gates], dtype=np.int32),
            right=np.array([2 * self._row[right[node]] for node in self.gates], dtype=np.int32),
            outputs=np.zeros(0, dtype=np.int32),
        )

    def __len__(self) -> int:
        return len(self.gates)

    def is_xor(self, node: int) -> bool:
        """Whether a gate is a XOR; the others are ANDs."""
        return self._kind[node] == XOR

    def rows(self, inputs: Words) -> Words:
        """Values of constant, variables and gates, in this order: uint64 (1 + variables + gates, words)."""
        return self._graph.simulate_nodes(inputs, np.arange(self._graph.nodes))

    def row(self, node: int) -> int:
        """Where a node's values are in `rows`."""
        return self._row[node]

    def values(self, literals: Sequence[Literal], inputs: Words) -> Words:
        """Values of literals of the cone, uint64 (literals, words)."""
        nodes = np.array([self._row[literal >> 1] for literal in literals], dtype=np.intp)
        found = self._graph.simulate_nodes(inputs, nodes)
        flips = np.array([literal & 1 for literal in literals], dtype=np.uint64)
        found ^= np.uint64(0) - flips[:, None]
        return found
