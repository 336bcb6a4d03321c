"""A network as units: the ANDs, and those XORs that get a line of their own; all other XORs are only sums.

Variables 0 ... n-1 are the inputs, variable n + k is unit k. A *sum* is an ascending tuple of variables that
are XORed; complements are kept apart. An AND that nothing reads but the outputs is no unit: it acts straight
on the output lines, or turns the phase.
"""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import dataclass, field

import numpy as np

from revsynth.logic.network import Network

Variable = int
Sum = tuple[Variable, ...]

LONGEST_SUM = 48
"""Sums of more variables get a line of their own, wherever XORs may have lines and two gates read it."""
LONGEST_ALL = (20_000, 32)
"""Variables in all sums together, at most, where no XOR has a line: so many, and so many for each gate."""


@dataclass(frozen=True)
class Act:
    """What happens to the outputs: a product of two sums, or (right empty) one sum, is added to them.

    flips: bit 0 complements the left sum, bit 1 the right one.
    """

    outputs: tuple[int, ...]
    left: Sum
    right: Sum = ()
    flips: int = 0

    @property
    def reads(self) -> Sum:
        """All variables that it needs."""
        return self.left + self.right


@dataclass(frozen=True)
class Units:
    """The parts of a network to be computed, in topological order.

    Unit k holds (left ^ f0)(right ^ f1) ^ tail, with f0, f1 the bits of flips[k]; where left is empty it is
    the sum `tail` alone. Output j is the XOR of its acts, complemented where constants[j] is 1.
    hints: sums that several gates read and that have no unit.
    """

    inputs: int
    left: list[Sum]
    right: list[Sum]
    tail: list[Sum]
    flips: list[int]
    acts: list[Act]
    constants: list[int]
    hints: list[Sum] = field(default_factory=list, compare=False)

    def __len__(self) -> int:
        return len(self.left)

    def is_and(self, unit: int) -> bool:
        """Whether the unit costs T gates."""
        return bool(self.left[unit])

    @property
    def ands(self) -> int:
        """Units that cost T gates."""
        return sum(1 for sum_ in self.left if sum_)

    def reads(self, unit: int) -> Sum:
        """All variables that the unit needs, some perhaps twice."""
        return self.left[unit] + self.right[unit] + self.tail[unit]

    def unit_reads(self) -> list[tuple[int, ...]]:
        """For each unit the units that it needs, ascending."""
        n = self.inputs
        return [tuple(sorted({v - n for v in self.reads(k) if v >= n})) for k in range(len(self))]


def units_of(network: Network, xors_from: int | None) -> Units:
    """The units of a network; XORs that at least `xors_from` gates or outputs read are units (None: none).

    Raises OverflowError where sums would be too long, which only happens with None (see LONGEST_ALL).
    """
    return _Extraction(network.reachable(), xors_from).units()


