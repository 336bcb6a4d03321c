"""Networks as a beginner would write them: XOR from three ANDs, carries and tables without any thought."""

from __future__ import annotations

from collections.abc import Sequence

from revsynth.logic.network import FALSE, TRUE, Literal, Network
from revsynth.logic.network_builder import NetworkBuilder

Word = list[Literal]


class NaiveBuilder(NetworkBuilder):
    """XOR costs three ANDs here, a majority five, a selection three."""

    def xor(self, a: Literal, b: Literal) -> Literal:
        return self.or_(self.and_(a, b ^ 1), self.and_(a ^ 1, b))

    def majority(self, a: Literal, b: Literal, c: Literal) -> Literal:
        return self.or_(self.or_(self.and_(a, b), self.and_(a, c)), self.and_(b, c))

    def mux(self, choose: Literal, then: Literal, otherwise: Literal) -> Literal:
        return self.or_(self.and_(choose, then), self.and_(choose ^ 1, otherwise))

    def word(self, begin: int, bits: int) -> Word:
        """Inputs begin ... begin + bits - 1."""
        return [self.input(i) for i in range(begin, begin + bits)]

    def sum(self, a: Sequence[Literal], b: Sequence[Literal], carry: Literal = FALSE) -> Word:
        """a + b + carry, one bit longer than a; both of one length."""
        total = []
        for x, y in zip(a, b, strict=True):
            total.append(self.xor(self.xor(x, y), carry))
            carry = self.majority(x, y, carry)
        return [*total, carry]

    def product(self, a: Sequence[Literal], b: Sequence[Literal]) -> Word:
        """a * b by adding shifted rows."""
        total: Word = [FALSE] * (len(a) + len(b))
        for shift, bit in enumerate(b):
            row = [self.and_(x, bit) for x in a]
            total[shift : shift + len(a) + 1] = self.sum(total[shift : shift + len(a)], row)
        return total

    def equals(self, a: Sequence[Literal], value: int) -> Literal:
        """Whether a word is a constant."""
        return self.all_of(x if value >> i & 1 else x ^ 1 for i, x in enumerate(a))

    def less(self, a: Sequence[Literal], b: Sequence[Literal]) -> Literal:
        """a < b."""
        borrow = FALSE
        for x, y in zip(a, b, strict=True):
            borrow = self.or_(self.and_(x ^ 1, y), self.and_(self.or_(x ^ 1, y), borrow))
        return borrow

    def weight(self, bits: Sequence[Literal]) -> Word:
        """The number of ones, by full adders column by column."""
        columns: list[Word] = [list(bits)]
        index = 0
        while index < len(columns):
            column = columns[index]
            while len(column) > 1:
                x, y = column.pop(), column.pop()
                z = column.pop() if column else FALSE
                column.insert(0, self.xor(self.xor(x, y), z))
                if index + 1 == len(columns):
                    columns.append([])
                columns[index + 1].append(self.majority(x, y, z))
            index += 1
        return [column[0] if column else FALSE for column in columns]

    def look_up(self, bits: Sequence[Literal], table: Sequence[int]) -> Literal:
        """table[x] by selections from the lowest bit up; table of 2**len(bits) zeros and ones."""
        row: Word = [TRUE if value else FALSE for value in table]
        for bit in bits:
            row = [self.mux(bit, row[i + 1], row[i]) for i in range(0, len(row), 2)]
        return row[0]


def adder(bits: int) -> Network:
    """a + b with carry."""
    b = NaiveBuilder(2 * bits)
    return b.build(b.sum(b.word(0, bits), b.word(bits, bits)))


def comparison(bits: int) -> Network:
    """a < b."""
    b = NaiveBuilder(2 * bits)
    return b.build([b.less(b.word(0, bits), b.word(bits, bits))])


def comparison_and_equality(bits: int) -> Network:
    """a < b, a == b."""
    b = NaiveBuilder(2 * bits)
    one, other = b.word(0, bits), b.word(bits, bits)
    same = b.all_of(b.xor(x, y) ^ 1 for x, y in zip(one, other, strict=True))
    return b.build([b.less(one, other), same])


def product(bits: int) -> Network:
    """a * b."""
    b = NaiveBuilder(2 * bits)
    return b.build(b.product(b.word(0, bits), b.word(bits, bits)))


def weight(bits: int) -> Network:
    """The number of ones of a word."""
    b = NaiveBuilder(bits)
    return b.build(b.weight(b.word(0, bits)))


def majority(bits: int) -> Network:
    """Whether most of 2**k - 1 bits are ones: the top bit of the weight."""
    b = NaiveBuilder(bits)
    return b.build(b.weight(b.word(0, bits))[-1:])


def sorting_network(bits: int) -> Network:
    """Batcher's odd-even merge sort of single bits (Knuth, The Art of Computer Programming 3, 5.3.4)."""
    b = NaiveBuilder(bits)
    lane = b.word(0, bits)
    p = 1
    while p < bits:
        k = p
        while k >= 1:
            for j in range(k % p, bits - k, 2 * k):
                for i in range(min(k, bits - j - k)):
                    low, high = i + j, i + j + k
                    if low // (2 * p) == high // (2 * p):
                        x, y = lane[low], lane[high]
                        lane[low], lane[high] = b.and_(x, y), b.or_(x, y)
            k //= 2
        p *= 2
    return b.build(lane)


def rotator(bits: int, amount_bits: int) -> Network:
    """A word rotated by a word."""
    b = NaiveBuilder(bits + amount_bits)
    word, amount = b.word(0, bits), b.word(bits, amount_bits)
    for stage, choose in enumerate(amount):
        word = [b.mux(choose, word[(i - (1 << stage)) % bits], word[i]) for i in range(bits)]
    return b.build(word)


def table(inputs: int, columns: Sequence[Sequence[int]]) -> Network:
    """Outputs from bare tables: column j holds output bit j for inputs 0, 1, 2, ..."""
    b = NaiveBuilder(inputs)
    return b.build([b.look_up(b.word(0, inputs), column) for column in columns])


def sum_equals(bits: int, value: int) -> Network:
    """(a + b) % 2**bits == value."""
    b = NaiveBuilder(2 * bits)
    return b.build([b.equals(b.sum(b.word(0, bits), b.word(bits, bits))[:bits], value)])


def product_equals(bits: int, value: int) -> Network:
    """a * b == value."""
    b = NaiveBuilder(2 * bits)
    return b.build([b.equals(b.product(b.word(0, bits), b.word(bits, bits)), value)])


def aes_sbox() -> list[int]:
    """The substitution table of FIPS 197 from its definition: inversion in GF(2**8), then an affine map."""

    def times(a: int, b: int) -> int:
        result = 0
        while b:
            result ^= a * (b & 1)
            a = a << 1 ^ (0x11B if a & 0x80 else 0)
            b >>= 1
        return result

    inverse = [next((y for y in range(256) if times(x, y) == 1), 0) for x in range(256)]

    def affine(x: int) -> int:
        return (
            (x ^ x << 1 ^ x << 2 ^ x << 3 ^ x << 4) & 0xFF ^ (x << 1 ^ x << 2 ^ x << 3 ^ x << 4) >> 8 ^ 0x63
        )

    return [affine(x) for x in inverse]
