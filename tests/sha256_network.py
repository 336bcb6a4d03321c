"""One block of SHA-256 (FIPS 180-4, sections 4.1.2, 4.2.2, 5.3.3 and 6.2.2) as a network.

512 inputs: word 0 of the block first, each word from its least significant bit on; 256 outputs: the words of
the hash value likewise. The constants are worked out from their definition: the first 32 bits of the
fractional parts of square and cube roots of the first primes.
"""

from __future__ import annotations

from collections.abc import Sequence
from math import isqrt

from revsynth.elaborate.columns import Columns
from revsynth.logic.network import Literal, Network
from revsynth.logic.network_builder import NetworkBuilder
from tests.naive_networks import NaiveBuilder

Word = list[Literal]
BITS = 32
MASK = (1 << BITS) - 1


def primes(count: int) -> list[int]:
    """The first primes."""
    found: list[int] = []
    number = 2
    while len(found) < count:
        if all(number % prime for prime in found):
            found.append(number)
        number += 1
    return found


def cube_root(number: int) -> int:
    """The greatest integer whose cube is at most the number, by Newton's method."""
    root = 1 << -(-number.bit_length() // 3)
    while root**3 > number:
        root = (2 * root + number // root**2) // 3
    return root


ROUND_CONSTANTS = [cube_root(prime << 96) & MASK for prime in primes(64)]
INITIAL = [isqrt(prime << 64) & MASK for prime in primes(8)]


class Operations:
    """The operations of SHA-256 on words of literals, the least significant bit first."""

    def __init__(self, builder: NetworkBuilder) -> None:
        self.builder = builder

    def sum(self, words: Sequence[Word], constant: int = 0) -> Word:
        """The sum modulo 2**32: all of it column by column."""
        columns = Columns(self.builder, BITS, constant)
        for word in words:
            columns.add_word(word)
        return columns.bits()

    def choose(self, x: Word, y: Word, z: Word) -> Word:
        """y where x is 1, else z."""
        return [self.builder.mux(*bits) for bits in zip(x, y, z, strict=True)]

    def majority(self, x: Word, y: Word, z: Word) -> Word:
        """What at least two of three say."""
        return [self.builder.majority(*bits) for bits in zip(x, y, z, strict=True)]

    def sigma(self, x: Word, rotations: Sequence[int], shift: int | None = None) -> Word:
        """The exclusive or of x rotated to the right, and shifted to the right where a shift is given."""
        parts = [x[by:] + x[:by] for by in rotations]
        if shift is not None:
            parts.append(x[shift:] + [0] * shift)
        one, other, third = parts
        xor = self.builder.xor
        return [xor(xor(a, b), c) for a, b, c in zip(one, other, third, strict=True)]


class NaiveOperations(Operations):
    """The same without a thought: sums two by two with naive carries."""

    builder: NaiveBuilder

    def sum(self, words: Sequence[Word], constant: int = 0) -> Word:
        """One ripple addition after the other."""
        total, *others = [*words, constant_word(constant)] if constant else words
        for word in others:
            total = self.builder.sum(total, word)[:BITS]
        return total

    def majority(self, x: Word, y: Word, z: Word) -> Word:
        """Three ANDs, and an OR of three."""
        or_, and_ = self.builder.or_, self.builder.and_
        return [or_(or_(and_(a, b), and_(a, c)), and_(b, c)) for a, b, c in zip(x, y, z, strict=True)]


def constant_word(value: int) -> Word:
    """A constant as literals."""
    return [value >> place & 1 for place in range(BITS)]


def build(rounds: int = 64) -> Network:
    """The network of one block, after so many rounds, with column compression."""
    return _block(Operations(NetworkBuilder(16 * BITS)), rounds)


def build_naive(rounds: int = 64) -> Network:
    """The same with exclusive ors from three ANDs and ripple additions."""
    return _block(NaiveOperations(NaiveBuilder(16 * BITS)), rounds)


def _block(on: Operations, rounds: int) -> Network:
    builder = on.builder
    schedule = [[builder.input(BITS * word + bit) for bit in range(BITS)] for word in range(16)]
    for at in range(16, rounds):
        schedule.append(
            on.sum(
                [
                    on.sigma(schedule[at - 2], (17, 19), 10),
                    schedule[at - 7],
                    on.sigma(schedule[at - 15], (7, 18), 3),
                    schedule[at - 16],
                ]
            )
        )
    start = [constant_word(value) for value in INITIAL]
    a, b, c, d, e, f, g, h = start
    for at in range(rounds):
        parts = [h, on.sigma(e, (6, 11, 25)), on.choose(e, f, g), schedule[at]]
        first = on.sum(parts, ROUND_CONSTANTS[at])
        second = [on.sigma(a, (2, 13, 22)), on.majority(a, b, c)]
        a, b, c, d, e, f, g, h = on.sum([first, *second]), a, b, c, on.sum([d, first]), e, f, g
    state = zip((a, b, c, d, e, f, g, h), start, strict=True)
    return builder.build([bit for new, old in state for bit in on.sum([new, old])])
