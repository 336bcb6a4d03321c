"""Tables: the bits of listed values as a network, with what they have in common built once.

Selections over the upper index bits choose between functions of the lower ones, and those are exclusive sums
of products of the lower bits, which all of them share: any function of r bits costs nothing once the
2**r - r - 1 products are there. How many bits are lower is tried out. (O. B. Lupanov, A method of circuit
synthesis, 1958, splits a table the same way.)
"""

from __future__ import annotations

from collections.abc import Sequence

from revsynth.errors import SpecError
from revsynth.logic.network import FALSE, TRUE, Literal
from revsynth.logic.network_builder import NetworkBuilder

MOST_PRODUCT_BITS = 11
"""Lower index bits at most."""
MOST_GATES = 8_000_000
"""Gates of a network while it is built: about 2 GB."""


def look_up(builder: NetworkBuilder, index: Sequence[Literal], tables: Sequence[int]) -> list[Literal]:
    """One literal a table: bit i of a table is the output where the index is i, index[0] the lowest bit.

    Takes memory and time proportional to tables * 2**len(index). Raises SpecError where it would take more
    than MOST_GATES gates.
    """
    split, gates = _best_split(len(index), tables)
    if gates > MOST_GATES:
        raise SpecError(
            f"a table of {1 << len(index)} entries would need a network of more than {gates:,} gates"
        )
    table = _Table(builder, index, split)
    return [table.function(bits, len(index)) for bits in tables]


def _best_split(bits: int, tables: Sequence[int]) -> tuple[int, int]:
    """How many index bits are lower, for the fewest selections and products, and the gates it takes."""
    best, least, gates = 0, -1, 0
    for lower in range(min(bits, MOST_PRODUCT_BITS) + 1):
        choices, leaves = _choices(bits, lower, tables)
        cost = choices + len(products(lower, leaves))
        if least < 0 or cost < least:
            best, least, gates = lower, cost, cost + choices + (len(leaves) << lower >> 1)
    return best, gates


def _choices(bits: int, lower: int, tables: Sequence[int]) -> tuple[int, list[int]]:
    """How many selections the upper bits take, and the functions of the lower bits that they choose from."""
    level = dict.fromkeys(_positive(table, bits) for table in tables)
    count = 0
    for size in range(bits, lower, -1):
        below: dict[int, None] = {}
        half = 1 << (size - 1)
        everything = (1 << half) - 1
        for table in level:
            low, high = table & everything, table >> half
            if low != high and low ^ high != everything:
                count += 1
            for part in (low, high):
                below[part ^ everything if part & 1 else part] = None
        level = below
    return count, list(level)


def _positive(table: int, bits: int) -> int:
    """A table or its complement, whichever has a 0 first."""
    return table ^ ((1 << (1 << bits)) - 1) if table & 1 else table


def products(bits: int, tables: Sequence[int]) -> set[int]:
    """The products of two or more bits that the exclusive sums of some tables need, with their own factors.

    A product is a mask of index bits. Each is made from one with its highest bit left out, which thus is
    needed too.
    """
    used = 0
    for table in tables:
        used |= normal_form(table, bits)
    found: set[int] = set()
    while used:
        lowest = used & -used
        used ^= lowest
        product = lowest.bit_length() - 1
        while product.bit_count() > 1 and product not in found:
            found.add(product)
            product ^= 1 << (product.bit_length() - 1)
    return found


def normal_form(table: int, bits: int) -> int:
    """The algebraic normal form of a table: bit m is 1 where the product of the bits in m is in the sum."""
    for place in range(bits):
        step = 1 << place
        table ^= (table & _low_half(bits, place)) << step
    return table


def _low_half(bits: int, place: int) -> int:
    """The inputs at which an index bit is 0, as a table."""
    step = 1 << place
    return ((1 << (1 << bits)) - 1) // ((1 << 2 * step) - 1) * ((1 << step) - 1)


class _Table:
    def __init__(self, builder: NetworkBuilder, index: Sequence[Literal], lower: int) -> None:
        self.builder = builder
        self.index = index
        self.lower = lower
        self.known: list[dict[int, Literal]] = [{} for _ in range(len(index) + 1)]
        self.product: dict[int, Literal] = {0: TRUE}

    def function(self, table: int, bits: int) -> Literal:
        """The literal of a table over the lowest `bits` index bits; recursion is as deep as the index."""
        flip = table & 1
        if flip:
            table ^= (1 << (1 << bits)) - 1
        if table == 0:
            return FALSE ^ flip
        found = self.known[bits].get(table)
        if found is None:
            if bits <= self.lower:
                found = self._exclusive_sum(normal_form(table, bits))
            else:
                half = 1 << (bits - 1)
                low = self.function(table & ((1 << half) - 1), bits - 1)
                high = self.function(table >> half, bits - 1)
                found = self.builder.mux(self.index[bits - 1], high, low)
            self.known[bits][table] = found
        return found ^ flip

    def _exclusive_sum(self, form: int) -> Literal:
        terms = []
        while form:
            lowest = form & -form
            form ^= lowest
            terms.append(self._product(lowest.bit_length() - 1))
        return self.builder.parity(terms)

    def _product(self, mask: int) -> Literal:
        missing = []
        while mask not in self.product:
            missing.append(mask)
            mask ^= 1 << (mask.bit_length() - 1)
        found = self.product[mask]
        for one in reversed(missing):
            found = self.builder.and_(found, self.index[one.bit_length() - 1])
            self.product[one] = found
        return found


def tables_of(values: Sequence[int], width: int) -> list[int]:
    """The table of each of the low `width` bits of listed values, as integers with bit i for entry i."""
    found = []
    for place in range(width):
        digits = "".join("1" if value >> place & 1 else "0" for value in reversed(values))
        found.append(int(digits or "0", 2))
    return found
