"""Several outputs of at most five inputs: chains of products with a number of products aimed at.

A product that lies in the span of the missing outputs and the signals may always be taken at once: it makes
one product of any other chain superfluous. So the search branches only where no such product is left, and
each such detour uses up one of the products that may exceed the number of independent outputs. Counting
independent outputs against products is common practice; this search is the project's own.
"""

from __future__ import annotations

from collections.abc import Sequence
from functools import cache

import numpy as np
from numpy.typing import NDArray

from revsynth.logic.product_chain import ProductChain, Sum, input_table
from revsynth.logic.tables.product_search import Echelon, Table

MOST_INPUTS = 5
_MOST_SIGNALS = 11
Residues = NDArray[np.uint32]


class _Budget:
    def __init__(self, nodes: int) -> None:
        self.nodes = nodes


def small_chain(tables: list[Table], inputs: int, nodes: int, most_detours: int = 2) -> ProductChain | None:
    """A chain with as few products as the search meets; None where `nodes` search nodes were not enough.

    The result is least possible where the numbers below were searched through, which `nodes` may prevent.
    """
    if inputs > MOST_INPUTS:
        raise ValueError(f"up to {MOST_INPUTS} inputs, not {inputs}")
    signals = [(1 << (1 << inputs)) - 1, *(input_table(inputs, i) for i in range(inputs))]
    for detours in range(most_detours + 1):
        products = _extend(signals, [], tables, inputs, detours, _Budget(nodes))
        if products is not None:
            everything = ProductChain(inputs, tuple(products), ()).signal_tables()
            return chain_with(inputs, everything, products, tables, 1 << inputs)
    return None


def chain_with(
    inputs: int,
    signals: Sequence[Table],
    products: Sequence[tuple[Sum, Sum]],
    tables: Sequence[Table],
    bits: int,
) -> ProductChain:
    """The chain of these products whose outputs have the tables.

    signals: the tables of constant, inputs and products. ValueError where a table is not in their span.
    """
    echelon = Echelon(bits)
    for signal in signals:
        echelon.insert(signal)
    outputs = []
    for table in tables:
        terms = echelon.express(table)
        if terms is None:
            raise ValueError("the products do not span the outputs")
        outputs.append(terms)
    return ProductChain(inputs, tuple(products), tuple(outputs)).without_dead_products()


def _extend(
    signals: list[Table],
    products: list[tuple[Sum, Sum]],
    tables: list[Table],
    inputs: int,
    detours: int,
    budget: _Budget,
) -> list[tuple[Sum, Sum]] | None:
    """Products that complete a chain with at most `detours` detours; recursion only as deep as these."""
    signals, products = list(signals), list(products)
    while True:
        budget.nodes -= 1
        if budget.nodes < 0 or len(signals) > _MOST_SIGNALS:
            return None
        residues = missing_residues(signals, tables, 1 << inputs)
        if not residues:
            return products
        if len(signals) + len(residues) > _MOST_SIGNALS:
            return None  # each independent output takes a product of its own
        missing = span_of(residues)
        sums = _all_sums(signals)
        reduced = _products_residues(signals, sums)
        helpful = np.flatnonzero(np.isin(reduced, missing))
        if not len(helpful):
            break
        _append(signals, products, sums, int(helpful[0]))
    if detours == 0:
        return None
    kept, first = np.unique(reduced, return_index=True)
    for place in np.sort(first[kept != 0]).tolist():
        longer, more = list(signals), list(products)
        _append(longer, more, sums, place)
        found = _extend(longer, more, tables, inputs, detours - 1, budget)
        if found is not None:
            return found
    return None


def missing_residues(signals: list[Table], tables: list[Table], bits: int) -> list[Table]:
    """Independent residues of the outputs modulo the signals: as many as products are missing at least."""
    echelon, seen = Echelon(bits), Echelon(bits)
    for signal in signals:
        echelon.insert(signal)
    residues = [echelon.residue(table) for table in tables]
    return [rest for rest in residues if seen.insert(rest)]


def span_of(residues: list[Table]) -> Residues:
    """All sums of one residue or more: 2**n - 1 of n."""
    span = [0]
    for rest in residues:
        span += [rest ^ other for other in span]
    return np.array(span[1:], dtype=np.uint32)


@cache
def _pairs(size: int) -> tuple[NDArray[np.int64], NDArray[np.int64]]:
    left, right = np.triu_indices(size, 1)
    return left, right


def _all_sums(signals: list[Table]) -> Residues:
    """The table of every sum of signals without the constant, by the signals' bits."""
    sums = np.zeros(1, dtype=np.uint32)
    for signal in signals[1:]:
        sums = np.concatenate([sums, sums ^ np.uint32(signal)])
    return sums


def _products_residues(signals: list[Table], sums: Residues) -> Residues:
    """The product of each pair of sums, reduced modulo the signals as `Echelon` does: lowest pivot first."""
    left, right = _pairs(len(sums))
    values = sums[left] & sums[right]
    rows: list[tuple[int, int]] = []
    for signal in signals:
        for low, row in rows:
            if signal & low:
                signal ^= row
        if signal:
            rows.append((signal & -signal, signal))
    for low, row in sorted(rows):
        values ^= np.where(values & np.uint32(low), np.uint32(row), np.uint32(0))
    return values


def _append(signals: list[Table], products: list[tuple[Sum, Sum]], sums: Residues, place: int) -> None:
    left, right = (int(side[place]) for side in _pairs(len(sums)))
    signals.append(int(sums[left]) & int(sums[right]))
    products.append((left << 1, right << 1))
