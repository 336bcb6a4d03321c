"""The phases that contain one path variable y, worked out over the few parities that they hold.

A phase c (y ^ s), in eighths of a turn, is c s + c (1 - 2s) y. Over all values of the parities s the sum of
the c (1 - 2s) must be a constant plus 4 Q with Q Boolean: then y meets other signs linearly and may be summed
away (the rules HH and omega of Amy, "Towards large-scale functional verification of universal quantum
circuits", QPL 2018, on Boolean functions instead of polynomials).
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import lru_cache

from revsynth.verification.lifting.parities import TRUE, Literal, Parities
from revsynth.verification.lifting.residue import sign_of

MOST_PARITIES = 7
"""Independent parities beside y: 2**7 cases are gone through."""


@dataclass(frozen=True)
class Shape:
    """A sum of phases c (y ^ parity of x over a mask), solved.

    constant: the coefficient of y less 4 Q; quotient: masks of the products in the normal form of Q; rest:
    what is left without y as (mask, eighths), each a product of x; `known`: its products are all in Q's.
    """

    constant: int
    quotient: tuple[int, ...]
    rest: tuple[tuple[int, int], ...]
    known: bool


@lru_cache(maxsize=4096)
def solve(terms: tuple[tuple[int, int], ...], size: int) -> Shape | None:
    """Go through all values of `size` parities; terms are (mask, c). None where there is no such Q."""
    cases = range(1 << size)
    odd = [[(mask & case).bit_count() & 1 for mask, _ in terms] for case in cases]
    slope = [sum(c * (1 - 2 * s) for (_, c), s in zip(terms, row, strict=True)) & 7 for row in odd]
    if any((value - slope[0]) & 3 for value in slope):
        return None
    quotient = [(value - slope[0]) >> 2 & 1 for value in slope]
    rest = [sum(c * s for (_, c), s in zip(terms, row, strict=True)) for row in odd]
    for bit in range(size):
        for case in cases:
            if case >> bit & 1:
                quotient[case] ^= quotient[case ^ 1 << bit]
                rest[case] -= rest[case ^ 1 << bit]
    products = tuple(mask for mask in cases if quotient[mask])
    left = tuple((mask, rest[mask] & 7) for mask in cases if rest[mask] & 7)
    constant = slope[0] & 3
    if slope[0] & 4:
        products = products[1:] if products[:1] == (0,) else (0, *products)
    known = all(mask.bit_count() < 2 or mask in products for mask, _ in left)
    return Shape(constant, products, left, known)


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
        terms = tuple((mask, c) for mask, (_, c) in zip(masks, items, strict=True))
        self.shape = solve(terms, len(self.basis))

    def product(self, mask: int) -> Literal:
        """The literal of a product of basis elements."""
        if mask & (mask - 1) == 0:
            return self.basis[mask.bit_length() - 1] if mask else TRUE
        return self.parities.all_of(self.basis[i] for i in range(mask.bit_length()) if mask >> i & 1)


class Slope:
    """The coefficient of y in phases c (y ^ s): constant + 4 Q with the literal `quotient`, if it is that.

    Through `local` where the parities are few, else as what is left at the end of a circuit is
    (`residue.sign_of`): the coefficient is the sum of c less 2 c s.
    """

    def __init__(self, parities: Parities, phases: dict[int, int]) -> None:
        self.local = Local(parities, phases)
        self.constant = 0
        self.quotient: Literal | None = None
        shape = self.local.shape
        if shape is not None:
            self.constant = shape.constant
            self.quotient = parities.parity(self.local.product(mask) for mask in shape.quotient)
            return
        signs = sign_of(parities, {node: -2 * eighths for node, eighths in phases.items()})
        if signs is not None:
            total = sum(phases.values()) & 7
            self.constant = total & 3
            self.quotient = parities.parity(signs) ^ (total >> 2)
