"""Proofs that two XORs have the same atoms, from their definitions alone.

A claim p ^ q = r between nodes is proved at once where replacing the latest node by its definition, over and
over, soon leaves nothing. Longer ones wait, and are proved all together by computing the set of atoms of
every node involved, so many atoms at a time.
"""

from __future__ import annotations

from collections.abc import Iterable
from heapq import heapify, heappop, heappush

MOST_REPLACEMENTS = 400
"""A claim that takes more is put off."""

MOST_BITS = 1 << 30
"""Sets of atoms are Python integers of at most 2**13 bits, and of fewer where there are many nodes."""

_XOR = 3


class GuessError(Exception):
    """Two different XORs have the same signature: the lifting must start again with other signatures."""


class LinearProofs:
    """Claims about the nodes of one `Parities`, whose lists it reads."""

    def __init__(self, kind: bytearray, left: list[int], right: list[int]) -> None:
        self._kind = kind
        self._left = left
        self._right = right
        self.waiting: list[tuple[int, ...]] = []

    def claim(self, p: int, q: int, r: int) -> None:
        """Prove p ^ q = r, p < q, now or in `finish`. Raises GuessError where it is false."""
        if r > q:
            if self._left[r] == p and self._right[r] == q and self._kind[r] == _XOR:
                return
        elif self._kind[q] == _XOR:
            left, right = self._left[q], self._right[q]
            if (left == p and right == r) or (left == r and right == p):
                return
        self.claim_zero((p, q, r))

    def claim_zero(self, nodes: Iterable[int]) -> None:
        """Prove that the XOR of the nodes is 0, now or in `finish`."""
        nodes = tuple(nodes)
        proved = self._replace(nodes)
        if proved is None:
            self.waiting.append(nodes)
        elif not proved:
            raise GuessError

    def _replace(self, nodes: tuple[int, ...]) -> bool | None:
        """True: nothing is left; False: an atom is left, which no earlier node can hold; None: too long."""
        kind, left, right = self._kind, self._left, self._right
        heap = [-node for node in nodes if node]
        heapify(heap)
        for _ in range(MOST_REPLACEMENTS):
            if not heap:
                return True
            node = -heappop(heap)
            if heap and heap[0] == -node:
                heappop(heap)
            elif kind[node] == _XOR:
                heappush(heap, -left[node])
                heappush(heap, -right[node])
            else:
                return False
        return None

    def finish(self) -> None:
        """Prove all that was put off. Raises GuessError where a claim is false."""
        if not self.waiting:
            return
        sums, atoms = self._below([node for claim in self.waiting for node in claim])
        held: dict[int, int] = dict.fromkeys(atoms, 0)
        held[0] = 0
        left, right = self._left, self._right
        at_a_time = max(128, min(1 << 13, MOST_BITS // (len(sums) + 1)))
        for begin in range(0, len(atoms), at_a_time):
            block = atoms[begin : begin + at_a_time]
            for place, atom in enumerate(block):
                held[atom] = 1 << place
            for node in sums:
                held[node] = held[left[node]] ^ held[right[node]]
            for claim in self.waiting:
                total = 0
                for node in claim:
                    total ^= held[node]
                if total:
                    raise GuessError
            for atom in block:
                held[atom] = 0
        self.waiting.clear()

    def _below(self, nodes: Iterable[int]) -> tuple[list[int], list[int]]:
        """The XORs and the atoms under the nodes, ascending."""
        seen: set[int] = set()
        stack = list(nodes)
        sums: list[int] = []
        atoms: list[int] = []
        while stack:
            node = stack.pop()
            if node in seen or node == 0:
                continue
            seen.add(node)
            if self._kind[node] == _XOR:
                sums.append(node)
                stack.append(self._left[node])
                stack.append(self._right[node])
            else:
                atoms.append(node)
        return sorted(sums), sorted(atoms)

    def atoms_of(self, nodes: Iterable[int]) -> dict[int, int]:
        """For every node the set of its atoms, as the bits of an integer: the same numbering for all."""
        wanted = list(nodes)
        sums, atoms = self._below(wanted)
        held = {atom: 1 << place for place, atom in enumerate(atoms)}
        held[0] = 0
        for node in sums:
            held[node] = held[self._left[node]] ^ held[self._right[node]]
        return {node: held[node] for node in wanted}
