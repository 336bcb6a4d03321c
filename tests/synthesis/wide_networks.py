"""Networks for the planner's tests, built straight: sums, products, clauses, and SHA-256."""

from __future__ import annotations

import random
from collections.abc import Sequence
from functools import cache

from revsynth.logic.network import FALSE, Literal, Network
from revsynth.logic.network_builder import NetworkBuilder

Word = list[Literal]
MASK = (1 << 32) - 1


def sum_equals(bits: int, value: int) -> Network:
    """(a + b) % 2**bits == value with carries from the digits of `value`: 2 bits - 2 ANDs.

    Where the sum of bit i is as wanted, the next carry is a & b or a | b, by that bit of the value.
    """
    b = NetworkBuilder(2 * bits)
    carry, terms = FALSE, []
    for i in range(bits):
        x, y = b.input(i), b.input(bits + i)
        following = b.or_(x, y) if not value >> i & 1 else b.and_(x, y)
        terms.append(b.parity([x, y, carry]) ^ 1 ^ (value >> i & 1))
        carry = following if i + 1 < bits else FALSE
    result = terms[0]
    for term in terms[1:]:
        result = b.and_(result, term)
    return b.build([result])


def add(b: NetworkBuilder, one: Sequence[Literal], other: Sequence[Literal], carry_out: bool = False) -> Word:
    """The sum of two words of one length, one AND a bit."""
    total, carry = [], FALSE
    for i, (x, y) in enumerate(zip(one, other, strict=True)):
        total.append(b.xor(b.xor(x, y), carry))
        if carry_out or i + 1 < len(one):
            carry = b.majority(x, y, carry)
    return [*total, carry] if carry_out else total


def adder(bits: int) -> Network:
    """a + b with carry."""
    b = NetworkBuilder(2 * bits)
    return b.build(add(b, _word(b, 0, bits), _word(b, bits, bits), carry_out=True))


def _word(b: NetworkBuilder, begin: int, bits: int) -> Word:
    return [b.input(i) for i in range(begin, begin + bits)]


def product_bits(b: NetworkBuilder, one: Sequence[Literal], other: Sequence[Literal]) -> Word:
    """All bits of the product, the shifted rows added one after the other."""
    total = [b.and_(x, other[0]) for x in one] + [FALSE]
    done: Word = []
    for bit in other[1:]:
        done.append(total[0])
        row = [b.and_(x, bit) for x in one]
        total = add(b, total[1:], row, carry_out=True)
    return done + total


def product(bits: int) -> Network:
    """a * b."""
    b = NetworkBuilder(2 * bits)
    return b.build(product_bits(b, _word(b, 0, bits), _word(b, bits, bits)))


def product_equals(bits: int, value: int) -> Network:
    """a * b == value."""
    b = NetworkBuilder(2 * bits)
    total = product_bits(b, _word(b, 0, bits), _word(b, bits, bits))
    result = total[0] ^ 1 ^ (value & 1)
    for i, bit in enumerate(total[1:], start=1):
        result = b.and_(result, bit ^ 1 ^ (value >> i & 1))
    return b.build([result])


def planted_clauses(variables: int, clauses: int, seed: int) -> tuple[list[tuple[int, ...]], list[int]]:
    """Random clauses of three literals (v + 1 or -(v + 1)) that all hold at the assignment returned."""
    draw = random.Random(seed)
    planted = [draw.randrange(2) for _ in range(variables)]
    found: list[tuple[int, ...]] = []
    while len(found) < clauses:
        clause = tuple((v + 1) * draw.choice((1, -1)) for v in sorted(draw.sample(range(variables), 3)))
        if any(planted[abs(x) - 1] == (x > 0) for x in clause):
            found.append(clause)
    return found, planted


