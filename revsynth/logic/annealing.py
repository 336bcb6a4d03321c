"""Pair rewriting of long sums: random exchanges with hashing instead of looking at all pairs.

The same exchanges as in `pair_rewriting` (Song, Perkowski, IEEE TCAD 15(4), 1996), one random pair at a time,
worse sums allowed with a chance that cools down (S. Kirkpatrick, C. Gelatt, M. Vecchi, Science 220, 1983).
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace

import numpy as np

from revsynth.logic.cube_codes import decode, encode
from revsynth.logic.cubes import ExclusiveSum
from revsynth.logic.random_words import Random


def anneal(
    cubes: ExclusiveSum, prices: Sequence[int], *, moves: int, heat: float = 0.12, seed: int = 0
) -> ExclusiveSum:
    """Make `moves` random exchanges and return the cheapest sum met, for the same function.

    prices, heat, seed: as in `pair_rewriting.rewrite`. Raises ValueError where the cubes do not fit a 64-bit
    code or a price is not a number from 1 up.
    """
    if len(prices) != cubes.inputs + 1 or min(prices) < 1:
        raise ValueError(f"{cubes.inputs + 1} prices from 1 up are needed, not {tuple(prices)}")
    if moves < 0:
        raise ValueError(f"moves {moves} must be a number from 0 up")
    if len(cubes) < 2 or cubes.inputs == 0:
        return cubes.in_order()
    from revsynth.logic import kernels

    low = np.uint64((1 << 2 * cubes.inputs) - 1)
    start = encode(cubes) & low
    # An exchange adds at most one cube, and the heat, a part of one cube's price, allows no long climb.
    capacity = 2 * len(cubes) + 64
    codes, masks = np.zeros(capacity, dtype=np.uint64), np.zeros(capacity, dtype=np.uint64)
    best_codes, best_masks = np.zeros_like(codes), np.zeros_like(masks)
    table = np.zeros(1 << (2 * capacity).bit_length(), dtype=np.int64)
    state = np.zeros(2, dtype=np.int64)
    weights = np.asarray(prices, dtype=np.int64)
    random = Random(seed).words(1) | np.uint64(1)
    kernels.add_all(start, cubes.feeds, codes, masks, table, state, cubes.inputs, weights, random)
    warm = heat * cubes.price(prices) / len(cubes)
    size = kernels.anneal(
        codes, masks, table, state, cubes.inputs, weights, moves, warm, random, best_codes, best_masks
    )
    found = decode(best_codes[:size], cubes.inputs, cubes.outputs)
    return replace(found, feeds=best_masks[:size].copy()).in_order()
