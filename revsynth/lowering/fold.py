"""Folding many controls into few by a balanced tree of products on clean scratch."""

from __future__ import annotations

from collections import deque
from collections.abc import Callable, Sequence

Step = tuple[int, int, int]
"""(a, b, target): the target takes the product of a and b."""


def fold(controls: Sequence[int], scratch: Sequence[int], products: int) -> tuple[list[Step], list[int]]:
    """Plan `products` products, each two qubits into the next scratch qubit, the oldest first.

    Returns the steps in order and the qubits whose product is now the product of all controls.
    """
    waiting = deque(controls)
    steps: list[Step] = []
    for target in scratch[:products]:
        a, b = waiting.popleft(), waiting.popleft()
        steps.append((a, b, target))
        waiting.append(target)
    return steps, list(waiting)


def apply(steps: Sequence[Step], write: Callable[[int, int, int], None], backwards: bool = False) -> None:
    """Write every step, in reverse order where `backwards`."""
    for a, b, target in reversed(steps) if backwards else steps:
        write(a, b, target)
