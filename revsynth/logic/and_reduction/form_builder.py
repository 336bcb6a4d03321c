"""A network builder that knows every signal as a sum over GF(2) of inputs and ANDs.

Two signals with one sum are one node, however their XORs are bracketed. ANDs are recognised by the plane
that their operands span: of a b, (a + 1) b, a (a + b) and the like, one AND gives all others by XORs, so that
AND and OR, or the minimum and maximum of two bits, share theirs.

A *form* is an integer: bit 0 the constant 1, bit i input i - 1, the bits above the ANDs in order of creation
(*atoms*). Memory grows with gates times atoms, so large networks use the plain builder: see `form_size`.
"""

from __future__ import annotations

from typing import TypeAlias

from revsynth.logic.network import FALSE, TRUE, Literal, Network
from revsynth.logic.network_builder import NetworkBuilder

Form: TypeAlias = int

MOST_BYTES = 100_000_000
"""Forms that would need more memory than this are not kept."""


def fits(network: Network) -> bool:
    """Whether forms of all nodes fit the memory set aside for them."""
    return network.nodes * (network.inputs + network.ands + 1) <= 8 * MOST_BYTES


class FormBuilder(NetworkBuilder):
    """As `NetworkBuilder`; forms[node] is the form of each node.

    shortest: of the three sums in the plane of an AND's operands the two shortest are joined. Where sums are
    rewritten anyway that keeps them short; otherwise it breaks up XORs that are shared.
    """

    def __init__(self, inputs: int, *, shortest: bool = False) -> None:
        super().__init__(inputs)
        self._shortest = shortest
        self.forms: list[Form] = [0, *(1 << i for i in range(1, inputs + 1))]
        self.atoms: list[Literal] = [TRUE, *(2 * i for i in range(1, inputs + 1))]
        self.operands: list[tuple[Form, Form] | None] = [None] * (1 + inputs)
        self._by_form: dict[Form, Literal] = {0: FALSE, **{1 << i: 2 * i for i in range(1, inputs + 1)}}
        self._products: dict[tuple[Form, Form], tuple[Literal, Form]] = {}

    @property
    def products(self) -> list[tuple[Form, Form]]:
        """The forms of the operands of every AND, in order."""
        return [operands for operands in self.operands if operands is not None]

    def form(self, literal: Literal) -> Form:
        """The form of a literal."""
        return self.forms[literal >> 1] ^ (literal & 1)

    def known(self, form: Form) -> Literal | None:
        """The literal that has this form, where there is one."""
        found = self._by_form.get(form & -2)
        return None if found is None else found ^ (form & 1)

    def xor_at_hand(self, a: Literal, b: Literal) -> bool:
        """Whether a XOR b is there already."""
        return (self.form(a) ^ self.form(b)) & -2 in self._by_form

    def xor(self, a: Literal, b: Literal) -> Literal:
        form = self.form(a) ^ self.form(b)
        found = self._by_form.get(form & -2)
        if found is not None:
            return found ^ (form & 1)
        made = super().xor(a, b)
        if made >> 1 == len(self.forms):
            self.forms.append(form ^ (made & 1))
            self._by_form[form & -2] = made ^ (form & 1)
        return made

    def and_(self, a: Literal, b: Literal) -> Literal:
        one, other = self.form(a), self.form(b)
        p, q = one & -2, other & -2
        if not p or not q or p == q:
            if not p:
                return b if one else FALSE
            if not q:
                return a if other else FALSE
            return a if one == other else FALSE
        r = p ^ q
        low, high = (p, q) if p < q else (q, p)
        if r < high:
            low, high = (r, low) if r < low else (low, r)
        sheared = _from_plane(one, other, low)
        found = self._products.get((low, high))
        if found is not None:
            product, correction = found
            return self.xor(product, self._in_plane(correction ^ sheared, a, b))
        simple = self._absorbed(one, other)
        if simple is not None:
            made = simple
        elif self._shortest and r.bit_count() < max(p.bit_count(), q.bit_count()):
            self.and_(self.xor(a, b) & -2, (a if p.bit_count() < q.bit_count() else b) & -2)
            return self.and_(a, b)
        else:
            made = super().and_(a, b)
            if made >> 1 == len(self.forms):
                self._add_atom(made, one, other)
        self._products[low, high] = made, sheared
        return made

    def _add_atom(self, made: Literal, one: Form, other: Form) -> None:
        form = 1 << len(self.atoms)
        self.atoms.append(made)
        self.operands.append((one, other))
        self.forms.append(form)
        self._by_form[form] = made

    def _in_plane(self, form: Form, a: Literal, b: Literal) -> Literal:
        """The literal of a sum of the constant and of a and b."""
        rest = form & -2
        if not rest:
            return FALSE ^ (form & 1)
        for literal in (a, b):
            if self.forms[literal >> 1] & -2 == rest:
                return (literal & -2) ^ ((form ^ self.forms[literal >> 1]) & 1)
        both = self.xor(a, b)
        return both ^ ((form ^ self.form(both)) & 1)

    def _absorbed(self, one: Form, other: Form) -> Literal | None:
        """The product where an operand is an AND of signals that the other operand is made of."""
        for outer, inner in ((one, other), (other, one)):
            top = inner.bit_length() - 1
            operands = self.operands[top]
            if operands is None:
                continue
            p, q = operands
            rest = inner ^ 1 << top
            places = {0: 0, p & -2: 1, q & -2: 2, (p ^ q) & -2: 3}
            mine, theirs = places.get(outer & -2), places.get(rest & -2)
            if mine is None or theirs is None:
                continue
            constant, of_p, of_q, of_both = _two_variable_form(p, q, outer, rest, mine, theirs)
            total: Literal = constant
            for form, taken in ((p, of_p), (q, of_q), (1 << top, of_both)):
                if taken:
                    total = self.xor(total, self.realise(form))
            return total
        return None

    def without(self, literal: Literal, atom: int) -> Literal:
        """The literal less an atom that its form holds, made of what its XORs join on the way to the atom."""
        total: Literal = literal & 1
        node, target = literal >> 1, self.atoms[atom] >> 1
        while node != target:
            gate = self.gate_of(2 * node)
            assert gate is not None
            _, left, right = gate
            if not self.forms[left >> 1] >> atom & 1:
                left, right = right, left
            total = self.xor(total, right)
            node = left >> 1
        return total

    def realise(self, form: Form) -> Literal:
        """A literal with this form, XORed together from atoms where there is none yet."""
        found = self._by_form.get(form & -2)
        if found is not None:
            return found ^ (form & 1)
        total, rest = FALSE, form & -2
        while rest:
            low = rest & -rest
            total = self.xor(total, self.atoms[low.bit_length() - 1])
            rest ^= low
        return total ^ (form & 1)


