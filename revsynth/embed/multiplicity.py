"""The largest output multiplicity: how often one output value must occur, free bits chosen best.

An embedding adds enough garbage to tell those inputs apart.
"""

from __future__ import annotations

from collections import deque

import numpy as np
from numpy.typing import NDArray

from revsynth.logic.function import Function
from revsynth.logic.truth_table import unpack, unpack_values

MAX_CHOICES = 1 << 12
"""Half-free values are spread over their completions exactly up to this many (value, completion) pairs."""

_COUNTED_BITS = 24
"""Values of up to so many bits are counted in a table: sorting 2**24 of them takes ten times as long."""
MAX_NUMBERED = 63
"""Output values of more bits than this are not numbered by 64-bit integers."""


def output_multiplicity(function: Function) -> int:
    """The smallest possible largest multiplicity, or the upper bound that `bounded_multiplicity` gives."""
    return bounded_multiplicity(function)[0]


def bounded_multiplicity(function: Function) -> tuple[int, bool]:
    """The smallest possible largest multiplicity, at least 1, over the inputs with a fixed output bit.

    The truth value says whether it is exact: it is where outputs are wholly fixed or wholly free, and with
    half-free outputs up to `MAX_CHOICES` completions. Beyond, it is an upper bound (each value completed with
    zeros), exact all the same where wholly fixed values, or all values together, ask for as much. Values with
    as many completions as there are cared inputs never get in the way: one of them is always left.
    """
    if function.outputs > MAX_NUMBERED:
        return _bounded_by_patterns(function)
    values = unpack_values(function.values, function.inputs)
    care = unpack_values(function.care, function.inputs)
    cared = care != 0
    if not cared.any():
        return 1, True
    full = (1 << function.outputs) - 1
    if np.all(care[cared] == full):
        return most_frequent(values[cared], function.outputs), True
    pairs, counts = np.unique(np.stack([care[cared], values[cared]]), axis=1, return_counts=True)
    low, high = -(-int(counts.sum()) // (full + 1)), int(counts.sum())
    choices = np.int64(1) << (function.outputs - np.bitwise_count(pairs[0]).astype(np.int64))
    tight = choices < counts.sum()
    if choices[tight].sum() > MAX_CHOICES:
        most = int(np.unique(values[cared], return_counts=True)[1].max())
        return most, most == max(low, int(counts[choices == 1].max(initial=0)))
    groups = [
        (int(count), _completions(full & ~int(mask), int(value)))
        for mask, value, count in zip(pairs[0][tight], pairs[1][tight], counts[tight], strict=True)
    ]
    while low < high:
        middle = (low + high) // 2
        if _fits(groups, middle):
            high = middle
        else:
            low = middle + 1
    return low, True


def most_frequent(values: NDArray[np.int64], bits: int) -> int:
    """How often the most frequent of some values below 2**bits occurs, 1 where there are none."""
    if bits <= _COUNTED_BITS:
        return int(np.bincount(values, minlength=1).max(initial=1))
    return int(np.unique(values, return_counts=True)[1].max(initial=1))


def _bounded_by_patterns(function: Function) -> tuple[int, bool]:
    """The same for outputs too wide for 64-bit integers: output patterns are told apart, not numbered."""
    size = 1 << function.inputs
    free = np.zeros(size, dtype=np.int64)
    pattern = np.zeros(size, dtype=np.int64)
    for value, care in zip(function.values, function.care, strict=True):
        free += 1 - unpack(care, function.inputs).astype(np.int64)
        longer = 2 * pattern + unpack(value, function.inputs)
        pattern = np.unique(longer, return_inverse=True)[1]
    cared = free < function.outputs
    tight = cared & (np.int64(1) << np.minimum(free, function.inputs + 1) < cared.sum())
    most = int(np.bincount(pattern[tight]).max(initial=1))
    return most, most == int(np.bincount(pattern[free == 0]).max(initial=1))


def _completions(free: int, value: int) -> list[int]:
    """`value` with every choice of the bits in `free`, ascending."""
    found = [value]
    for bit in range(free.bit_length()):
        if (free >> bit) & 1:
            found += [one | (1 << bit) for one in found]
    return sorted(found)


def shared_out(groups: list[tuple[int, int, int]], most: int) -> list[dict[int, int]]:
    """For each group of inputs, how many of them take which completion: none is taken more than `most` times.

    groups: (inputs, mask of the free bits, fixed bits). Raises ValueError where there is no such choice. The
    groups of few completions are settled first, by flow; for the others there is always one left.
    """
    total = sum(count for count, _, _ in groups)
    tight = [index for index, (_, free, _) in enumerate(groups) if 1 << free.bit_count() < total]
    choices = [(groups[index][0], _completions(*groups[index][1:])) for index in tight]
    flow = _flow(choices, most)
    if flow is None:
        raise ValueError(f"some output value must occur more than {most} times")
    shares: list[dict[int, int]] = [{} for _ in groups]
    load: dict[int, int] = {}
    for index, taken in zip(tight, flow, strict=True):
        shares[index] = {value: count for value, count in sorted(taken.items()) if count}
        for value, count in taken.items():
            load[value] = load.get(value, 0) + count
    for index, (count, free, value) in enumerate(groups):
        rest = 0 if shares[index] else count
        choice = value
        while rest:
            here = min(rest, most - load.get(choice, 0))
            if here:
                shares[index][choice] = here
                load[choice] = load.get(choice, 0) + here
                rest -= here
            choice = value | (((choice & free) - free) & free)  # the next setting of the free bits
    return shares


def _fits(groups: list[tuple[int, list[int]]], capacity: int) -> bool:
    """Whether every group can spread its inputs over its completions, at most `capacity` on each."""
    return _flow(groups, capacity) is not None


def _flow(groups: list[tuple[int, list[int]]], capacity: int) -> list[dict[int, int]] | None:
    """How many inputs of each group take which of its completions, at most `capacity` each; None: no way.

    A maximum flow by shortest augmenting paths (Edmonds, Karp, J. ACM 19, 1972).
    """
    load: dict[int, int] = {}
    flow: list[dict[int, int]] = [{} for _ in groups]
    users: dict[int, set[int]] = {}
    for index, (_, choices) in enumerate(groups):
        for choice in choices:
            users.setdefault(choice, set()).add(index)
    for index, (count, _) in enumerate(groups):
        rest = count
        while rest:
            pushed = _push(groups, flow, load, users, index, rest, capacity)
            if not pushed:
                return None
            rest -= pushed
    return flow


def _push(
    groups: list[tuple[int, list[int]]],
    flow: list[dict[int, int]],
    load: dict[int, int],
    users: dict[int, set[int]],
    start: int,
    most: int,
    capacity: int,
) -> int:
    """Send up to `most` inputs of group `start` along one augmenting path; how many went."""
    came_by: dict[int, tuple[int, int]] = {}
    reached: set[int] = {start}
    seen: set[int] = set()
    queue: deque[int] = deque([start])
    while queue:
        group = queue.popleft()
        for value in groups[group][1]:
            if value in seen:
                continue
            seen.add(value)
            room = capacity - load.get(value, 0)
            if room > 0:
                return _along(flow, load, came_by, group, value, start, min(most, room))
            for other in sorted(users[value]):
                if other not in reached and flow[other].get(value, 0) > 0:
                    reached.add(other)
                    came_by[other] = (group, value)
                    queue.append(other)
    return 0


def _along(
    flow: list[dict[int, int]],
    load: dict[int, int],
    came_by: dict[int, tuple[int, int]],
    group: int,
    value: int,
    start: int,
    amount: int,
) -> int:
    """Move `amount` (or what the path allows) so that `group` takes `value` and its predecessors follow."""
    here = group
    while here != start:
        previous, given = came_by[here]
        amount = min(amount, flow[here][given])
        here = previous
    load[value] = load.get(value, 0) + amount
    here, gained = group, value
    while True:
        flow[here][gained] = flow[here].get(gained, 0) + amount
        if here == start:
            return amount
        previous, given = came_by[here]
        flow[here][given] -= amount
        here, gained = previous, given
