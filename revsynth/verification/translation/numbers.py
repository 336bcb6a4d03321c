"""Exact integers as bits: two's complement of whatever width is enough, the last bit the sign.

The textbook form of every operation: ripple carries, one row a partial product, restoring division. Widths
grow as results need and shrink where the top bits are the same literal, so nothing ever wraps around.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from typing import TypeAlias

from revsynth.spec.limits import MAX_BITS
from revsynth.verification.translation.gates import (
    FALSE,
    TRUE,
    Bit,
    Gates,
    TooLargeToTranslateError,
    choose,
    either,
    every,
    some,
)

Number: TypeAlias = tuple[Bit, ...]
"""Bits of a two's complement number, bit 0 first, the sign last."""

MOST_BITS = 2 * MAX_BITS + 2
"""Wider numbers than any result that is defined."""


def trimmed(bits: Sequence[Bit]) -> Number:
    """Without top bits that only repeat the sign."""
    size = len(bits)
    while size > 1 and bits[size - 1] == bits[size - 2]:
        size -= 1
    if size > MOST_BITS:
        raise TooLargeToTranslateError(f"a number of {size} bits")
    return tuple(bits[:size])


def constant(value: int) -> Number:
    """An integer."""
    return tuple(value >> place & 1 for place in range(value.bit_length() + 1))


def truth(bit: Bit) -> Number:
    """0 or 1."""
    return trimmed((bit, FALSE))


def known(number: Number) -> int | None:
    """The value of a number whose bits are all constant, None for others."""
    if any(bit > 1 for bit in number):
        return None
    return sum(bit << place for place, bit in enumerate(number)) - (number[-1] << len(number))


def limits(number: Number) -> tuple[int, int]:
    """Least and greatest value that bits of this width, constants counted, can have."""
    low = sum(1 << place for place, bit in enumerate(number[:-1]) if bit == TRUE)
    high = sum(1 << place for place, bit in enumerate(number[:-1]) if bit != FALSE)
    top = 1 << (len(number) - 1)
    return low - (top if number[-1] != FALSE else 0), high - (top if number[-1] == TRUE else 0)


COUNT_BITS = MAX_BITS.bit_length()
"""Bits of a shift's count that can matter: beyond, a left shift of anything but 0 is undefined."""


MOST_CELLS = 1 << 18
"""Rows times columns of one product or quotient: 512 by 512 bits."""


def _check_size(rows: int, columns: int) -> None:
    if rows * columns > MOST_CELLS:
        raise TooLargeToTranslateError(f"a product or quotient of {rows} by {columns} bits")


