"""Boolean values as nodes: every XOR of the same atoms is one node, every AND of the same two one atom.

A *literal* is 2 * node + complement; node 0 is the constant 0, so FALSE is 0 and TRUE is 1. Atoms are free
variables and ANDs; all other nodes are XORs of two earlier nodes. Nodes with the same atoms are found by a
random signature, linear over GF(2) (fingerprints of XORs: common practice), and what the signature suggests
is proved from the definitions before it counts (`linear_proofs`). Different signatures are different XORs for
certain.
"""

from __future__ import annotations

import random
from collections.abc import Iterable

from revsynth.verification.lifting.linear_proofs import LinearProofs

FALSE = 0
TRUE = 1

CONSTANT, FREE, AND, XOR = range(4)
"""Kinds of node."""

SIGNATURE_BITS = 60
"""Two digits of a Python integer. Longer ones would only make a wrong guess, which is noticed, rarer."""

MOST_RELATIVES = 4
"""How many earlier ANDs with a common operand are looked at to simplify a new one."""

Literal = int


_Known = tuple[tuple[int, ...], tuple[int, ...]]
"""(nodes, product): the XOR of `nodes` times some node is the XOR of the nodes `product`."""


class Parities:
    """The nodes of one lifting, in topological order.

    kind, left, right: by node; the operands of XORs and ANDs are nodes (not literals) with left < right.
    """

    def __init__(self, seed: int = 0) -> None:
        self.kind = bytearray([CONSTANT])
        self.left = [0]
        self.right = [0]
        self._random = random.Random(seed)
        self._signature = [0]
        self._node_of = {0: 0}
        self._sums: dict[int, Literal] = {}
        self._products: dict[int, Literal] = {}
        self._ands_of: dict[int, list[int]] = {}
        self._ands_under: dict[int, list[int]] = {}
        self.third: dict[int, tuple[int, int, Literal]] = {}
        """(p, q, literal of p AND q) by the node p ^ q, for the first product of that kind."""
        self.proofs = LinearProofs(self.kind, self.left, self.right)

    def __len__(self) -> int:
        return len(self.left)

    def free(self) -> Literal:
        """A new free variable."""
        return 2 * self._new(FREE, 0, 0, self._random.getrandbits(SIGNATURE_BITS))

    def _new(self, kind: int, left: int, right: int, signature: int) -> int:
        node = len(self.left)
        self.kind.append(kind)
        self.left.append(left)
        self.right.append(right)
        self._signature.append(signature)
        self._node_of[signature] = node
        return node

    def xor(self, a: Literal, b: Literal) -> Literal:
        """a XOR b."""
        p, q = a >> 1, b >> 1
        if p > q:
            p, q = q, p
        key = p << 32 | q
        found = self._sums.get(key)
        if found is None:
            found = self._sums[key] = 2 * self._sum(p, q)
        return found ^ ((a ^ b) & 1)

    def met(self, a: Literal, b: Literal) -> Literal | None:
        """a XOR b if it is a node already."""
        known = self._signature[a >> 1] ^ self._signature[b >> 1] in self._node_of
        return self.xor(a, b) if known else None

    def _sum(self, p: int, q: int) -> int:
        """The node p XOR q, p <= q."""
        if p == q:
            return 0
        if p == 0:
            return q
        signature = self._signature[p] ^ self._signature[q]
        node = self._node_of.get(signature)
        if node is None:
            return self._new(XOR, p, q, signature)
        self.proofs.claim(p, q, node)
        return node

    def and_(self, a: Literal, b: Literal) -> Literal:
        """a AND b: (p ^ 1) q = pq ^ q, so that complements never reach an atom."""
        found = self._product(a >> 1, b >> 1)
        if b & 1:
            found = self.xor(found, a & ~1)
        if a & 1:
            found = self.xor(found, b & ~1)
        return found ^ (a & b & 1)

    def all_of(self, literals: Iterable[Literal]) -> Literal:
        """The AND of any number of literals, folded from the lowest on."""
        result = TRUE
        for literal in sorted(literals):
            result = literal if result == TRUE else self.and_(result, literal)
            if result == FALSE:
                break
        return result

    def parity(self, literals: Iterable[Literal]) -> Literal:
        """The XOR of any number of literals."""
        result = FALSE
        for literal in literals:
            result = self.xor(result, literal)
        return result

    def _product(self, p: int, q: int) -> Literal:
        if p > q:
            p, q = q, p
        if p == 0:
            return FALSE
        if p == q:
            return 2 * p
        key = p << 32 | q
        found = self._products.get(key)
        if found is None:
            found = self._products[key] = self._new_product(p, q)
        return found

    def _new_product(self, p: int, q: int) -> Literal:
        """Of p, q and p ^ q any two have nearly the same product: only that of the two lowest is an atom."""
        third = self.xor(2 * p, 2 * q) >> 1
        if third < q:
            # q = p ^ third, so pq = p ^ p third.
            return self.xor(2 * p, self._product(p, third))
        found = self._simplified(p, q)
        if found is None:
            found = self._simplified(q, p)
        if found is None:
            found = self._atom(p, q, third)
        self.third.setdefault(third, (p, q, found))
        return found

    def _simplified(self, p: int, q: int) -> Literal | None:
        """The product where q is an AND of p, or an earlier node but for nodes with known products."""
        if self.kind[q] == AND:
            if p in (self.left[q], self.right[q]):
                return 2 * q
            if self.xor(2 * self.left[q], 2 * self.right[q]) == 2 * p:
                return FALSE
        related = self._related(p)
        if not related:
            return None
        signatures = self._signature
        signature, own, node_of = signatures[q], signatures[p], self._node_of
        best, chosen = q, None
        for entry in related:
            rest = signature
            for node in entry[0]:
                rest ^= signatures[node]
            other = node_of.get(rest)
            if other is not None and other < best:
                best, chosen = other, entry
            other = node_of.get(rest ^ own)
            if other is not None and other < best:
                best, chosen = other, ((*entry[0], p), (*entry[1], p))
        if chosen is None:
            return None
        self.proofs.claim_zero((q, best, *chosen[0]))
        known = self.parity(2 * node for node in chosen[1])
        return self.xor(self._product(p, best), known)

    def _atom(self, p: int, q: int, third: int) -> Literal:
        node = self._new(AND, p, q, self._random.getrandbits(SIGNATURE_BITS))
        for operand in (p, q):
            self._ands_of.setdefault(operand, []).append(node)
        self._ands_under.setdefault(third, []).append(node)
        return 2 * node

    def _related(self, p: int) -> list[_Known]:
        """Known products of p: with nodes of ANDs that p is an operand of, the XOR of the operands, or it."""
        found: list[_Known] = []
        for node in self._ands_of.get(p, ())[-MOST_RELATIVES:]:
            other = self.left[node] ^ self.right[node] ^ p
            found += [((other,), (node,)), ((node,), (node,)), ((other, node), ())]
        for node in self._ands_under.get(p, ())[-MOST_RELATIVES:]:
            one = self.left[node]
            found += [((one,), (one, node)), ((node,), ()), ((one, node), (one, node))]
        if self.kind[p] == AND:
            one, other = self.left[p], self.right[p]
            found += [((one,), (p,)), ((other,), (p,)), ((one, other), ())]
        return found
