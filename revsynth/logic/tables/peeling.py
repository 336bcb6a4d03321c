"""One output from its bare table, by peeling off one affine form after the other.

For an affine form l, f(y, l) = g(y') + l h(y') where y' = y + v l with any v: g is f on l = 0, the same for
all 2^(n-1) choices of v, while h(z) = f(z + v, 1) + g(z) is another function for each. A network of g serves
all of them, and it is enough that one h is a sum of the signals of this network and of few products of them.
g is peeled in turn, down to the affine classes of five inputs.

The decomposition is Shannon's with a change of coordinates; the common network of g and the choice among the
shears are this project's own.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from revsynth.logic.affine_classes import and_counts, chain_of
from revsynth.logic.product_chain import ProductChain, Sum, substituted
from revsynth.logic.tables.product_search import Found, ProductSearch, Table, Work, hits_expected, words_of

MOST_INPUTS = 12
_TARGETS = 256
"""Of more shears, so many are drawn."""
Bits = NDArray[np.uint8]


@dataclass(frozen=True)
class Level:
    """How much work: `forms` affine forms tried at each number of inputs above 6 (fewer on the way down),
    `kept` networks of g finished for one f, `work` a search, `hope` the least logarithm of the
    successes expected for which a search is worth while.
    """

    forms: int
    kept: int
    work: Work
    hope: float


@dataclass(frozen=True)
class Peeled:
    """f(x) = g(y') + (l + w) h(y'): the form l as a mask of inputs, w, and the two cofactors."""

    form: int
    order: int
    pivot: int
    inside: Bits
    outside: Bits


def peel(table: Table, inputs: int, search: ProductSearch, level: Level) -> ProductChain:
    """A chain for one function with few products, checked on all inputs.

    Raises ValueError for more than MOST_INPUTS inputs. Deterministic for the search's seed and the level.
    """
    if inputs > MOST_INPUTS:
        raise ValueError(f"tables of up to {MOST_INPUTS} inputs are peeled, not {inputs}")
    if inputs <= 5:
        return chain_of(inputs, table)
    chain = _peel_six(table, search, level) if inputs == 6 else _peel_more(table, inputs, search, level)
    if chain.tables() != [table]:
        raise AssertionError("a peeled chain computes another function")
    return chain


def _peel_six(table: Table, search: ProductSearch, level: Level) -> ProductChain:
    """All 126 cofactors by their fewest ANDs; the cheapest first."""
    values = bits_of(table, 6)
    peeled = [split(values, 6, form, order) for form in range(1, 64) for order in (0, 1)]
    inside = words_of([table_of(p.inside) for p in peeled], 32)[:, 0].astype(np.uint32)
    outside = words_of([table_of(p.outside) for p in peeled], 32)[:, 0].astype(np.uint32)
    counts = and_counts(5, inside)
    best = _both_apart(peeled, counts, and_counts(5, inside ^ outside))
    order = np.argsort(counts, kind="stable").tolist()
    for total in range(int(counts.min()) + 1, len(best.products)):
        for place in order[: level.forms * 8]:
            products = total - 1 - int(counts[place])
            if products < 0:
                break
            hope = hits_expected(32, 6 + int(counts[place]), products, int(counts[place]), 32, 1 << 8)
            if hope < level.hope - 4:
                continue
            for variant in range(1 if products > 1 else level.kept):
                inner = chain_of(5, int(inside[place]), 1 + variant)
                chain = _finish(peeled[place], 6, inner, [(0, products)], search, level)
                if chain is not None:
                    return chain
    return best


def _both_apart(peeled: list[Peeled], first: NDArray[np.uint8], second: NDArray[np.uint8]) -> ProductChain:
    """Without sharing: g and h (at shear 0) each with fewest ANDs."""
    place = int(np.argmin(first + second))
    here = peeled[place]
    g = chain_of(5, table_of(here.inside))
    h = chain_of(5, table_of(here.inside ^ here.outside))
    moved = substituted(h, 5, [2 << i for i in range(5)], after=len(g.products))
    both = ProductChain(5, g.products + moved.products, (g.outputs[0], moved.outputs[0]))
    return _joined(here, 6, 0, both)


def _peel_more(table: Table, inputs: int, search: ProductSearch, level: Level) -> ProductChain:
    values = bits_of(table, inputs)
    best: ProductChain | None = None
    inner_level = Level(max(1, level.forms // 2), level.kept, level.work, level.hope)
    found: list[tuple[ProductChain, Peeled]] = []
    for number in search.sample(level.forms, 2 * ((1 << inputs) - 1)):
        peeled = split(values, inputs, 1 + number // 2, number % 2)
        found.append((peel(table_of(peeled.inside), inputs - 1, search, inner_level), peeled))
    found.sort(key=lambda pair: len(pair[0].products))
    for inner, peeled in found[: level.kept]:
        most = 1 << inputs if best is None else len(best.products) - 1
        plans = _plans(inputs, inner, most, level, search.compiled)
        chain = _finish(peeled, inputs, inner, plans, search, level)
        if chain is not None and (best is None or len(chain.products) < len(best.products)):
            best = chain
    if best is None:
        raise AssertionError("enough products of enough signals reach every function")
    return best


def _plans(
    inputs: int, inner: ProductChain, most: int, level: Level, compiled: bool
) -> Iterator[tuple[int, int]]:
    """(extra random products, products) by rising sum, as far as there is hope; `most` ANDs in all."""
    ands = len(inner.products)
    bits = 1 << (inputs - 1)
    targets = min(_TARGETS, bits)
    for together in range(most - ands):
        for extra in range(min(3, together + 1)):
            signals = inner.signals + extra
            tries = min(level.work.tries, 1 << (signals - 1)) if compiled else 1
            draws = level.work.bases * tries
            hope = hits_expected(bits, signals, together - extra, ands + extra, targets, draws)
            if hope >= level.hope:
                yield extra, together - extra


def _finish(
    peeled: Peeled,
    inputs: int,
    inner: ProductChain,
    plans: Iterator[tuple[int, int]] | list[tuple[int, int]],
    search: ProductSearch,
    level: Level,
) -> ProductChain | None:
    """f by the chain of g, with the first plan that meets some h."""
    bits = 1 << (inputs - 1)
    shears = search.sample(_TARGETS, bits) if bits > _TARGETS else list(range(bits))
    place = np.arange(bits)
    targets = [table_of(peeled.inside ^ peeled.outside[place ^ v]) for v in shears]
    tables = inner.signal_tables()
    for extra, products in plans:
        rounds = 4 if extra else 1
        work = Work(max(1, level.work.bases // rounds), level.work.tries)
        for _ in range(rounds):
            signals = list(tables)
            added = search.extra_products(signals, extra)
            found = search.find(signals, targets, bits, products, work)
            if found is not None:
                return _assembled(peeled, inputs, inner, added, found, shears[found.target])
    return None


def _assembled(
    peeled: Peeled, inputs: int, inner: ProductChain, added: list[tuple[Sum, Sum]], found: Found, shear: int
) -> ProductChain:
    products = (*inner.products, *added, *found.products)
    first = inner.signals + len(added)
    h = found.plain
    for k in range(len(found.products)):
        h ^= 1 << (first + k)
    both = ProductChain(inputs - 1, products, (inner.outputs[0], h))
    return _joined(peeled, inputs, shear, both)


def _joined(peeled: Peeled, inputs: int, shear: int, both: ProductChain) -> ProductChain:
    """g(y') + (l + w) h(y') from a chain of g and h over y' = y + shear (l + w)."""
    form = peeled.form << 1 | peeled.order
    others = [i for i in range(inputs) if i != peeled.pivot]
    images = [(2 << i) ^ (form if shear >> place & 1 else 0) for place, i in enumerate(others)]
    moved = substituted(both, inputs, images)
    products = (*moved.products, (form, moved.outputs[1]))
    output = moved.outputs[0] ^ 1 << (inputs + len(products))
    return ProductChain(inputs, products, (output,)).without_dead_products()


def split(values: Bits, inputs: int, form: int, order: int) -> Peeled:
    """The cofactors where the form is `order` (inside) and where not, over the inputs but its highest."""
    pivot = form.bit_length() - 1
    low = (1 << pivot) - 1
    y = np.arange(1 << (inputs - 1))
    x = (y & low) | (y & ~low) << 1
    here = (np.bitwise_count(x & form).astype(np.int64) & 1) ^ order
    inside, outside = values[x | here << pivot], values[x | (here ^ 1) << pivot]
    return Peeled(form, order, pivot, inside, outside)


def bits_of(table: Table, inputs: int) -> Bits:
    """uint8 (2^inputs,): the values of a table, input 0 first."""
    length = max(1, (1 << inputs) // 8)
    raw = np.frombuffer(table.to_bytes(length, "little"), dtype=np.uint8)
    return np.unpackbits(raw, bitorder="little", count=1 << inputs)


def table_of(values: Bits) -> Table:
    """The integer again."""
    return int.from_bytes(np.packbits(values, bitorder="little").tobytes(), "little")
