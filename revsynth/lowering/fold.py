"""Folding many controls into few by products on clean scratch: a balanced tree, or a ladder.

A tree has logarithmic depth; a ladder shares more with a neighbour that starts with the same controls.
"""

from __future__ import annotations

from collections import deque
from collections.abc import Callable, Sequence
from typing import Literal

Shape = Literal["tree", "ladder"]

Step = tuple[int, int, int]
"""(a, b, target): the target takes the product of a and b."""


def fold(
    controls: Sequence[int], scratch: Sequence[int], products: int, shape: Shape
) -> tuple[list[Step], list[int]]:
    """Plan `products` products, each of two qubits into the next scratch qubit.

    A tree takes the two that have waited longest, a ladder the last product and the next control. Returns the
    steps in order and the qubits whose product is now the product of all controls.
    """
    waiting = deque(controls)
    steps: list[Step] = []
    for target in scratch[:products]:
        a, b = waiting.popleft(), waiting.popleft()
        steps.append((a, b, target))
        if shape == "tree":
            waiting.append(target)
        else:
            waiting.appendleft(target)
    return steps, list(waiting)


def apply(steps: Sequence[Step], write: Callable[[int, int, int], None], backwards: bool = False) -> None:
    """Write every step, in reverse order where `backwards`."""
    for a, b, target in reversed(steps) if backwards else steps:
        write(a, b, target)
