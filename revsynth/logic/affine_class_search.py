"""Finds the affine classes of functions of five inputs and a circuit with fewest ANDs for each of them.

    python -m revsynth.logic.affine_class_search > revsynth/logic/affine_class_data.py

writes the data module that `affine_classes` reads, in about a quarter of a minute. Two functions are in one
class where an affine change of the inputs and an affine function added turn one into the other; the fewest
ANDs is the same for all of them. The search is complete: all orbits of the 2^26 normal forms without affine
part are walked, and every chain of up to three products is tried (up to affine equivalence), so that the
classes not met need four; four are enough for all of them, as chains drawn at random show.

Classes and counts: M. S. Turan, R. Peralta, "The multiplicative complexity of Boolean functions on four and
five variables", LightSec 2014; the weight distributions of the 48 classes: E. R. Berlekamp, L. R. Welch,
IEEE Trans. Information Theory 18, 1972 (from memory).
"""

from __future__ import annotations

import sys
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from revsynth.logic.affine_class_kernels import draw_four, try_three, walk_orbits
from revsynth.logic.affine_classes import class_keys
from revsynth.logic.product_chain import ProductChain, input_table

STATES = 1 << 26
"""Normal forms of five inputs without constant and linear terms."""
DRAWS = 12_000_000
"""Chains of four products drawn."""


@dataclass(frozen=True)
class Classes:
    """labels: uint8 (2^26,), the class 1 ... of each packed normal form; sizes: int64 (classes,)."""

    labels: NDArray[np.uint8]
    sizes: NDArray[np.int64]


def find_classes() -> Classes:
    """The orbits of all normal forms of five inputs without affine part; 0.4 GB for some seconds."""
    labels = np.zeros(STATES, dtype=np.uint8)
    sizes = np.zeros(64, dtype=np.int64)
    count = walk_orbits(labels, np.empty(STATES, dtype=np.uint32), sizes)
    return Classes(labels, sizes[:count])


def find_chains(classes: Classes) -> list[ProductChain]:
    """A chain with fewest products for each class: over four inputs where these are enough."""
    count = len(classes.sizes)
    fewest = np.full(count + 1, 9, dtype=np.int64)
    weights = np.full(count + 1, 999, dtype=np.int64)
    chains = np.zeros((count + 1, 9), dtype=np.int64)
    widths = np.full(count + 1, 5, dtype=np.int64)
    variables = np.array([input_table(5, i) for i in range(5)], dtype=np.int64)
    fewest[classes.labels[0]] = 0
    try_three(classes.labels, variables, 4, fewest, weights, chains)
    widths[fewest <= 3] = 4
    settled = fewest.copy()
    weights_of_four = np.where(settled <= 3, 0, weights)
    try_three(classes.labels, variables, 5, fewest, weights_of_four, chains)
    draw_four(classes.labels, variables, DRAWS, 88172645463325252, fewest, weights_of_four, chains)
    if fewest[1:].max() > 4:
        raise AssertionError("some class was not met by a chain of four products")
    return [_chain(int(widths[c]), int(fewest[c]), chains[c].tolist()) for c in range(1, count + 1)]


def _chain(width: int, ands: int, row: list[int]) -> ProductChain:
    """The row of a kernel as a chain over five inputs; its signals have no constant and `width` inputs."""

    def spread(terms: int) -> int:
        low = terms & ((1 << width) - 1)
        return low << 1 | (terms >> width) << 6

    products = tuple((spread(row[2 * k]), spread(row[2 * k + 1])) for k in range(ands))
    return ProductChain(5, products, (row[8] << 6 if ands else 0,))


def data_module() -> str:
    """The text of `affine_class_data`."""
    classes = find_classes()
    chains = find_chains(classes)
    keys = class_keys(np.array([chain.tables()[0] for chain in chains], dtype=np.uint32)).tolist()
    order = sorted(range(len(chains)), key=lambda c: (len(chains[c].products), int(classes.sizes[c])))
    rows = [
        f"    ({keys[c]}, {int(classes.sizes[c])}, {chains[c].products}, {chains[c].outputs[0]}),"
        for c in order
    ]
    text = [
        '"""The 48 affine classes of functions of five inputs, written by `affine_class_search`.',
        "",
        "One row a class: its key (`affine_classes.class_keys`), how many normal forms without affine part",
        "it has, and a chain with fewest products (see `product_chain`): the products and the output's sum.",
        '"""',
        "",
        "ClassRow = tuple[int, int, tuple[tuple[int, int], ...], int]",
        "",
        "CLASSES: tuple[ClassRow, ...] = (",
        *rows,
        ")",
    ]
    return "\n".join(text) + "\n"


if __name__ == "__main__":
    sys.stdout.write(data_module())
