"""Several outputs from bare tables: some random products first, then one sum of outputs after the other.

Any exclusive sum of missing outputs is as good a target as a single one, and all products made for one serve
the next. Source: D. Goudarzi, M. Rivain, CHES 2016 (the basis update); the choice among all sums of outputs
is this project's own.
"""

from __future__ import annotations

from collections.abc import Sequence

from revsynth.logic.product_chain import ProductChain, Sum, sum_table
from revsynth.logic.tables.peeling import Level
from revsynth.logic.tables.product_search import Echelon, ProductSearch, Table, hits_expected, within_reach
from revsynth.logic.tables.small_chains import chain_with

_MOST_TARGETS = 255


def start_size(inputs: int, bits: int) -> int:
    """How many random products make all products of two signals span nearly everything."""
    extra = 0
    while 1 + (inputs + extra) * (inputs + extra + 1) // 2 - 3 * extra < bits - inputs + 2:
        extra += 1
    return extra


def several_outputs(
    tables: Sequence[Table],
    signals: Sequence[Table],
    bits: int,
    search: ProductSearch,
    level: Level,
    extra: int,
    most: int,
) -> ProductChain | None:
    """A chain for all outputs that begins with `extra` random products; None if it needs more than `most`.

    signals: the tables of the constant 1 and of the inputs, `bits` bits each, as the outputs' tables have;
    these may be all inputs or only those at which the outputs are fixed. With extra = 0 one and two products
    are tried at every step whatever the odds, which finds structure where there is some.
    """
    inputs = len(signals) - 1
    signals = list(signals)
    products: list[tuple[Sum, Sum]] = search.extra_products(signals, extra)
    while len(products) <= most:
        targets = _targets(signals, tables, bits, search)
        if not targets:
            return chain_with(inputs, signals, products, tables, bits)
        rank, near = within_reach(signals, targets, bits)
        if not near and extra == 0:
            return None
        step: Sequence[tuple[Sum, Sum]] | None
        if near:
            left = most - len(products)
            step = _step(signals, near, bits, rank, search, level, left, structured=extra == 0)
            if step is None:
                return None
            for left, right in step:
                signals.append(sum_table(signals, left) & sum_table(signals, right))
        else:
            step = search.extra_products(signals, 1)
        products.extend(step)
    return None


def _targets(
    signals: Sequence[Table], tables: Sequence[Table], bits: int, search: ProductSearch
) -> list[Table]:
    """Sums of the outputs that are independent of the signals and each other: all, or some at random."""
    echelon = Echelon(bits)
    for signal in signals:
        echelon.insert(signal)
    left = [table for table in tables if echelon.insert(table)]
    if len(left) <= 8:
        sums = [0]
        for table in left:
            sums += [table ^ other for other in sums]
        return sums[1:]
    chosen = list(left[:_MOST_TARGETS])
    while len(chosen) < _MOST_TARGETS:
        pattern = search.sum_of(len(left) + 1) >> 1
        total = 0
        for k, table in enumerate(left):
            if pattern >> k & 1:
                total ^= table
        if total:
            chosen.append(total)
    return chosen


def _step(
    signals: list[Table],
    targets: Sequence[Table],
    bits: int,
    rank: int,
    search: ProductSearch,
    level: Level,
    most: int,
    structured: bool,
) -> tuple[tuple[Sum, Sum], ...] | None:
    """At most `most` products that bring one more sum of outputs into the span; rank: see `within_reach`."""
    for count in range(1, most + 1):
        tries = min(level.work.tries, 1 << min(len(signals) - 1, 40)) if search.compiled else 1
        hope = hits_expected(rank, len(signals), count, len(targets), level.work.bases * tries)
        if hope < level.hope and not (structured and count <= 2):
            continue
        found = search.find(signals, targets, bits, count, level.work)
        if found is not None:
            return found.products
    return None
