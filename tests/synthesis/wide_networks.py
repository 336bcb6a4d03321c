"""Networks for the planner's tests, built straight: sums, products, clauses, a hash predicate."""

from __future__ import annotations

import random
from collections.abc import Sequence

from revsynth.logic.network import FALSE, Literal, Network
from revsynth.logic.network_builder import NetworkBuilder
from tests import sha256_network

Word = list[Literal]


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


def sha256_first_word_is(value: int, rounds: int = 64) -> Network:
    """Whether the first word of the digest of one block has that value (FIPS 180-4)."""
    digest = sha256_network.build(rounds).select(range(32))
    b = NetworkBuilder(512)
    word = b.copy(digest, [b.input(i) for i in range(512)])
    return b.build([b.all_of(bit ^ 1 ^ (value >> i & 1) for i, bit in enumerate(word))])