class Arithmetic:
    """Operations on numbers, written into `gates`.

    by_columns: sums and products are added up column by column, three bits to two at a time, first come first
    served (Wallace, IEEE Transactions on Electronic Computers, 1964); else number by number.
    """

    def __init__(self, gates: Gates, *, by_columns: bool = False) -> None:
        self.gates = gates
        self.by_columns = by_columns

    def extended(self, number: Number, size: int) -> Number:
        """The same value in `size` bits, or more where it has more."""
        return number + (number[-1],) * (size - len(number))

    def choose(self, condition: Bit, yes: Number, no: Number) -> Number:
        """`yes` where the condition holds, else `no`."""
        size = max(len(yes), len(no))
        pairs = zip(self.extended(yes, size), self.extended(no, size), strict=True)
        return trimmed([choose(self.gates, condition, y, n) for y, n in pairs])

    def nonzero(self, number: Number) -> Bit:
        """Whether the number is not 0."""
        return some(self.gates, number)

    def _sum(self, a: Number, b: Number, carry: Bit) -> Number:
        size = max(len(a), len(b)) + 1
        found = []
        for x, y in zip(self.extended(a, size), self.extended(b, size), strict=True):
            half = self.gates.differ(x, y)
            found.append(self.gates.differ(half, carry))
            carry = self.gates.differ(self.gates.both(x, y), self.gates.both(half, carry))
        return trimmed(found)

    def add(self, a: Number, b: Number) -> Number:
        """a + b."""
        return self._sum(a, b, FALSE)

    def invert(self, a: Number) -> Number:
        """~a, which is -a - 1."""
        return tuple(bit ^ 1 for bit in a)

    def subtract(self, a: Number, b: Number) -> Number:
        """a - b."""
        return self._sum(a, self.invert(b), TRUE)

    def negate(self, a: Number) -> Number:
        """-a."""
        return self.subtract((FALSE,), a)

    def absolute(self, a: Number) -> Number:
        """abs(a)."""
        return self.choose(a[-1], self.negate(a), a)

    def multiply(self, a: Number, b: Number) -> Number:
        """a * b: a row a bit of b, the row of the sign taken away."""
        if not self.by_columns and sum(bit != FALSE for bit in a) < sum(bit != FALSE for bit in b):
            a, b = b, a
        _check_size(len(a), sum(bit != FALSE for bit in b))
        if self.by_columns:
            return self.total(self.partial_products(a, b))
        total: Number = (FALSE,)
        for place, bit in enumerate(b):
            if bit == FALSE:
                continue
            row = tuple([FALSE] * place + [self.gates.both(bit, x) for x in a])
            total = self.subtract(total, row) if place == len(b) - 1 else self.add(total, row)
        return total

    def weighted(self, number: Number, factor: int = 1) -> list[tuple[Bit, int]]:
        """The bits of a number with what they count, times a factor."""
        last = len(number) - 1
        return [(bit, factor * (-1 if place == last else 1) << place) for place, bit in enumerate(number)]

    def partial_products(self, a: Number, b: Number, factor: int = 1) -> list[tuple[Bit, int]]:
        """Every bit of a with every bit of b, and what they count, times a factor."""
        return [
            (self.gates.both(one, other), weight * by)
            for one, weight in self.weighted(a, factor)
            for other, by in self.weighted(b)
            if FALSE not in (one, other)
        ]

    def total(self, terms: Sequence[tuple[Bit, int]]) -> Number:
        """The sum of bits, each with what it counts: columns of bits of one weight, the lowest first."""
        fixed = sum(weight for bit, weight in terms if bit == TRUE)
        loose = [(bit, weight) for bit, weight in terms if bit > TRUE]
        low = fixed + sum(weight for _, weight in loose if weight < 0)
        high = fixed + sum(weight for _, weight in loose if weight > 0)
        size = max(low.bit_length(), high.bit_length()) + 1
        if size > MOST_BITS:
            raise TooLargeToTranslateError(f"a number of {size} bits")
        columns: list[list[Bit]] = [[] for _ in range(size + 1)]
        for bit, weight in loose:
            digits = abs(weight)
            for place in range(digits.bit_length()):
                if digits >> place & 1:
                    columns[place].append(bit ^ (weight < 0))
                    fixed -= (1 << place) * (weight < 0)
        found: list[Bit] = []
        for place in range(size if low < 0 <= high else size - 1):
            total, fixed = self._column(columns, place, fixed)
            found.append(total)
        if len(found) < size:
            found.append(TRUE if high < 0 else FALSE)
        return trimmed(found)

    def _column(self, columns: list[list[Bit]], place: int, fixed: int) -> tuple[Bit, int]:
        """The bit of the sum at one place, its carries put into the next column; what is left of `fixed`."""
        column, fixed = self._without_pairs(columns, place, fixed)
        position = 0
        while len(column) - position > 2:
            x, y, z = column[position : position + 3]
            position += 3
            total, carry = self._full_adder(x, y, z)
            for bit, where in ((total, column), (carry, columns[place + 1])):
                if bit > TRUE:
                    where.append(bit)
            fixed += ((total == TRUE) << place) + ((carry == TRUE) << place + 1)
        one = fixed >> place & 1
        first, second = [*column[position:], FALSE, FALSE][:2]
        total, carry = self._full_adder(first, second, one)
        if carry > TRUE:
            columns[place + 1].append(carry)
        return total, fixed - (one << place) + ((carry == TRUE) << place + 1)

    def _without_pairs(self, columns: list[list[Bit]], place: int, fixed: int) -> tuple[list[Bit], int]:
        """The same bit twice counts once, one place up; a bit and its complement are 1."""
        kept: dict[Bit, None] = {}
        for bit in columns[place]:
            if bit in kept:
                del kept[bit]
                columns[place + 1].append(bit)
            elif bit ^ 1 in kept:
                del kept[bit ^ 1]
                fixed += 1 << place
            else:
                kept[bit] = None
        return list(kept), fixed

    def _full_adder(self, x: Bit, y: Bit, z: Bit) -> tuple[Bit, Bit]:
        """Sum and carry of three bits."""
        half = self.gates.differ(x, y)
        carry = self.gates.differ(x, self.gates.both(half, self.gates.differ(x, z)))
        return self.gates.differ(half, z), carry

    def equal(self, a: Number, b: Number) -> Bit:
        """a == b."""
        size = max(len(a), len(b))
        pairs = zip(self.extended(a, size), self.extended(b, size), strict=True)
        return every(self.gates, (self.gates.differ(x, y) ^ 1 for x, y in pairs))

    def less(self, a: Number, b: Number) -> Bit:
        """a < b: the sign of the difference."""
        return self.subtract(a, b)[-1]

    def divide(self, a: Number, b: Number) -> tuple[Number, Number]:
        """(a // b, a % b) as Python rounds; whatever comes out where b is 0 means nothing."""
        _check_size(len(a), len(b))
        size, other = self.absolute(a), self.absolute(b)
        quotient: list[Bit] = []
        rest: Number = (FALSE,)
        for bit in reversed(size):
            rest = trimmed((bit, *rest))
            smaller = self.less(rest, other)
            quotient.append(smaller ^ 1)
            rest = self.choose(smaller, rest, self.subtract(rest, other))
            rest = trimmed((*rest[: len(other)], FALSE)) if len(rest) > len(other) + 1 else rest
        whole = trimmed((*reversed(quotient), FALSE))
        apart = self.gates.differ(a[-1], b[-1])
        uneven = self.gates.both(apart, self.nonzero(rest))
        rounded = self.choose(apart, self.negate(whole), whole)
        rounded = self.choose(uneven, self.subtract(rounded, constant(1)), rounded)
        left = self.choose(uneven, self.subtract(other, rest), rest)
        return rounded, self.choose(b[-1], self.negate(left), left)

    def left_shift(self, a: Number, count: Number) -> Number:
        """a << count for counts that are not negative and at most MAX_BITS."""
        return self._shifted(a, count, lambda number, by: trimmed((FALSE,) * by + number))

    def right_shift(self, a: Number, count: Number) -> Number:
        """a >> count, rounding down; counts beyond the width leave the sign."""
        far = some(self.gates, count[COUNT_BITS:-1])
        near = self._shifted(a, count, lambda number, by: trimmed(number[min(by, len(number) - 1) :]))
        return self.choose(far, (a[-1],), near)

    def _shifted(self, a: Number, count: Number, move: Callable[[Number, int], Number]) -> Number:
        fixed = known(count)
        if fixed is not None:
            return move(a, min(max(fixed, 0), MAX_BITS))
        for place, bit in enumerate(count[:-1]):
            if bit != FALSE and place < COUNT_BITS:
                a = self.choose(bit, move(a, 1 << place), a)
        return a

    def bitwise(self, a: Number, b: Number, kind: str) -> Number:
        """The operation on every pair of bits: and, or, xor."""
        size = max(len(a), len(b))
        pairs = zip(self.extended(a, size), self.extended(b, size), strict=True)
        if kind == "and":
            return trimmed([self.gates.both(x, y) for x, y in pairs])
        if kind == "or":
            return trimmed([either(self.gates, x, y) for x, y in pairs])
        return trimmed([self.gates.differ(x, y) for x, y in pairs])

    def power(self, a: Number, exponent: Number) -> Number:
        """a ** exponent for exponents that are not negative: squares, multiplied where a bit is set."""
        found, square = constant(1), a
        for place, bit in enumerate(exponent[:-1]):
            if bit != FALSE:
                found = self.choose(bit, self.multiply(found, square), found)
            if any(later != FALSE for later in exponent[place + 1 : -1]):
                square = self.multiply(square, square)
        return found

    def power_modulo(self, a: Number, exponent: Number, modulus: Number) -> Number:
        """pow(a, exponent, modulus) for exponents that are not negative."""
        if limits(exponent)[0] < 0:
            raise TooLargeToTranslateError("pow with an exponent that may be negative")
        found = self.divide(constant(1), modulus)[1]
        square = self.divide(a, modulus)[1]
        for place, bit in enumerate(exponent[:-1]):
            if bit != FALSE:
                times = self.divide(self.multiply(found, square), modulus)[1]
                found = self.choose(bit, times, found)
            if any(later != FALSE for later in exponent[place + 1 : -1]):
                square = self.divide(self.multiply(square, square), modulus)[1]
        return found

    def count(self, bits: Sequence[Bit]) -> Number:
        """How many of the bits are 1."""
        if self.by_columns:
            return self.total([(bit, 1) for bit in bits])
        numbers = [truth(bit) for bit in bits] or [constant(0)]
        while len(numbers) > 1:
            pairs = [self.add(x, y) for x, y in zip(numbers[::2], numbers[1::2], strict=False)]
            numbers = pairs + numbers[len(numbers) & -2 :]
        return numbers[0]
