"""Adding many numbers column by column, with one AND for each bit that disappears.

Column i holds literals of weight 2**i. A full adder takes three of them to one and a carry with one AND (the
carry is x ^ ((x ^ y) & (x ^ z))), a half adder two with one AND; a constant 1 costs nothing. The number of
ANDs of a column depends only on how many literals meet there: floor(h / 2) for h of them.
Method: C. S. Wallace, A suggestion for a fast multiplier, IEEE Transactions on Electronic Computers, 1964;
one AND a full adder: common practice.
"""

from __future__ import annotations

from functools import lru_cache

from revsynth.logic.network import FALSE, TRUE, Literal
from revsynth.logic.network_builder import NetworkBuilder


class Columns:
    """Columns of literals and a constant, to be added up modulo 2**width from column 0 on.

    A column must be complete before `bit` or `zero` is asked for it, and each is asked for once, in ascending
    order: the carries go into the next column.
    """

    def __init__(self, builder: NetworkBuilder, width: int, constant: int = 0) -> None:
        self.builder = builder
        self.width = width
        self.constant = constant
        self.columns: list[list[Literal]] = [[] for _ in range(width)]

    def add(self, literal: Literal, place: int) -> None:
        """Add literal * 2**place."""
        if place >= self.width or literal == FALSE:
            return
        if literal == TRUE:
            self.constant += 1 << place
        else:
            self.columns[place].append(literal)

    def subtract(self, literal: Literal, place: int) -> None:
        """Subtract literal * 2**place: add its complement, less 1."""
        if place < self.width:
            self.add(literal ^ 1, place)
            self.constant -= 1 << place

    def add_multiple(self, literal: Literal, coefficient: int) -> None:
        """Add coefficient * literal, with as few digits 1 and -1 of the coefficient as there can be."""
        for place, negative in signed_digits(coefficient):
            if negative:
                self.subtract(literal, place)
            else:
                self.add(literal, place)

    def add_word(self, literals: list[Literal], place: int = 0) -> None:
        """Add an unsigned word, shifted up by `place`."""
        for literal in literals[: max(self.width - place, 0)]:
            self.add(literal, place)
            place += 1

    def bits(self) -> list[Literal]:
        """All bits of the sum."""
        return [self.bit(place) for place in range(self.width)]

    def bit(self, place: int) -> Literal:
        """The bit of the sum at one place; its carries go on."""
        builder, last = self.builder, place + 1 == self.width
        column = self._column(place)
        one = self.constant >> place & 1
        if last:
            return builder.parity(column) ^ one
        xor, position = builder.xor, 0
        while len(column) - position > 2:
            x, y, z = column[position : position + 3]
            position += 3
            different = xor(x, y)
            self.add(xor(x, builder.and_(different, xor(x, z))), place + 1)
            total = xor(different, z)
            if total > TRUE:
                column.append(total)
            elif total == TRUE:
                self.constant += one << place + 1
                one ^= 1
        rest = column[position:]
        if len(rest) == 2:
            x, y = rest
            self.add(builder.or_(x, y) if one else builder.and_(x, y), place + 1)
            return xor(x, y) ^ one
        if rest and one:
            self.add(rest[0], place + 1)
        return rest[0] ^ one if rest else one

    def zero(self, place: int) -> Literal:
        """Where the bit of the sum at one place is 0; the carries are right only where it is.

        A conjunction over all places thus knows in every carry that the bits below are 0, and the last adder
        of each column needs no full carry: where x ^ y ^ z is 0, it is x | y, and where it is 1, 1 + x & y.
        """
        builder = self.builder
        column = self._column(place)
        one = self.constant >> place & 1
        if place + 1 == self.width:
            return builder.parity(column) ^ one ^ 1
        position = 0
        while len(column) - position > 3:
            x, y, z = column[position : position + 3]
            position += 3
            different = builder.xor(x, y)
            self.add(builder.xor(x, builder.and_(different, builder.xor(x, z))), place + 1)
            total = builder.xor(different, z)
            if total > TRUE:
                column.append(total)
            elif total == TRUE:
                self.constant += one << place + 1
                one ^= 1
        rest = column[position:]
        if one:
            self.constant += 1 << place + 1
        if len(rest) == 3:
            x, y = rest[:2]
            self.add(builder.and_(x, y) if one else builder.or_(x, y), place + 1)
        elif len(rest) == 2 and not one:
            self.add(rest[0], place + 1)
        return builder.parity(rest) ^ one ^ 1

    def _column(self, place: int) -> list[Literal]:
        """A column without pairs: x + x is x one place up, and x + ~x is 1."""
        column = self.columns[place]
        if len(column) < 2:
            return column
        while len({literal >> 1 for literal in column}) < len(column):
            kept: dict[Literal, None] = {}
            for literal in column:
                if literal in kept:
                    del kept[literal]
                    self.add(literal, place + 1)
                elif literal ^ 1 in kept:
                    del kept[literal ^ 1]
                    self.constant += 1 << place
                else:
                    kept[literal] = None
            column = list(kept)
        return column


def signed_digits(coefficient: int) -> tuple[tuple[int, bool], ...]:
    """Places with digits 1, or -1 where the second part is True, that make up a coefficient.

    As few as can be (the non-adjacent form: G. W. Reitwiesner, Binary arithmetic, Advances in Computers,
    1960); the binary digits where they are as few.
    """
    if coefficient == 0:
        return ()
    shift = (coefficient & -coefficient).bit_length() - 1
    odd = _odd_digits(coefficient >> shift)
    return tuple((place + shift, negative) for place, negative in odd) if shift else odd


@lru_cache(maxsize=1 << 14)
def _odd_digits(number: int) -> tuple[tuple[int, bool], ...]:
    negative = number < 0
    size = abs(number)
    sparse: list[tuple[int, bool]] = []
    place, rest = 0, size
    while rest:
        if rest & 1:
            minus = rest & 3 == 3
            sparse.append((place, minus))
            rest += 1 if minus else -1
        rest >>= 1
        place += 1
    if size.bit_count() <= len(sparse):
        sparse = [(place, False) for place in range(size.bit_length()) if size >> place & 1]
    return tuple((place, minus is not negative) for place, minus in sparse)
