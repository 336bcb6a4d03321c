"""The phases that contain one path variable y, worked out over the few parities that they hold.

A phase c (y ^ s), in eighths of a turn, is c s + c (1 - 2s) y. Over all values of the parities s the sum of
the c (1 - 2s) must be a constant plus 4 Q with Q Boolean: then y meets other signs linearly and may be summed
away (the rules HH and omega of Amy, "Towards large-scale functional verification of universal quantum
circuits", QPL 2018, on Boolean functions instead of polynomials).
"""

from __future__ import annotations

from revsynth.verification.lifting.parities import FALSE, TRUE, Literal, Parities
from revsynth.verification.lifting.quadratic import (
    Plane,
    Product,
    Shape,
    absorbed,
    alternating,
    any_plane,
    peeled,
    rank,
    rest_beside,
    solve,
)
from revsynth.verification.lifting.residue import sign_of

MOST_PARITIES = 7
"""Independent parities beside y: 2**7 cases are gone through."""


class Local:
    """Phases c (y ^ s), the s given by node, over a basis of their differences.

    basis: literals, bit i of a mask is basis[i]. If `first` is set, bit 0 is the parity that all s have in
    common beside differences; it is the only one that may hold other path variables. shape: None where there
    are too many parities or no Q.
    """

    def __init__(self, parities: Parities, phases: dict[int, int]) -> None:
        self.parities = parities
        items = sorted(phases.items())
        origin = items[0][0]
        span = {0: 0}
        self.basis: list[Literal] = []
        self.shape: Shape | None = None
        masks = [0]
        for node, _ in items[1:]:
            difference = parities.xor(2 * origin, 2 * node)
            mask = span.get(difference)
            if mask is None:
                if len(self.basis) == MOST_PARITIES:
                    return
                mask = 1 << len(self.basis)
                self.basis.append(difference)
                span |= {parities.xor(known, difference): old | mask for known, old in span.items()}
            masks.append(mask)
        common = span.get(2 * origin)
        self.first = common is None
        if common is None:
            self.basis.insert(0, 2 * origin)
            masks = [mask << 1 | 1 for mask in masks]
        else:
            masks = [mask ^ common for mask in masks]
        self._span = span
        terms = tuple((mask, c) for mask, (_, c) in zip(masks, items, strict=True))
        self.shape = solve(terms, len(self.basis))

    def mask_of(self, literal: Literal) -> int | None:
        """The basis elements whose XOR is a literal but for its complement; None if there are none."""
        node = literal & ~1
        mask = self._span.get(node)
        if not self.first:
            return mask
        if mask is not None:
            return mask << 1
        shifted = self.parities.met(node, self.basis[0])
        mask = None if shifted is None else self._span.get(shifted)
        return None if mask is None else mask << 1 | 1

    def held(self, literal: Literal) -> tuple[Plane, int] | None:
        """A literal, but for its complement, as a product of two parities XOR a parity; None if it is not."""
        mask = self.mask_of(literal)
        if mask is not None:
            return (0, 0), mask
        for known, plane in self._known_products():
            linear = self.parities.met(literal & ~1, known)
            mask = None if linear is None else self.mask_of(linear)
            if mask is not None:
                return plane, mask
        return None

    def _known_products(self) -> list[tuple[Literal, Plane]]:
        """Products met before whose operands are sums of basis elements without the first one."""
        shift = 1 if self.first else 0
        found = []
        for both in self._span:
            entry = self.parities.third.get(both >> 1)
            if entry is not None and 2 * entry[0] in self._span and 2 * entry[1] in self._span:
                plane = (self._span[2 * entry[0]] << shift, self._span[2 * entry[1]] << shift)
                found.append((entry[2], plane))
        return found

    def element(self, mask: int) -> Literal:
        """The literal of an XOR of basis elements."""
        return self.parities.parity(self.basis[i] for i in range(mask.bit_length()) if mask >> i & 1)

    def product(self, mask: int) -> Literal:
        """The literal of a product of basis elements."""
        if mask & (mask - 1) == 0:
            return self.basis[mask.bit_length() - 1] if mask else TRUE
        return self.parities.all_of(self.basis[i] for i in range(mask.bit_length()) if mask >> i & 1)

    def planes(self, before: Literal) -> tuple[Plane, ...]:
        """The products of two in Q as few products of parities, those met before if possible.

        before: what the qubit held before its first Hadamard. If that is a product, but for a parity, it
        comes first: it is being erased, and Q may join it with another that is being written.
        """
        assert self.shape is not None
        rows = alternating(self.shape.quotient)
        found: list[Plane] = []
        held = self.held(before)
        if held and held[0] != (0, 0) and any(rows):
            found.append(held[0])
            rows = peeled(rows, held[0])
        while any(rows):
            plane = any_plane(rows)
            if rank(rows) > 2:
                plane = self._known_plane(rows) or plane
            found.append(plane)
            rows = peeled(rows, plane)
        return tuple(found)

    def _known_plane(self, rows: tuple[int, ...]) -> Plane | None:
        """A product met before that lowers the rank, best one that leaves another such."""
        before = rank(rows)
        found: list[tuple[bool, int, Plane]] = []
        known = self._known_products()
        for literal, plane in known:
            left = peeled(rows, plane)
            if rank(left) < before:
                again = any(rank(peeled(left, other)) < before - 2 for _, other in known)
                found.append((again, literal, plane))
        return max(found)[2] if found else None