def factored_clauses(variables: int, clauses: Sequence[tuple[int, ...]]) -> Network:
    """All clauses hold: the variable with most occurrences chooses between what is left of its clauses.

    Both polarities of the variable share one AND.
    """
    b = NetworkBuilder(variables)

    def build(rest: frozenset[frozenset[int]]) -> Literal:
        if not rest:
            return FALSE ^ 1
        if frozenset() in rest:
            return FALSE
        rest = frozenset(c for c in rest if not any(d < c for d in rest))
        for clause in sorted(rest, key=sorted):
            if len(clause) == 1:
                (x,) = clause
                literal = b.input(abs(x) - 1) ^ (x < 0)
                return b.and_(literal, build(frozenset(c - {-x} for c in rest if x not in c)))
        counts: dict[int, int] = {}
        for clause in rest:
            for x in clause:
                counts[abs(x)] = counts.get(abs(x), 0) + 1
        v = min(counts, key=lambda x: (-counts[x], x))
        with_it = frozenset(c - {-v} for c in rest if -v in c)
        without = frozenset(c - {v} for c in rest if v in c)
        others = frozenset(c for c in rest if v not in c and -v not in c)
        return b.and_(b.mux(b.input(v - 1), build(with_it), build(without)), build(others))

    return b.build([build(frozenset(frozenset(c) for c in clauses))])


@cache
def _sha_constants() -> tuple[list[int], list[int]]:
    """(round constants, initial value): first 32 bits of the fractions of roots of primes (FIPS 180-4)."""
    primes: list[int] = []
    number = 2
    while len(primes) < 64:
        if all(number % p for p in primes):
            primes.append(number)
        number += 1

    def root(value: int, power: int) -> int:
        low, high = 0, value + 1
        while high - low > 1:
            middle = (low + high) // 2
            low, high = (middle, high) if middle**power <= value else (low, middle)
        return low

    cubes = [root(p << 96, 3) & MASK for p in primes]
    squares = [root(p << 64, 2) & MASK for p in primes[:8]]
    return cubes, squares


def sha256(rounds: int = 64, words: int = 8) -> Network:
    """The first words of the digest of one block (FIPS 180-4); input 32 w + i is bit i of its word w."""
    constants, start = _sha_constants()
    b = NetworkBuilder(512)

    def constant(value: int) -> Word:
        return [value >> i & 1 for i in range(32)]

    def mixed(word: Word, turns: Sequence[int], shift: int | None = None) -> Word:
        bits = []
        for i in range(32):
            parts = [word[(i + t) % 32] for t in turns]
            if shift is not None and i + shift < 32:
                parts.append(word[i + shift])
            bits.append(b.parity(parts))
        return bits

    def total(*terms: Word) -> Word:
        """Column by column with full adders (Wallace, IEEE Trans. Electronic Computers, 1964)."""
        columns = [[term[i] for term in terms] for i in range(32)]
        for i, column in enumerate(columns):
            while len(column) > 1:
                x, y = column.pop(0), column.pop(0)
                z = column.pop(0) if column else FALSE
                column.append(b.xor(b.xor(x, y), z))
                if i < 31:
                    columns[i + 1].append(b.majority(x, y, z))
        return [column[0] for column in columns]

    schedule = [_word(b, 32 * w, 32) for w in range(16)]
    for t in range(16, rounds):
        schedule.append(
            total(
                mixed(schedule[t - 2], (17, 19), 10), schedule[t - 7],
                mixed(schedule[t - 15], (7, 18), 3), schedule[t - 16],
            )
        )  # fmt: skip
    state = [constant(value) for value in start]
    for t in range(rounds):
        a, bb, c, d, e, f, g, h = state
        choice = [b.mux(x, y, z) for x, y, z in zip(e, f, g, strict=True)]
        most = [b.majority(x, y, z) for x, y, z in zip(a, bb, c, strict=True)]
        first = total(h, mixed(e, (6, 11, 25)), choice, constant(constants[t]), schedule[t])
        second = total(mixed(a, (2, 13, 22)), most)
        state = [total(first, second), a, bb, c, total(d, first), e, f, g]
    outputs: Word = []
    for value, word in zip(start[:words], state, strict=False):
        outputs.extend(total(constant(value), word))
    return b.build(outputs)


def sha256_first_word_is(value: int, rounds: int = 64) -> Network:
    """Whether the first word of the digest has that value."""
    digest = sha256(rounds, 1)
    b = NetworkBuilder(512)
    word = b.copy(digest, [b.input(i) for i in range(512)])
    return b.build([b.all_of(bit ^ 1 ^ (value >> i & 1) for i, bit in enumerate(word))])
