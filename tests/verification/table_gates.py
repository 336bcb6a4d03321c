"""Gates whose literals stand for whole truth tables: what a translation means, without any network."""

from __future__ import annotations


class TableGates:
    """Literal 2 k is table k, 2 k + 1 its complement; bit x of a table belongs to input x."""

    def __init__(self, inputs: int) -> None:
        self.everything = (1 << (1 << inputs)) - 1
        self.tables = [0]
        self.numbers = {0: 0}
        self.inputs = [
            self.literal(sum(1 << x for x in range(1 << inputs) if x >> i & 1)) for i in range(inputs)
        ]

    def literal(self, table: int) -> int:
        """The literal of a table; a table and its complement share a number."""
        flip = table & 1
        even = table ^ self.everything if flip else table
        number = self.numbers.setdefault(even, len(self.tables))
        if number == len(self.tables):
            self.tables.append(even)
        return 2 * number + flip

    def table(self, literal: int) -> int:
        """The truth table of a literal."""
        table = self.tables[literal >> 1]
        return table ^ self.everything if literal & 1 else table

    def both(self, a: int, b: int) -> int:
        """AND."""
        return self.literal(self.table(a) & self.table(b))

    def differ(self, a: int, b: int) -> int:
        """XOR."""
        return self.literal(self.table(a) ^ self.table(b))