class _Extraction:
    """One pass over the gates; a node is (sum as a set, complement)."""

    def __init__(self, network: Network, xors_from: int | None) -> None:
        self.network = network
        self.xors_from = xors_from
        self.left: list[frozenset[int]] = []
        self.right: list[frozenset[int]] = []
        self.tail: list[frozenset[int]] = []
        self.flips: list[int] = []
        self.hints: list[frozenset[int]] = []
        self.total = 0
        self.most = LONGEST_ALL[0] + LONGEST_ALL[1] * network.gates

    def units(self) -> Units:
        network = self.network
        n = network.inputs
        empty: frozenset[int] = frozenset()
        value = [empty] + [frozenset((v,)) for v in range(n)]
        flip = [0] * (n + 1)
        readers = _readers(network)
        rows = zip(network.is_xor.tolist(), network.left.tolist(), network.right.tolist(), strict=True)
        for gate, (is_xor, a, b) in enumerate(rows):
            one, other = value[a >> 1], value[b >> 1]
            f, g = flip[a >> 1] ^ (a & 1), flip[b >> 1] ^ (b & 1)
            if is_xor:
                value.append(self._xor(one ^ other, readers[n + 1 + gate]))
                flip.append(f ^ g)
            else:
                held, complement = self._and(one, other, f, g)
                value.append(held)
                flip.append(complement)
        outputs = network.outputs.tolist()
        return self._finish(
            [value[literal >> 1] for literal in outputs],
            [flip[literal >> 1] ^ (literal & 1) for literal in outputs],
        )

    def _xor(self, held: frozenset[int], readers: int) -> frozenset[int]:
        if len(held) <= 1 or readers < 2:
            return held
        if self.xors_from is None:
            self.total += len(held)
            if self.total > self.most:
                raise OverflowError("the sums of the network are too long")
            self.hints.append(held)
        elif readers >= self.xors_from or len(held) > LONGEST_SUM:
            return self._unit(frozenset(), frozenset(), held, 0)
        return held

    def _and(self, one: frozenset[int], other: frozenset[int], f: int, g: int) -> tuple[frozenset[int], int]:
        """The AND as a unit, or what it comes to where its operands are equal or constant."""
        if not one:
            return (other, g) if f else (one, 0)
        if not other:
            return (one, f) if g else (other, 0)
        if one == other:
            return (one, f) if f == g else (frozenset(), 0)
        return self._unit(one, other, frozenset(), f | g << 1), 0

    def _unit(
        self, left: frozenset[int], right: frozenset[int], tail: frozenset[int], flips: int
    ) -> frozenset[int]:
        self.left.append(left)
        self.right.append(right)
        self.tail.append(tail)
        self.flips.append(flips)
        return frozenset((self.network.inputs + len(self.left) - 1,))

    def _finish(self, outputs: list[frozenset[int]], constants: list[int]) -> Units:
        """Drop units that nothing reads and make ANDs that only outputs read into acts."""
        n = self.network.inputs
        read = [False] * len(self.left)
        for sums in outputs:
            for variable in sums:
                if variable >= n:
                    read[variable - n] = True
        inner = [False] * len(self.left)
        for unit in range(len(self.left) - 1, -1, -1):
            direct = not inner[unit] and bool(self.left[unit])
            if not (read[unit] or inner[unit]):
                continue
            for variable in (*self.left[unit], *self.right[unit], *self.tail[unit]):
                if variable >= n:
                    inner[variable - n] = True
            read[unit] = direct
        return self._numbered(outputs, constants, inner, read)

    def _numbered(
        self, outputs: list[frozenset[int]], constants: list[int], inner: list[bool], direct: list[bool]
    ) -> Units:
        n = self.network.inputs
        wanted = {variable - n for sums in outputs for variable in sums if variable >= n}
        kept = [u for u in range(len(self.left)) if inner[u] or (u in wanted and not direct[u])]
        place = list(range(n)) + [-1] * len(self.left)
        for number, unit in enumerate(kept):
            place[n + unit] = n + number

        def moved(held: frozenset[int]) -> Sum:
            return tuple(sorted([place[v] for v in held]))

        targets: dict[int, list[int]] = {}
        acts: list[Act] = []
        for output, held in enumerate(outputs):
            for variable in held:
                if place[variable] < 0:
                    targets.setdefault(variable - n, []).append(output)
        for unit in sorted(targets):
            left, right = moved(self.left[unit]), moved(self.right[unit])
            acts.append(Act(tuple(targets[unit]), left, right, self.flips[unit]))
        sums: dict[Sum, list[int]] = {}
        for output, held in enumerate(outputs):
            rest = tuple(sorted(place[v] for v in held if place[v] >= 0))
            if rest:
                sums.setdefault(rest, []).append(output)
        acts.extend(Act(tuple(to), rest) for rest, to in sums.items())
        dropped = {n + u for u in range(len(self.left)) if place[n + u] < 0}
        hints = dict.fromkeys(moved(hint) for hint in self.hints if not hint & dropped)
        return Units(
            n,
            [moved(self.left[u]) for u in kept],
            [moved(self.right[u]) for u in kept],
            [moved(self.tail[u]) for u in kept],
            [self.flips[u] for u in kept],
            acts,
            constants,
            list(hints),
        )


