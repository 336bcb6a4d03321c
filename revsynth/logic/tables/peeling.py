"""One output from its bare table, by peeling off one affine form after the other.

For an affine form l, f(y, l) = g(y') + l h(y') where y' = y + v l with any v: g is f on l = 0, the same for
all 2^(n-1) choices of v, while h(z) = f(z + v, 1) + g(z) is another function for each. A network of g serves
all of them, and it is enough that one h is a sum of the signals of this network and of few products of them.
g is peeled in turn, down to the affine classes of five inputs.

The decomposition is Shannon's with a change of coordinates; the common network of g and the choice among the
shears are this project's own.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from revsynth.logic.affine_classes import and_counts, chain_of
from revsynth.logic.product_chain import ProductChain, Sum, substituted
from revsynth.logic.tables.product_search import (
    Found,
    ProductSearch,
    Table,
    Work,
    hits_expected,
    within_reach,
    words_of,
)

MOST_INPUTS = 12
_TARGETS = 256
"""Of more shears, so many are drawn."""
_FEW = 5
"""A function of six inputs with so few ANDs is as good as can be hoped for; most need more than four."""
_SPARSE = 2
"""With more ANDs in g, an h that needs none beyond them is too rare to look for."""
Bits = NDArray[np.uint8]


@dataclass(frozen=True)
class Level:
    """How much work: cofactors looked at with 7, 8, ... inputs (the last for all beyond) and with 6.

    kept: networks of g finished for one f, and circuits tried for one g of five inputs; rounds: draws of
    one or two random products for a network; work: that of one search; hope: the least logarithm of the
    successes expected for which a search is worth while.
    """

    forms: tuple[int, ...]
    places: int
    kept: int
    rounds: int
    work: Work
    hope: float

    def forms_of(self, inputs: int) -> int:
        """Cofactors looked at with so many inputs, 7 or more."""
        return self.forms[min(inputs - 7, len(self.forms) - 1)]


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
        for place in order[: level.places]:
            products = total - 1 - int(counts[place])
            if products < 0:
                break
            if products == 0 and counts[place] > _SPARSE:
                continue
            for variant in range(1 if products > 1 else level.kept):
                inner = chain_of(5, int(inside[place]), 1 + variant)
                chain = _finish(peeled[place], 6, inner, products + 1, search, level, least=products)
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
    found: list[tuple[ProductChain, Peeled]] = []
    good = 0
    for number in search.sample(level.forms_of(inputs), 2 * ((1 << inputs) - 1)):
        peeled = split(values, inputs, 1 + number // 2, number % 2)
        inner = peel(table_of(peeled.inside), inputs - 1, search, level)
        found.append((inner, peeled))
        good += inputs == 7 and len(inner.products) <= _FEW
        if good == level.kept:
            break
    found.sort(key=lambda pair: len(pair[0].products))
    best: ProductChain | None = None
    for inner, peeled in found[: level.kept]:
        most = (1 << inputs) if best is None else len(best.products) - 1
        best = _finish(peeled, inputs, inner, most - len(inner.products), search, level) or best
    if best is None:
        raise AssertionError("enough products of enough signals reach every function")
    return best


@dataclass(frozen=True)
class _Stage:
    """The signals of g's chain and of some random products, and the targets within their reach."""

    signals: list[Table]
    added: list[tuple[Sum, Sum]]
    rank: int
    near: Sequence[Table]


def _finish(
    peeled: Peeled,
    inputs: int,
    inner: ProductChain,
    limit: int,
    search: ProductSearch,
    level: Level,
    least: int = 0,
) -> ProductChain | None:
    """f by the chain of g and, beyond it and the last product, `least` up to fewer than `limit` products.

    Some of these are random ones, `extra` of them, the others made to measure. None where no h was met.
    """
    bits = 1 << (inputs - 1)
    shears = search.sample(_TARGETS, bits) if bits > _TARGETS else list(range(bits))
    place = np.arange(bits)
    targets = [table_of(peeled.inside ^ peeled.outside[place ^ v]) for v in shears]
    tables = inner.signal_tables()
    stages: list[list[_Stage]] = []
    for together in range(least, limit):
        for extra in range(together + 1):
            if extra == len(stages):
                if extra > 1 and all(stage.near for stage in stages[-2]):
                    break
                rounds = level.rounds if 0 < extra < 3 else 1
                stages.append([_stage(tables, targets, bits, extra, search) for _ in range(rounds)])
            for stage in stages[extra]:
                found = _attempt(stage, bits, together - extra, search, level)
                if found is not None:
                    shear = shears[targets.index(stage.near[found.target])]
                    return _assembled(peeled, inputs, inner, stage.added, found, shear)
    return None


def _stage(tables: list[Table], targets: list[Table], bits: int, extra: int, search: ProductSearch) -> _Stage:
    signals = list(tables)
    added = search.extra_products(signals, extra)
    return _Stage(signals, added, *within_reach(signals, targets, bits))


def _attempt(stage: _Stage, bits: int, products: int, search: ProductSearch, level: Level) -> Found | None:
    """A search where it promises enough."""
    if not stage.near:
        return None
    work = level.work
    tries = min(work.tries, 1 << (len(stage.signals) - 1)) if search.compiled else 1
    draws = work.bases * tries
    if hits_expected(stage.rank, len(stage.signals), products, len(stage.near), draws) < level.hope:
        return None
    return search.find(stage.signals, stage.near, bits, products, work)


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
