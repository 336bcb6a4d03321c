"""Which lines are known to be in 0, before and after every gate, whatever the inputs are.

Each line's value is followed as an XOR of *atoms*: the inputs, the constant 1 (atom 0), and products. Where
the XOR is empty the line is in 0 for all inputs. This never claims a zero that is not one: a value that grows
too long becomes an atom of its own, which only forgets.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

Value = frozenset[int]

ZERO: Value = frozenset()
ONE: Value = frozenset((0,))

LONGEST = 64
"""Values of more atoms than this are not followed further."""


@dataclass
class LineValues:
    """The values of all lines at one moment of a cascade; `apply` moves it past a gate."""

    values: list[Value]
    next_atom: int
    numbers: dict[Value, int]
    products: dict[tuple[int, ...], int]

    @classmethod
    def start(cls, lines: int, known: dict[int, int]) -> LineValues:
        """Lines in `known` start in 0 or 1 as it says; every other line is an input."""
        values = [frozenset((line + 1,)) for line in range(lines)]
        for line, bit in known.items():
            values[line] = ONE if bit else ZERO
        return cls(values, lines + 1, {}, {})

    def is_zero(self, line: int) -> bool:
        """Whether the line is known to be in 0 now."""
        return not self.values[line]

    def apply(self, controls: Sequence[int], targets: Sequence[int]) -> None:
        """XOR the product of the control literals into every target."""
        product = self.product(controls)
        for target in targets:
            value = self.values[target] ^ product
            self.values[target] = value if len(value) <= LONGEST else self._atom()

    def _atom(self) -> Value:
        self.next_atom += 1
        return frozenset((self.next_atom - 1,))

    def product(self, controls: Sequence[int]) -> Value:
        """The value of the AND of the control literals now; the empty product is 1."""
        factors = {self.values[c >> 1] ^ (ONE if c & 1 else ZERO) for c in controls} - {ONE}
        if any(not factor or factor ^ ONE in factors for factor in factors):
            return ZERO
        if len(factors) <= 1:
            return next(iter(factors), ONE)
        key = tuple(sorted(self.numbers.setdefault(factor, len(self.numbers)) for factor in factors))
        if key not in self.products:
            self.products[key] = self.next_atom
            self.next_atom += 1
        return frozenset((self.products[key],))
