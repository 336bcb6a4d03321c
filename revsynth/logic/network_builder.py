"""Building an AND-XOR network gate by gate: constants folded, equal gates found again.

Besides hashing, rules over two levels are applied that never cost a gate: absorption and contradiction in
ANDs, cancellation in XORs.
"""

from __future__ import annotations

from collections.abc import Callable, Iterable, Sequence

import numpy as np

from revsynth.logic.network import FALSE, TRUE, Literal, Network


class NetworkBuilder:
    """Collects gates over `inputs` inputs; `build` freezes them.

    Literals are plain integers as in `network`; NOT is `literal ^ 1`.
    """

    def __init__(self, inputs: int) -> None:
        self.inputs = inputs
        self._first = 1 + inputs
        self._is_xor: list[bool] = []
        self._left: list[Literal] = []
        self._right: list[Literal] = []
        self._ands: dict[int, Literal] = {}
        self._xors: dict[int, Literal] = {}

    @property
    def gates(self) -> int:
        """Gates so far."""
        return len(self._is_xor)

    @property
    def and_gates(self) -> int:
        """ANDs so far."""
        return len(self._ands)

    def input(self, index: int) -> Literal:
        """The literal of an input."""
        if not 0 <= index < self.inputs:
            raise ValueError(f"input {index} of {self.inputs}")
        return 2 * (index + 1)

    def gate_of(self, literal: Literal) -> tuple[bool, Literal, Literal] | None:
        """(is XOR, left, right) of a literal's node; None for inputs and the constant."""
        gate = (literal >> 1) - self._first
        return None if gate < 0 else (self._is_xor[gate], self._left[gate], self._right[gate])

    def and_(self, a: Literal, b: Literal) -> Literal:
        """a AND b."""
        if a > b:
            a, b = b, a
        if a < 2:
            return b if a else FALSE
        if a == b:
            return a
        if a ^ b == 1:
            return FALSE
        key = a << 32 | b
        found = self._ands.get(key)
        if found is not None:
            return found
        simpler = self._and_of_two_levels(a, b)
        if simpler is None:
            simpler = self._add(False, a, b)
        self._ands[key] = simpler
        return simpler

    def _and_of_two_levels(self, a: Literal, b: Literal) -> Literal | None:
        """A simpler form where one operand is an AND that holds the other one; None where there is none."""
        for outer, inner in ((a, b), (b, a)):
            gate = (inner >> 1) - self._first
            if gate < 0 or self._is_xor[gate]:
                continue
            left, right = self._left[gate], self._right[gate]
            if inner & 1:
                if outer == left:
                    return self.and_(outer, right ^ 1)
                if outer == right:
                    return self.and_(outer, left ^ 1)
                if outer in (left ^ 1, right ^ 1):
                    return outer
            elif outer in (left, right):
                return inner
            elif outer in (left ^ 1, right ^ 1):
                return FALSE
        return None

    def xor(self, a: Literal, b: Literal) -> Literal:
        """a XOR b."""
        flip = (a ^ b) & 1
        a, b = (a, b) if a < b else (b, a)
        a &= -2
        b &= -2
        if a == b:
            return flip
        if a == FALSE:
            return b ^ flip
        key = a << 32 | b
        found = self._xors.get(key)
        if found is None:
            found = self._cancelled(a, b)
            if found is None:
                found = self._add(True, a, b)
            self._xors[key] = found
        return found ^ flip

    def _cancelled(self, a: Literal, b: Literal) -> Literal | None:
        """The other operand where one operand is an XOR that holds the other one."""
        for outer, inner in ((a, b), (b, a)):
            gate = (inner >> 1) - self._first
            if gate >= 0 and self._is_xor[gate]:
                left, right = self._left[gate], self._right[gate]
                if outer == left:
                    return right
                if outer == right:
                    return left
        return None

    def _add(self, is_xor: bool, left: Literal, right: Literal) -> Literal:
        self._is_xor.append(is_xor)
        self._left.append(left)
        self._right.append(right)
        return 2 * (self._first + len(self._is_xor) - 1)

    def or_(self, a: Literal, b: Literal) -> Literal:
        """a OR b."""
        return self.and_(a ^ 1, b ^ 1) ^ 1

    def mux(self, choose: Literal, then: Literal, otherwise: Literal) -> Literal:
        """`then` where `choose` is 1, else `otherwise`: one AND."""
        if otherwise < 2:
            chosen = self.and_(choose, then ^ otherwise)
            return chosen ^ otherwise
        if then < 2:
            return self.and_(choose ^ 1, otherwise ^ then) ^ then
        return self.xor(otherwise, self.and_(choose, self.xor(then, otherwise)))

    def majority(self, a: Literal, b: Literal, c: Literal) -> Literal:
        """1 where at least two of three are: one AND."""
        if c < 2:
            return self.or_(a, b) if c else self.and_(a, b)
        if a < 2:
            return self.or_(b, c) if a else self.and_(b, c)
        if b < 2:
            return self.or_(a, c) if b else self.and_(a, c)
        return self.xor(self.and_(self.xor(a, b), self.xor(a, c)), a)

    def all_of(self, literals: Iterable[Literal]) -> Literal:
        """The AND of any number of literals, as a balanced tree; of none it is 1."""
        return self._tree(sorted(set(literals)), self.and_, TRUE)

    def any_of(self, literals: Iterable[Literal]) -> Literal:
        """The OR of any number of literals; of none it is 0."""
        return self.all_of(literal ^ 1 for literal in literals) ^ 1

    def parity(self, literals: Iterable[Literal]) -> Literal:
        """The XOR of any number of literals; of none it is 0."""
        flip = 0
        odd: dict[Literal, None] = {}
        for literal in literals:
            flip ^= literal & 1
            even = literal & -2
            if even in odd:
                del odd[even]
            elif even:
                odd[even] = None
        return self._tree(sorted(odd), self.xor, FALSE) ^ flip

    @staticmethod
    def _tree(
        literals: list[Literal], join: Callable[[Literal, Literal], Literal], empty: Literal
    ) -> Literal:
        if not literals:
            return empty
        while len(literals) > 1:
            joined = [join(a, b) for a, b in zip(literals[::2], literals[1::2], strict=False)]
            literals = joined + literals[len(literals) & -2 :]
        return literals[0]

    def copy(self, network: Network, inputs: Sequence[Literal]) -> list[Literal]:
        """The outputs of a network on the given literals as its inputs."""
        return self.copy_nodes(network, inputs)[1]

    def copy_nodes(self, network: Network, inputs: Sequence[Literal]) -> tuple[list[Literal], list[Literal]]:
        """(the literal of every node here, those of the outputs)."""
        if len(inputs) != network.inputs:
            raise ValueError(f"{network.inputs} inputs wanted, not {len(inputs)}")
        here = [FALSE, *inputs]
        and_, xor = self.and_, self.xor
        rows = zip(network.is_xor.tolist(), network.left.tolist(), network.right.tolist(), strict=True)
        for is_xor, left, right in rows:
            a, b = here[left >> 1] ^ (left & 1), here[right >> 1] ^ (right & 1)
            here.append(xor(a, b) if is_xor else and_(a, b))
        return here, [here[literal >> 1] ^ (literal & 1) for literal in network.outputs.tolist()]

    def build(self, outputs: Sequence[Literal]) -> Network:
        """The network with these outputs, the least significant bit first; dead gates go."""
        return Network(
            self.inputs,
            np.array(self._is_xor, dtype=np.bool_),
            np.array(self._left, dtype=np.int32),
            np.array(self._right, dtype=np.int32),
            np.array(outputs, dtype=np.int32),
        ).reachable()
