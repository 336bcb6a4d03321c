"""Directions along which an output changes: lines that are turned together.

An output that differs in every two states x and x ^ v becomes a line turned by the others once CNOTs have
made v the direction of that line. Such v (linear structures) show in the autocorrelation, which two Walsh
transforms give for all directions at once (common practice).
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from revsynth.embed.balancing import Values

MAX_LINES = 24
"""The transforms keep two tables of 2**lines double-precision numbers."""


def fewest_clashes(values: Values, lines: int, settled: tuple[int, ...]) -> tuple[int, int]:
    """(pairs of states x, x ^ v in which the output is the same, v) for the best direction v.

    v is a mask of lines without the settled ones; of equally good ones the one of the fewest lines, then the
    smallest. Raises ValueError above MAX_LINES lines. O(lines * 2**lines).
    """
    if lines > MAX_LINES:
        raise ValueError(f"{lines} lines are too many for the transforms: at most {MAX_LINES}")
    same = autocorrelation(values, lines)
    same += autocorrelation(np.abs(values), lines)
    same[0] = np.inf
    direction = np.arange(1 << lines)
    same[(direction & sum(1 << line for line in settled)) != 0] = np.inf
    best = np.flatnonzero(same == same.min())
    chosen = int(best[np.argmin(np.bitwise_count(best))])
    return round(float(same[chosen])) // 4, chosen


def autocorrelation(values: Values, lines: int) -> NDArray[np.float64]:
    """The sum of values[x] * values[x ^ v] for every v, exact: all numbers stay below 2**53."""
    spectrum = values.astype(np.float64)
    _walsh_transform(spectrum, lines)
    np.multiply(spectrum, spectrum, out=spectrum)
    _walsh_transform(spectrum, lines)
    spectrum /= 1 << lines
    return spectrum


def _walsh_transform(values: NDArray[np.float64], lines: int) -> None:
    for line in range(lines):
        parts = values.reshape(-1, 2, 1 << line)
        low = parts[:, 0].copy()
        parts[:, 0] += parts[:, 1]
        np.subtract(low, parts[:, 1], out=parts[:, 1])
