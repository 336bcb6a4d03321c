"""What a cascade will cost in T gates once lowered with clean scratch: the estimate that methods compare by.

Sources: a NOT with k controls takes 8k - 9 T with k - 2 clean scratch lines (Maslov, Phys. Rev. A 93, 2016;
7 for k = 2) and 4(k - 1) T where scratch is erased by measurement (Jones 2013; Gidney, Quantum 2, 2018).
"""

from __future__ import annotations

import numpy as np

from revsynth.cascade.line_values import LineValues
from revsynth.cascade.model import PHASE, Cascade
from revsynth.options import Uncompute


def gate_t(controls: int, uncompute: Uncompute) -> int:
    """T gates of a NOT with that many controls; a phase gate of k literals costs as k - 1 controls."""
    if controls <= 1:
        return 0
    if uncompute == "measured":
        return 4 * (controls - 1)
    return 7 if controls == 2 else 8 * controls - 9


def cascade_t(cascade: Cascade, uncompute: Uncompute) -> int:
    """Sum of `gate_t` over the cascade."""
    controls = np.diff(cascade.offset) - (cascade.target == PHASE)
    sizes, counts = np.unique(controls, return_counts=True)
    return sum(gate_t(int(size), uncompute) * int(count) for size, count in zip(sizes, counts, strict=True))


def held_t(cascade: Cascade, known: dict[int, int], uncompute: Uncompute) -> int:
    """The same, aware of lines that start in a `known` value.

    A product of two onto a line in 0 takes 4 T, and so does bringing it back, which a measurement does
    for none.
    """
    if not known or not np.any(np.diff(cascade.offset) >= 2):
        return cascade_t(cascade, uncompute)
    state = LineValues.start(cascade.lines, known)
    total = 0
    for target, controls in cascade:
        if target == PHASE:
            total += gate_t(len(controls) - 1, uncompute)
            continue
        if len(controls) < 2:
            state.apply(controls, (target,))
            continue
        from_zero = state.is_zero(target)
        state.apply(controls, (target,))
        to_zero = state.is_zero(target)
        price = gate_t(len(controls), uncompute)
        if to_zero and not from_zero and uncompute == "measured":
            price -= 4
        elif (from_zero or to_zero) and uncompute == "unitary":
            price -= 3
        total += price
    return total
