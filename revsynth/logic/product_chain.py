"""Chains of products: functions as exclusive sums of inputs and of products of earlier sums.

The form in which fewest ANDs are searched for: only the products cost, sums are free. A *signal* is the
constant 1 (number 0), an input (1 + i) or a product (1 + inputs + k); a *sum* is an integer whose bit s says
whether signal s takes part. Product k multiplies two sums of signals below it.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from revsynth.logic.network import FALSE, TRUE, Literal, Network
from revsynth.logic.network_builder import NetworkBuilder

Sum = int
"""Bit s: signal s takes part."""


@dataclass(frozen=True)
class ProductChain:
    """products: the two sums of each; outputs: sums over all signals, the least significant bit first."""

    inputs: int
    products: tuple[tuple[Sum, Sum], ...]
    outputs: tuple[Sum, ...]

    @property
    def signals(self) -> int:
        """Constant, inputs and products."""
        return 1 + self.inputs + len(self.products)

    @property
    def weight(self) -> int:
        """Signals named in all sums together: a rough measure of the XORs."""
        pairs = sum(a.bit_count() + b.bit_count() for a, b in self.products)
        return pairs + sum(output.bit_count() for output in self.outputs)

    def signal_tables(self) -> list[int]:
        """The truth table of every signal as an integer: bit x is the value at input x."""
        tables = [(1 << (1 << self.inputs)) - 1, *(input_table(self.inputs, i) for i in range(self.inputs))]
        for left, right in self.products:
            tables.append(sum_table(tables, left) & sum_table(tables, right))
        return tables

    def tables(self) -> list[int]:
        """The truth table of every output as an integer, bit x the value at input x."""
        signals = self.signal_tables()
        return [sum_table(signals, output) for output in self.outputs]

    def without_dead_products(self) -> ProductChain:
        """The same outputs without products that no output needs."""
        first = 1 + self.inputs
        needed = 0
        for output in self.outputs:
            needed |= output
        for k in range(len(self.products) - 1, -1, -1):
            if needed >> (first + k) & 1:
                needed |= self.products[k][0] | self.products[k][1]
        kept = [k for k in range(len(self.products)) if needed >> (first + k) & 1]
        if len(kept) == len(self.products):
            return self
        images = [1 << s for s in range(first)] + [0] * len(self.products)
        for place, k in enumerate(kept):
            images[first + k] = 1 << (first + place)
        products = tuple(
            (mapped(self.products[k][0], images), mapped(self.products[k][1], images)) for k in kept
        )
        return ProductChain(self.inputs, products, tuple(mapped(o, images) for o in self.outputs))

    def network(self) -> Network:
        """The AND-XOR network: as many ANDs as products (fewer where two are equal), common XORs shared."""
        return to_network(self)


def input_table(inputs: int, index: int) -> int:
    """The truth table of input bit `index`: bit x is bit `index` of x."""
    block = 1 << index
    table = ((1 << block) - 1) << block
    width = 2 * block
    while width < 1 << inputs:
        table |= table << width
        width *= 2
    return table


def sum_table(tables: Sequence[int], terms: Sum) -> int:
    """The exclusive sum of the tables that take part."""
    total = 0
    while terms:
        low = terms & -terms
        total ^= tables[low.bit_length() - 1]
        terms ^= low
    return total


def mapped(terms: Sum, images: Sequence[Sum]) -> Sum:
    """The sum with every signal replaced by a sum."""
    total = 0
    while terms:
        low = terms & -terms
        total ^= images[low.bit_length() - 1]
        terms ^= low
    return total


def substituted(chain: ProductChain, inputs: int, images: Sequence[Sum], after: int = 0) -> ProductChain:
    """The chain with input i replaced by the sum images[i] over the signals of a chain of `inputs` inputs.

    With `after`, the chain follows `after` products of the other one, and the images may name these.
    """
    first = 1 + inputs + after
    places = [1, *images, *(1 << (first + k) for k in range(len(chain.products)))]
    products = tuple((mapped(a, places), mapped(b, places)) for a, b in chain.products)
    return ProductChain(inputs, products, tuple(mapped(o, places) for o in chain.outputs))


def to_network(chain: ProductChain) -> Network:
    """A network with the chain's products as its ANDs.

    XORs are shared greedily: the pair of signals that most of the waiting sums have in common becomes a
    signal of its own, the first pair at a tie, as long as some pair is wanted twice. Source: C. Paar,
    "Optimized arithmetic for Reed-Solomon encoders", ISIT 1997.
    """
    builder = NetworkBuilder(chain.inputs)
    sums = [terms for pair in chain.products for terms in pair] + list(chain.outputs)
    pairs, shared = _share(sums, chain.signals)
    literals: dict[int, Literal] = {0: TRUE}
    literals.update({1 + i: builder.input(i) for i in range(chain.inputs)})

    def literal(signal: int) -> Literal:
        waiting = [signal]
        while waiting:
            top = waiting[-1]
            if top in literals:
                waiting.pop()
                continue
            a, b = pairs[top]
            missing = [s for s in (a, b) if s not in literals]
            if missing:
                waiting.extend(missing)
            else:
                literals[top] = builder.xor(literals[a], literals[b])
        return literals[signal]

    def total(terms: Sum) -> Literal:
        return builder.parity([literal(s) for s in _members(terms)]) if terms else FALSE

    first = 1 + chain.inputs
    for k in range(len(chain.products)):
        literals[first + k] = builder.and_(total(shared[2 * k]), total(shared[2 * k + 1]))
    outputs = [total(terms) for terms in shared[2 * len(chain.products) :]]
    return builder.build(outputs)


def _share(sums: list[Sum], signals: int) -> tuple[dict[int, tuple[int, int]], list[Sum]]:
    """New signals (from number `signals` on) as pairs of signals, and the sums rewritten with them."""
    rows = list(sums)
    counts: dict[tuple[int, int], int] = {}

    def count(members: list[int], signal: int, change: int) -> None:
        for other in members:
            if other != signal and other:
                key = (min(other, signal), max(other, signal))
                counts[key] = counts.get(key, 0) + change

    for terms in rows:
        members = [s for s in _members(terms) if s]
        for place, signal in enumerate(members):
            count(members[:place], signal, 1)
    pairs: dict[int, tuple[int, int]] = {}
    while counts:
        best = max(counts.items(), key=lambda item: (item[1], -item[0][0], -item[0][1]))
        if best[1] < 2:
            break
        a, b = best[0]
        new = signals + len(pairs)
        pairs[new] = (a, b)
        both = 1 << a | 1 << b
        for index, terms in enumerate(rows):
            if terms & both == both:
                members = _members(terms)
                count(members, a, -1)
                count([s for s in members if s != a], b, -1)
                rows[index] = terms ^ both | 1 << new
                count(_members(rows[index]), new, 1)
        counts.pop((a, b), None)
    return pairs, rows


def _members(terms: Sum) -> list[int]:
    found = []
    while terms:
        low = terms & -terms
        found.append(low.bit_length() - 1)
        terms ^= low
    return found