def _from_plane(one: Form, other: Form, low: Form) -> Form:
    """What to add to low * high to get one * other; low and high are the least two of p, q, p + q."""
    p, q, c, d = one & -2, other & -2, one & 1, other & 1
    form = (q if c else 0) ^ (p if d else 0) ^ (c & d)
    # The product of two of the three is the same up to the operand that both pairs hold.
    third = p ^ q
    if low == p:
        return form if third > q else form ^ p
    if low == q:
        return form if third > p else form ^ q
    return form ^ (p if p < q else q)


def _two_variable_form(
    p: Form, q: Form, outer: Form, rest: Form, mine: int, theirs: int
) -> tuple[int, int, int, int]:
    """outer * (p q + rest) over 1, p, q, p q; `mine`, `theirs`: the sums of p and q in outer and rest."""
    shape = []
    for y in (0, 1):
        for x in (0, 1):
            both = (0, x, y, x ^ y)
            out = both[mine] ^ _constant(outer, p, q, mine)
            inner = (x & y) ^ both[theirs] ^ _constant(rest, p, q, theirs)
            shape.append(out & inner)
    constant = shape[0]
    return constant, shape[1] ^ constant, shape[2] ^ constant, shape[3] ^ shape[2] ^ shape[1] ^ constant


def _constant(form: Form, p: Form, q: Form, place: int) -> int:
    """The constant by which a form differs from the sum of p and q that `place` names."""
    return (form ^ (p if place & 1 else 0) ^ (q if place & 2 else 0)) & 1
