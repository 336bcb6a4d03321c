"""Covering a network with small cuts, each paid with the ANDs its function needs, and building it anew.

A cut rewrite is exact in itself: the table of a cut is computed gate by gate from its leaves, and the circuit
put in its place has this very table. No further proof is needed.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import cache
from typing import Any

import numpy as np

from revsynth.logic.affine_classes import classes
from revsynth.logic.and_reduction import cut_steps
from revsynth.logic.and_reduction.form_builder import FormBuilder, fits
from revsynth.logic.and_reduction.small_circuits import CutBuilder, build_function
from revsynth.logic.network import Network

COMPILED_FROM = 1500
"""Gates from which on compiled loops pay for their start."""


@dataclass(frozen=True)
class Cover:
    """The chosen cuts: nodes in topological order, the leaves (nodes) of each, its table.

    price: ANDs as estimated; the rebuilt network shares more.
    """

    nodes: list[int]
    leaves: list[tuple[int, ...]]
    tables: list[int]
    price: float


def map_cuts(network: Network, *, k: int = 4, keep: int = 10, passes: int = 3) -> Network:
    """The network rebuilt from a cover by cuts of at most k leaves; it may have more ANDs than before."""
    chosen = cover(network, k=k, keep=keep, passes=passes)
    builder = FormBuilder(network.inputs) if fits(network) else CutBuilder(network.inputs)
    here = [0, *(2 * i for i in range(1, network.inputs + 1)), *([0] * network.gates)]
    for node, leaves, table in zip(chosen.nodes, chosen.leaves, chosen.tables, strict=True):
        here[node] = build_function(builder, [here[leaf] for leaf in leaves], table)
    return builder.build([here[literal >> 1] ^ (literal & 1) for literal in network.outputs.tolist()])


def low_masks(k: int) -> list[int]:
    """For each variable the places of a table of 2**k bits where it is 0; last, all places."""
    bits = range(1 << k)
    return [*(sum(1 << x for x in bits if not x >> v & 1) for v in range(k)), (1 << (1 << k)) - 1]


def cover(network: Network, *, k: int, keep: int, passes: int) -> Cover:
    """A cover of the network by cuts of at most k leaves, `keep` of them remembered for each node.

    Raises ValueError for k other than 3, 4 and 5.
    """
    if k not in (3, 4, 5):
        raise ValueError(f"cuts of 3, 4 or 5 leaves, not {k}")
    first, nodes, slots = 1 + network.inputs, network.nodes, keep + 2
    large = network.gates >= COMPILED_FROM
    steps: Any = _compiled() if large else cut_steps
    kind = [0] * first + [2 if is_xor else 1 for is_xor in network.is_xor.tolist()]
    left = [0] * first + network.left.tolist()
    right = [0] * first + network.right.tolist()
    outputs = network.outputs.tolist()
    uses = [0.0] * nodes
    for literal in (*left[first:], *right[first:], *outputs):
        uses[literal >> 1] += 1.0

    def ints(values: list[int] | int, dtype: Any = np.int64) -> Any:
        if large:
            return np.zeros(values, dtype) if isinstance(values, int) else np.array(values, dtype)
        return [0] * values if isinstance(values, int) else values

    def floats(values: list[float] | int) -> Any:
        return ints(values, np.float64)  # type: ignore[arg-type]

    cuts = nodes * slots
    cut_data = (ints(cuts), ints(cuts * k, np.int32), ints(cuts), ints(cuts), floats(cuts), floats(cuts))
    scratch = (ints(k * nodes + k), ints(nodes), ints(k + 1), ints(2 * k))
    share, flow, depth, best, refs = floats(uses), floats(nodes), floats(nodes), ints(nodes), ints(nodes)
    kind, left, right, outputs, lows = ints(kind), ints(left), ints(right), ints(outputs), ints(low_masks(k))
    prices = ints(five_prices() if k == 5 else [0])
    steps.enumerate_cuts(
        first, nodes, k, slots, kind, left, right, share, flow, lows, prices, cut_data, scratch
    )
    shape = (first, nodes, k, slots)
    total = 0.0
    for turn in range(passes):
        steps.choose_by_flow(*shape, share, flow, depth, best, cut_data)
        total = steps.count_uses(*shape, outputs, refs, best, cut_data)
        if turn < passes - 1:
            steps.blend(first, nodes, refs, share)
    for _ in range(2):
        steps.recover_area(*shape, depth, refs, best, cut_data, ints(nodes + 1))
    total = steps.count_uses(*shape, outputs, refs, best, cut_data)
    return _chosen(first, k, slots, refs, best, cut_data, total)


@cache
def five_prices() -> list[int]:
    """The fewest ANDs of functions of five inputs by `cut_steps.five_key`."""
    steps: Any = cut_steps
    prices = [0] * cut_steps.FIVE_KEYS
    for found in classes().values():
        table = found.chain.tables()[0]
        prices[steps.five_key(table, steps.anf_of(table, 5))] = len(found.chain.products)
    return prices


def _chosen(first: int, k: int, slots: int, refs: Any, best: Any, cut_data: Any, price: float) -> Cover:
    """Plain lists of the cuts in use."""
    size, leaves, tables = cut_data[0], cut_data[1], cut_data[2]
    used = [node for node in range(first, len(refs)) if refs[node]]
    cuts = [node * slots + int(best[node]) for node in used]
    rows = [tuple(int(leaf) for leaf in leaves[k * c : k * c + size[c]]) for c in cuts]
    return Cover(
        used,
        rows,
        [int(tables[c]) & ((1 << (1 << len(row))) - 1) for c, row in zip(cuts, rows, strict=True)],
        float(price),
    )


def _compiled() -> Any:
    from revsynth.logic.and_reduction.cut_kernels import COMPILED

    return COMPILED
