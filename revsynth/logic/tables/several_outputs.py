"""Several outputs from bare tables: some random products first, then one sum of outputs after the other.

Any exclusive sum of missing outputs is as good a target as a single one, and all products made for one serve
the next. Source: D. Goudarzi, M. Rivain, CHES 2016 (the basis update); the choice among all sums of outputs
is this project's own.
"""

from __future__ import annotations

from collections.abc import Sequence

from revsynth.logic.product_chain import ProductChain, Sum, sum_table
from revsynth.logic.tables.peeling import Level
from revsynth.logic.tables.product_search import Echelon, ProductSearch, Table, hits_expected
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
        targets = _within_reach(signals, targets, bits)
        if not targets and extra == 0:
            return None
        step: Sequence[tuple[Sum, Sum]] | None
        if targets:
            step = _step(signals, targets, bits, len(products), search, level, most, structured=extra == 0)
            if step is None:
                return None
            for left, right in step:
                signals.append(sum_table(signals, left) & sum_table(signals, right))
        else:
            step = search.extra_products(signals, 1)
        products.extend(step)
    return None


def _within_reach(signals: Sequence[Table], targets: list[Table], bits: int) -> list[Table]:
    """The targets that are sums of products of two signals at all."""
    rows: dict[int, Table] = {}

    def residue(table: Table) -> Table:
        while table:
            row = rows.get(table.bit_length())
            if row is None:
                break
            table ^= row
        return table

    for place, one in enumerate(signals):
        for other in signals[: place + 1]:
            rest = residue(one & other)
            if rest:
                rows[rest.bit_length()] = rest
                if len(rows) == bits:
                    return targets
    return [table for table in targets if not residue(table)]


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
    targets: list[Table],
    bits: int,
    ands: int,
    search: ProductSearch,
    level: Level,
    most: int,
    structured: bool,
) -> tuple[tuple[Sum, Sum], ...] | None:
    """The products that bring one more sum of outputs into the span."""
    for count in range(1, most - ands + 1):
        tries = min(level.work.tries, 1 << min(len(signals) - 1, 40)) if search.compiled else 1
        hope = hits_expected(bits, len(signals), count, ands, len(targets), level.work.bases * tries)
        if hope < level.hope and not (structured and count <= 2):
            continue
        found = search.find(signals, targets, bits, count, level.work)
        if found is not None:
            return found.products
    return None
