"""Which lines are known to be in 0, before and after every gate, whatever the inputs are.

Each line's value is an XOR of *atoms*: the inputs, the constant 1, and products. It is followed as a
signature: every atom has 128 random bits (from a fixed seed), a value the XOR of its atoms' bits. Equal
values have equal signatures; different values are taken for equal with a chance of about one in 10^26 for
a million of them, and the circuit is verified afterwards, so a coincidence can cost a build but not a wrong
circuit.
"""

from __future__ import annotations

import random
from collections.abc import Sequence
from dataclasses import dataclass

Value = int

SIGNATURE_BITS = 128
ZERO: Value = 0
ONE: Value = random.Random("the constant 1").getrandbits(SIGNATURE_BITS)


@dataclass
class LineValues:
    """The values of all lines at one moment of a cascade; `apply` moves it past a gate."""

    values: list[Value]
    products: dict[tuple[Value, ...], Value]
    draw: random.Random

    @classmethod
    def start(cls, lines: int, known: dict[int, int]) -> LineValues:
        """Lines in `known` start in 0 or 1 as it says; every other line is an input."""
        draw = random.Random(0)
        values = [draw.getrandbits(SIGNATURE_BITS) for _ in range(lines)]
        for line, bit in known.items():
            values[line] = ONE if bit else ZERO
        return cls(values, {}, draw)

    def is_zero(self, line: int) -> bool:
        """Whether the line is known to be in 0 now."""
        return not self.values[line]

    def apply(self, controls: Sequence[int], targets: Sequence[int]) -> None:
        """XOR the product of the control literals into every target."""
        product = self.product(controls)
        for target in targets:
            self.values[target] ^= product

    def factor(self, control: int) -> Value:
        """The value of a control literal now."""
        return self.values[control >> 1] ^ ONE if control & 1 else self.values[control >> 1]

    def product(self, controls: Sequence[int]) -> Value:
        """The value of the AND of the control literals now; the empty product is 1."""
        if len(controls) == 1:
            return self.factor(controls[0])
        factors = {self.factor(control) for control in controls} - {ONE}
        if any(not factor or factor ^ ONE in factors for factor in factors):
            return ZERO
        if len(factors) <= 1:
            return next(iter(factors), ONE)
        key = tuple(sorted(factors))
        found = self.products.get(key)
        if found is None:
            found = self.products[key] = self.draw.getrandbits(SIGNATURE_BITS)
        return found