def _readers(network: Network) -> list[int]:
    """How many gates and outputs read each node."""
    nodes = np.concatenate([network.left >> 1, network.right >> 1, network.outputs >> 1])
    return np.bincount(nodes, minlength=network.nodes).tolist()  # type: ignore[no-any-return]


def with_tails(units: Units) -> Units:
    """XOR units joined with an AND that they alone read: one line then holds AND ^ tail, never the bare AND.

    Of several such ANDs the last one is taken.
    """
    n = units.inputs
    readers = [0] * len(units)
    for unit in range(len(units)):
        for variable in units.reads(unit):
            if variable >= n:
                readers[variable - n] += 1
    for act in units.acts:
        for variable in act.reads:
            if variable >= n:
                readers[variable - n] += 1
    joined: dict[int, int] = {}
    for unit in range(len(units)):
        if units.is_and(unit):
            continue
        single = [v - n for v in units.tail[unit] if v >= n and readers[v - n] == 1 and units.is_and(v - n)]
        if single:
            joined[unit] = max(single)
    gone = set(joined.values())
    left, right, flips = list(units.left), list(units.right), list(units.flips)
    tail = list(units.tail)
    for unit, product in joined.items():
        left[unit], right[unit], flips[unit] = left[product], right[product], flips[product]
        tail[unit] = tuple(v for v in tail[unit] if v != n + product)
    whole = Units(n, left, right, tail, flips, units.acts, units.constants, units.hints)
    return selected(whole, [unit for unit in range(len(units)) if unit not in gone])


def selected(units: Units, order: Sequence[int]) -> Units:
    """The units of `order` in that order (topological, closed under what they read), renumbered."""
    n = units.inputs
    place = list(range(n)) + [-1] * len(units)
    for number, unit in enumerate(order):
        place[n + unit] = n + number

    def moved(held: Iterable[int]) -> Sum:
        return tuple(sorted([place[v] for v in held]))

    return Units(
        n,
        [moved(units.left[u]) for u in order],
        [moved(units.right[u]) for u in order],
        [moved(units.tail[u]) for u in order],
        [units.flips[u] for u in order],
        [Act(act.outputs, moved(act.left), moved(act.right), act.flips) for act in units.acts],
        units.constants,
        [moved(hint) for hint in units.hints],
    )


def without_sums(units: Units) -> Units:
    """The same ANDs (with their tails), all units that are sums alone put into what reads them.

    Raises OverflowError where sums would be too long (see LONGEST_ALL).
    """
    n = units.inputs
    whole: list[Sum] = [(v,) for v in range(n)]
    before = sum(len(units.reads(unit)) for unit in range(len(units)))
    total, most = 0, LONGEST_ALL[0] + LONGEST_ALL[1] * before

    def expanded(held: Sum) -> Sum:
        if len(held) == 1:
            return whole[held[0]]
        result: set[int] = set()
        for variable in held:
            result ^= set(whole[variable])
        return tuple(sorted(result))

    left, right, tail = list(units.left), list(units.right), list(units.tail)
    for unit in range(len(units)):
        left[unit], right[unit], tail[unit] = (
            expanded(held) if held else () for held in (left[unit], right[unit], tail[unit])
        )
        whole.append((n + unit,) if left[unit] else tail[unit])
        total += len(left[unit]) + len(right[unit]) + len(tail[unit])
        if total > most:
            raise OverflowError("the sums of the network are too long")
    acts = [
        Act(a.outputs, expanded(a.left), expanded(a.right) if a.right else (), a.flips) for a in units.acts
    ]
    hints = dict.fromkeys(whole[n + u] for u in range(len(units)) if not left[u])
    plain = Units(n, left, right, tail, units.flips, acts, units.constants, [h for h in hints if len(h) > 1])
    return selected(plain, [unit for unit in range(len(units)) if plain.is_and(unit)])


def cuts_of_ands(network: Network) -> list[Units]:
    """Ways to cut in which every unit is an AND: with tails, and without; too long ones are left out."""
    found: list[Units] = []
    for tails in (True, False):
        try:
            found.append(without_sums(with_tails(units_of(network, 2))) if tails else units_of(network, None))
        except OverflowError:
            continue
    return found