class Slope:
    """The coefficient of y in phases c (y ^ s): constant + 4 Q with the literal `quotient`, if it is that.

    Through `local` where the parities are few, else as what is left at the end of a circuit is
    (`residue.sign_of`): the coefficient is the sum of c less 2 c s.
    """

    def __init__(self, parities: Parities, phases: dict[int, int], before: Literal) -> None:
        self.local = local = Local(parities, phases)
        self._before = before
        self.constant = 0
        self.quotient: Literal | None = None
        self.products: list[tuple[Literal, Literal]] = []
        self._products: tuple[Product, ...] = ()
        shape = local.shape
        if shape is None:
            signs = sign_of(parities, {node: -2 * eighths for node, eighths in phases.items()})
            if signs is not None:
                total = sum(phases.values()) & 7
                self.constant = total & 3
                self.quotient = parities.parity(signs) ^ (total >> 2)
            return
        self.constant = shape.constant
        linear = [mask for mask in shape.quotient if mask.bit_count() == 1]
        if any(mask.bit_count() > 2 for mask in shape.quotient):
            self.quotient = parities.parity(local.product(mask) for mask in shape.quotient)
            return
        planes = local.planes(before)
        straight = sum(linear)
        for one, other in planes:
            straight ^= one & other
        self._products, straight = absorbed(planes, straight)
        flip = int(0 in shape.quotient)
        for one, other, flip_one, flip_other in self._products:
            self.products.append((local.element(one) ^ flip_one, local.element(other) ^ flip_other))
            flip ^= flip_one & flip_other
        products = [parities.and_(*pair) for pair in self.products]
        self.quotient = parities.parity([local.element(straight), *products]) ^ flip

    def touches_first(self) -> bool:
        """Whether bit 0 of the basis is in a product, not alone."""
        shape = self.local.shape
        return shape is None or any(mask & 1 and mask != 1 for mask in shape.quotient)

    def rest(self, outer: Literal = FALSE) -> tuple[list[tuple[Literal, int]], bool] | None:
        """What is left without y as (literal, eighths) on products of Q; None where others are needed.

        outer: the sign of `outer` times (what the qubit held before, XOR Q) may be taken in, which leaves
        less: the second part says whether it is.
        """
        local, shape = self.local, self.local.shape
        if shape is None:
            return None
        sign = self._outer_sign(shape, outer) if outer else ()
        beside = rest_beside(shape.rest, self._products, sign) if sign else None
        taken = beside is not None
        if beside is None:
            beside = rest_beside(shape.rest, self._products)
        if beside is None:
            return None
        parities, element = local.parities, local.element
        found = [(element(beside.straight), 4)]
        found += [(TRUE, 2) for _, _, flip_one, flip_other in self._products if flip_one & flip_other]
        found += [(TRUE, 4)] * (taken and sign[0])
        found += [(parities.and_(element(one), element(other)), 4) for one, other in beside.planes]
        factors = beside.factors or (0,) * len(self.products)
        for pair, factor in zip(self.products, factors, strict=True):
            product = parities.and_(*pair)
            found.append((product, -2))
            if factor:
                found.append((parities.and_(product, element(factor)), 4))
        return found, taken

    def _outer_sign(self, shape: Shape, outer: Literal) -> tuple[int, ...]:
        """By case, outer (before ^ Q); empty where they are not sums of basis elements or one product."""
        local = self.local
        mask, held = local.mask_of(outer), local.held(self._before)
        if mask is None or held is None:
            return ()
        (one, other), straight = held
        found = []
        for case in range(len(shape.rest)):
            value = self._before ^ (straight & case).bit_count()
            value ^= (one & case).bit_count() & (other & case).bit_count()
            value ^= sum(case & product == product for product in shape.quotient) & 1
            found.append(value & ((mask & case).bit_count() ^ outer) & 1)
        return tuple(found)
