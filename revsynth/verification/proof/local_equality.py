"""Proofs of equalities from a few ANDs alone, with the XORs that they read as variables.

A difference of two nodes is a XOR of atoms. Some of its ANDs are expanded: then it is a function of the XORs
that these read, of which as many count as variables as are independent (Gaussian elimination). Where their
truth table is 0 the nodes are equal whatever lies below; a solver, which sees all of that, is slow with XORs.
Cut-based proofs: Kuehlmann, Krohm, "Equivalence checking using cuts and heaps", DAC 1997.
"""

from __future__ import annotations

from revsynth.verification.lifting.parities import AND, XOR, Literal, Parities

MOST_ATOMS = 400
"""Longer XORs are not looked at."""
MOST_VARIABLES = 10
MOST_EXPANSIONS = 14

Atoms = frozenset[int]
NO_ATOMS: Atoms = frozenset()


class LocalEquality:
    """Proves equalities of nodes of one `Parities`."""

    def __init__(self, parities: Parities) -> None:
        self._parities = parities
        self._atoms: list[Atoms | None] = [NO_ATOMS]
        self._tables = [_variable(place) for place in range(MOST_VARIABLES)]

    def proves(self, a: Literal, b: Literal) -> bool:
        """Whether two literals are shown to be equal for every input; False says nothing."""
        one, other = self._of(a >> 1), self._of(b >> 1)
        if one is None or other is None:
            return False
        difference = one ^ other
        kind = self._parities.kind
        expanded = sorted(atom for atom in difference if kind[atom] == AND)
        if len(expanded) > MOST_EXPANSIONS:
            return False
        while len(expanded) <= MOST_EXPANSIONS:
            rest = self._rest(expanded)
            if rest is None:
                return False
            if self._vanishes(difference, expanded, (a ^ b) & 1):
                return True
            more = [atom for atom in rest if kind[atom] == AND]
            if not more:
                return False
            expanded = sorted([*expanded, max(more)])
        return False

    def _of(self, node: int) -> Atoms | None:
        """The atoms of a node; None where they are too many."""
        parities, atoms = self._parities, self._atoms
        for place in range(len(atoms), node + 1):
            if parities.kind[place] != XOR:
                atoms.append(frozenset((place,)))
                continue
            left, right = atoms[parities.left[place]], atoms[parities.right[place]]
            both = None if left is None or right is None else left ^ right
            atoms.append(both if both is None or len(both) <= MOST_ATOMS else None)
        return atoms[node]

    def _rest(self, expanded: list[int]) -> set[int] | None:
        """Atoms that the expanded ones read and that are not expanded; None where they are too many."""
        found: set[int] = set()
        for atom in expanded:
            for operand in (self._parities.left[atom], self._parities.right[atom]):
                atoms = self._of(operand)
                if atoms is None:
                    return None
                found |= atoms
        return found.difference(expanded)

    def _vanishes(self, difference: Atoms, expanded: list[int], constant: int) -> bool:
        """Whether the difference is 0 for all values of the XORs that the expanded atoms read."""
        basis: dict[int, tuple[Atoms, int]] = {}
        every = (1 << (1 << MOST_VARIABLES)) - 1
        tables: dict[int, int] = {}

        def table(atoms: Atoms) -> int | None:
            """Of a XOR of atoms; None where it takes one variable too many."""
            found = 0
            row = atoms.difference(tables)
            for atom in atoms:
                found ^= tables.get(atom, 0)
            while row:
                top = max(row)
                if top not in basis:
                    if len(basis) == MOST_VARIABLES:
                        return None
                    # the new variable is what is left of the row
                    basis[top] = row, self._tables[len(basis)]
                known, values = basis[top]
                row ^= known
                found ^= values
            return found

        for atom in expanded:
            left = table(self._of(self._parities.left[atom]) or NO_ATOMS)
            right = table(self._of(self._parities.right[atom]) or NO_ATOMS)
            if left is None or right is None:
                return False
            tables[atom] = left & right
        total = table(difference)
        return total is not None and total == (every if constant else 0)


def _variable(place: int) -> int:
    """The truth table of a variable over MOST_VARIABLES of them."""
    half = 1 << place
    block = ((1 << half) - 1) << half
    copies = ((1 << (1 << MOST_VARIABLES)) - 1) // ((1 << 2 * half) - 1)
    return block * copies
