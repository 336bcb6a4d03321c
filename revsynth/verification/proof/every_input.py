"""Running a node on every value of the variables that it rests on, where a solver takes longer.

Products and remainders of some dozen bits have few inner equalities, and solvers go through cases one by one;
2^30 inputs of a thousand gates, side by side, take some ten seconds.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from typing import Literal as Only

import numpy as np
from numpy.typing import NDArray

from revsynth.verification.lifting.parities import AND, FREE, XOR, Literal, Parities

MOST_WORK = 1 << 43
"""Gates times inputs up to which all inputs are run: about a minute on one core."""
MOST_VARIABLES = 36
BLOCK_BITS = 12
"""Inputs a block, as a power of two: 64 words of 64."""
WORDS = 1 << BLOCK_BITS - 6
ONES = (1 << 64) - 1
SLICE = 1 << 12
"""Blocks between two looks at progress and interrupts."""


def find_one(
    parities: Parities,
    variables: Sequence[Literal],
    literal: Literal,
    progress: Callable[[str], None] = lambda _: None,
    most_work: int | None = None,
) -> tuple[int, ...] | Only[False] | None:
    """Values (0 or 1) of the variables at which the literal is 1, False where there are none.

    None where that would be more than `most_work` gates times inputs (None: MOST_WORK): then nothing is
    known.
    """
    gates, support = _below(parities, literal)
    if len(support) > MOST_VARIABLES or len(gates) << max(len(support), BLOCK_BITS) > (
        MOST_WORK if most_work is None else most_work
    ):
        return None
    from revsynth.verification.proof.kernels import compiled_search

    row = {0: 0} | {node: place for place, node in enumerate((*support, *gates), 1)}
    is_xor = np.array([parities.kind[node] == XOR for node in gates], dtype=np.bool_)
    left = np.array([row[parities.left[node]] for node in gates], dtype=np.int64)
    right = np.array([row[parities.right[node]] for node in gates], dtype=np.int64)
    values = np.zeros((len(row), WORDS), dtype=np.uint64)
    low = min(len(support), BLOCK_BITS)
    values[1 : 1 + low] = variable_columns(low)
    blocks = 1 << max(len(support) - BLOCK_BITS, 0)
    search = compiled_search()
    for begin in range(0, blocks, SLICE):
        progress(f"proving: {begin / blocks:.0%} of {1 << len(support)} inputs run")
        end = min(begin + SLICE, blocks)
        word = search(is_xor, left, right, len(support), row[literal >> 1], literal & 1, begin, end, values)
        if word >= 0:
            held = int(values[row[literal >> 1], word % WORDS]) ^ (ONES if literal & 1 else 0)
            number = word << 6 | (held & -held).bit_length() - 1
            given = {node: number >> bit & 1 for bit, node in enumerate(support)}
            return tuple(given.get(variable >> 1, 0) for variable in variables)
    return False


def variable_columns(variables: int) -> NDArray[np.uint64]:
    """The first rows of a block, uint64 (variables, 64): bit b of word w is bit i of 64 w + b in row i."""
    inputs = np.arange(1 << BLOCK_BITS, dtype=np.uint64)
    bits = (inputs[None, :] >> np.arange(variables, dtype=np.uint64)[:, None]) & np.uint64(1)
    octets = np.packbits(bits.astype(np.uint8), axis=1, bitorder="little")
    return octets.view("<u8").astype(np.uint64)


def _below(parities: Parities, literal: Literal) -> tuple[list[int], list[int]]:
    """The gates and the free variables under a literal, ascending."""
    seen: set[int] = set()
    stack = [literal >> 1]
    while stack:
        node = stack.pop()
        if node == 0 or node in seen:
            continue
        seen.add(node)
        if parities.kind[node] in (AND, XOR):
            stack += (parities.left[node], parities.right[node])
    nodes = sorted(seen)
    free = [node for node in nodes if parities.kind[node] == FREE]
    return [node for node in nodes if parities.kind[node] in (AND, XOR)], free
