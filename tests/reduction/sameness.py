"""The check that the tests of reduction end with: what two cascades do, state by state and gate by gate."""

from __future__ import annotations

import random
from collections.abc import Iterable

from revsynth.cascade import Cascade, Gate
from revsynth.cascade.price import cascade_t
from revsynth.options import Uncompute
from revsynth.reduction.masks import Masks, to_gate
from tests.slow_simulator import run_cascade


def difference(before: Cascade, after: Cascade, states: Iterable[int] | None = None) -> str | None:
    """The first state at which two cascades differ, sign included, in words; None where they are the same.

    All states where there are at most 2**10, else the given ones.
    """
    if before.lines != after.lines:
        return f"{before.lines} lines became {after.lines}"
    for state in range(1 << before.lines) if states is None else states:
        wanted, got = run_cascade(before, state), run_cascade(after, state)
        if wanted != got:
            return f"state {state} goes to {got}, not to {wanted}"
    return None


def some_states(lines: int, count: int, seed: int) -> list[int]:
    """Random states of any number of lines, with all zeros and all ones."""
    source = random.Random(seed)
    return [0, (1 << lines) - 1, *(source.getrandbits(lines) for _ in range(count))]


def of(lines: int, gates: Iterable[Masks]) -> Cascade:
    """The cascade of gates given as masks."""
    return Cascade.from_gates(lines, [to_gate(gate, range(lines)) for gate in gates])


def cost(cascade: Cascade, uncompute: Uncompute) -> tuple[int, int, int]:
    """Gates, T gates and control literals, by `cascade.price`."""
    return len(cascade), cascade_t(cascade, uncompute), len(cascade.control)


def not_worse(before: Cascade, after: Cascade, uncompute: Uncompute) -> bool:
    """Whether the pair keeps the promise of `reduce` on cost."""
    old, new = cost(before, uncompute), cost(after, uncompute)
    return new[0] <= old[0] and new[1] <= old[1] and new <= old


def broken(cascade: Cascade, index: int, way: str) -> Cascade:
    """The cascade with gate `index` left out, doubled, or with its first control turned or dropped."""
    gates = list(cascade)
    target, controls = gates[index]
    if way == "left out":
        del gates[index]
    elif way == "doubled":
        gates.insert(index, gates[index])
    elif way == "turned":
        gates[index] = Gate(target, (controls[0] ^ 1, *controls[1:]))
    else:
        gates[index] = Gate(target, controls[1:])
    return Cascade.from_gates(cascade.lines, gates)
