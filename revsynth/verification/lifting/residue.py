"""Phases that are left at the end: shown to be signs, as polynomials over independent parities.

omega^(c p) for a parity p of x_1 ... x_k is omega to the c (sum x_i - 2 sum x_i x_j + 4 sum x_i x_j x_k)
(Amy, Mosca, "T-count optimization and Reed-Muller codes", IEEE Trans. Inf. Theory 65, 2019). Where every sum
of coefficients is a multiple of 4, the whole is a sign. The x are independent as XORs of atoms, which is
enough for this but not needed, since ANDs depend on their operands: what is not shown here is undecided.
"""

from __future__ import annotations

from heapq import heappop, heappush
from itertools import combinations

from revsynth.verification.lifting.parities import FALSE, Literal, Parities

MOST_MONOMIALS = 1_000_000
"""Over all phases; a second is enough for about three million."""

MOST_PRODUCTS = 2_000
"""Products with a quarter turn that may be written down."""

MOST_ROUNDS = 6

Phases = dict[int, int]


def sign_of(parities: Parities, phases: Phases) -> list[Literal] | None:
    """Literals whose XOR is the sign that all the phases (eighths by node) amount to; None if not shown."""
    signs, left = simplified(parities, phases)
    return None if left else signs


def simplified(parities: Parities, phases: Phases) -> tuple[list[Literal], Phases]:
    """The same phases as literals whose XOR gives a sign, and fewer phases."""
    residue = _Residue(parities)
    for node in sorted(phases):
        residue.add(2 * node, phases[node])
    for _ in range(MOST_ROUNDS):
        residue.take_apart()
        if not residue.phases or not residue.expand():
            break
    residue.take_apart()
    return residue.signs, residue.phases


def counted(parities: Parities, phases: Phases) -> tuple[Literal, Literal, Literal]:
    """The sum of the eighths at nodes that are 1, modulo 8, as three bits, lowest first: two ANDs a phase."""
    and_, xor = parities.and_, parities.xor
    low = middle = high = FALSE
    for node, eighths in sorted(phases.items()):
        literal = 2 * node
        one, two, four = (literal if eighths >> bit & 1 else FALSE for bit in range(3))
        carry = and_(low, one)
        low = xor(low, one)
        # The carry is 1 only where the literal is, so it and `two` make middle + two + carry.
        both = xor(two, carry)
        high = parities.parity((high, four, and_(two, carry), and_(middle, both)))
        middle = xor(middle, both)
    return low, middle, high


class _Residue:
    """Phases by node, none a multiple of 4; those that became signs."""

    def __init__(self, parities: Parities) -> None:
        self.parities = parities
        self.phases: Phases = {}
        self.signs: list[Literal] = []
        self._heap: list[int] = []

    def add(self, literal: Literal, eighths: int) -> None:
        """Eighths of a turn on a literal without complement."""
        node = literal >> 1
        if not node:
            return
        total = (self.phases.pop(node, 0) + eighths) & 7
        if total == 4:
            self.signs.append(literal)
        elif total:
            self.phases[node] = total
            if node in self.parities.third:
                heappush(self._heap, -node)

    def take_apart(self) -> None:
        """Replace p ^ q by p + q - 2 p q where the product of p and q has been met, the latest node first.

        It ends: p and q are earlier than p ^ q, and what is twice doubled is a sign.
        """
        while self._heap:
            node = -heappop(self._heap)
            eighths = self.phases.pop(node, 0)
            if eighths:
                left, right, product = self.parities.third[node]
                self.add(2 * left, eighths)
                self.add(2 * right, eighths)
                self.add(product, -2 * eighths)

    def expand(self) -> bool:
        """Replace the phases by some on independent nodes and products; False where nothing changes."""
        phases = self.phases
        masks, basis = _coordinates(self.parities, sorted(phases))
        if len(basis) == len(phases):
            return False
        weights = [mask.bit_count() for mask in masks.values()]
        if sum(w * w * w // 6 for w in weights) > MOST_MONOMIALS:
            return False
        found = _polynomial([(masks[node], eighths) for node, eighths in sorted(phases.items())])
        if sum(1 for value in found.values() if value & 3) > MOST_PRODUCTS:
            return False
        self.phases = {}
        for places, value in sorted(found.items()):
            if value:
                self.add(self.parities.all_of(2 * basis[i] for i in places), value)
        return True


def _coordinates(parities: Parities, nodes: list[int]) -> tuple[dict[int, int], list[int]]:
    """Every node as an XOR of some of the nodes that are independent: (bit sets, those nodes)."""
    atoms = parities.proofs.atoms_of(nodes)
    rows: dict[int, tuple[int, int]] = {}
    basis: list[int] = []
    masks: dict[int, int] = {}
    for node in nodes:
        row, mask = atoms[node], 0
        while row:
            place = row.bit_length()
            if place not in rows:
                rows[place] = (row, mask | 1 << len(basis))
                mask = 1 << len(basis)
                basis.append(node)
                break
            other, other_mask = rows[place]
            row ^= other
            mask ^= other_mask
        masks[node] = mask
    return masks, basis


def _polynomial(terms: list[tuple[int, int]]) -> dict[tuple[int, ...], int]:
    found: dict[tuple[int, ...], int] = {}
    for mask, eighths in terms:
        places = []
        while mask:
            low = mask & -mask
            places.append(low.bit_length() - 1)
            mask ^= low
        for size, factor in ((1, 1), (2, -2), (3, 4)):
            change = eighths * factor & 7
            if change:
                for monomial in combinations(places, size):
                    found[monomial] = found.get(monomial, 0) + change & 7
    return found
