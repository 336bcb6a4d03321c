"""In which order each clause gives its literals to the selection, so that few variables are selected
one-sided.

Clauses that start with the same variable are selected together, those that agree on its literal go on
together with their next variables, and so on: a tree of variables. With m clauses and p one-sided choices in
the tree (a variable that all clauses there have with the same sign) the network has m - 1 + p ANDs, before
equal parts are shared; so the orders are chosen for the fewest one-sided choices: greedily, then by
simulated annealing.
"""

from __future__ import annotations

import math
from collections.abc import Iterator, Sequence
from heapq import heapify, heappop, heapreplace
from itertools import permutations
from random import Random
from typing import TypeAlias

from revsynth.logic.clauses.simplify import Clause

Ordered: TypeAlias = tuple[int, ...]
"""The literals of a clause in the order in which they are selected; the last one is not."""
_Choice: TypeAlias = tuple[tuple[int, ...], int]
"""A variable in the tree, by the literals above it and itself, and the clause's sign there (1: positive)."""

LONGEST = 8
"""Literals of a clause up to which annealing moves it; of a longer one only so many choices are counted."""
ALL_ORDERS = 4
"""Literals of a clause up to which all its orders are kept."""
WARM, COLD = 0.6, 0.12
"""First and last temperature, in one-sided choices."""


def one_sided(orders: Sequence[Ordered]) -> int:
    """How many choices in the tree of the orders are one-sided."""
    return _Tree(orders).cost


def greedy_orders(clauses: Sequence[Clause]) -> list[Ordered]:
    """Each clause's order with the most frequent variable first, and so on among those that share it."""
    orders: list[list[int]] = [[] for _ in clauses]
    groups: list[list[tuple[int, Clause]]] = [list(enumerate(clauses))]
    while groups:
        group = groups.pop()
        for place, clause in group:
            if len(clause) == 1:
                orders[place].append(clause[0])
        for entry, members in _Rest([member for member in group if len(member[1]) > 1]).by_literal():
            for place, _ in members:
                orders[place].append(entry)
            groups.append(members)
    return [tuple(order) for order in orders]


class _Rest:
    """Numbered clauses that are taken away by variable, the one in most of those left first."""

    def __init__(self, members: list[tuple[int, Clause]]) -> None:
        self.members: list[tuple[int, Clause] | None] = list(members)
        self.occurs: dict[int, list[int]] = {}
        self.counts: dict[int, int] = {}
        for number, (_, clause) in enumerate(members):
            for entry in clause:
                self.occurs.setdefault(entry, []).append(number)
                self.counts[abs(entry)] = self.counts.get(abs(entry), 0) + 1
        self.heap = [(-count, variable) for variable, count in self.counts.items()]
        heapify(self.heap)

    def by_literal(self) -> Iterator[tuple[int, list[tuple[int, Clause]]]]:
        """Literals with the clauses taken away for them, without it. Ties take the lower variable."""
        while self.heap:
            count, variable = self.heap[0]
            if self.counts[variable] == 0:
                heappop(self.heap)
            elif self.counts[variable] != -count:
                heapreplace(self.heap, (-self.counts[variable], variable))
            else:
                for entry in (variable, -variable):
                    taken = self._take(entry)
                    if taken:
                        yield entry, taken

    def _take(self, entry: int) -> list[tuple[int, Clause]]:
        found = []
        for number in self.occurs.get(entry, ()):
            member = self.members[number]
            if member is not None:
                self.members[number] = None
                for other in member[1]:
                    self.counts[abs(other)] -= 1
                found.append((member[0], tuple(other for other in member[1] if other != entry)))
        return found


def annealed_orders(orders: Sequence[Ordered], moves: int, seed: int) -> list[Ordered]:
    """Orders with fewer one-sided choices, the best that `moves` changes of one clause's order meet.

    Few moves a clause start cold, so that they do not lose what the given orders have.
    """
    tree = _Tree(orders)
    movable = [place for place, order in enumerate(orders) if 2 <= len(order) <= LONGEST]
    if not movable:
        return list(orders)
    random = Random(seed).random
    options: dict[int, list[tuple[Ordered, list[_Choice]]]] = {}
    warm = WARM if moves >= 100 * len(movable) else COLD
    best_cost = tree.cost
    since: list[tuple[int, Ordered]] = []
    for move in range(moves):
        place = movable[int(random() * len(movable))]
        old_order, old_choices, old_cost = tree.orders[place], tree.choices[place], tree.cost
        if len(old_order) <= ALL_ORDERS:
            known = options.get(place)
            if known is None:
                known = options[place] = [(other, _choices(other)) for other in permutations(old_order)]
            order, choices = known[int(random() * len(known))]
        else:
            order = _moved(old_order, random(), random())
            choices = _choices(order)
        if order == old_order:
            continue
        tree.change(place, order, choices)
        worse = tree.cost - old_cost
        if worse > 0 and random() >= math.exp(-worse / (warm * (COLD / warm) ** (move / moves))):
            tree.change(place, old_order, old_choices)
        elif tree.cost < best_cost:
            best_cost = tree.cost
            since.clear()
        else:
            since.append((place, old_order))
    for place, order in reversed(since):
        tree.orders[place] = order
    return tree.orders


def _moved(order: Ordered, one: float, other: float) -> Ordered:
    """One literal moved to another place."""
    entries = list(order)
    entry = entries.pop(int(one * len(entries)))
    entries.insert(int(other * (len(entries) + 1)), entry)
    return tuple(entries)


def _choices(order: Ordered) -> list[_Choice]:
    depths = range(min(len(order), LONGEST) - 1)
    return [((*order[:depth], abs(order[depth])), int(order[depth] > 0)) for depth in depths]


class _Tree:
    """Counts of both signs at each choice, and how many choices are one-sided."""

    def __init__(self, orders: Sequence[Ordered]) -> None:
        self.counts: dict[tuple[int, ...], list[int]] = {}
        self.cost = 0
        self.orders = list(orders)
        self.choices = [_choices(order) for order in orders]
        for choices in self.choices:
            self._add(choices)

    def _add(self, choices: Sequence[_Choice]) -> None:
        for choice, sign in choices:
            count = self.counts.get(choice)
            if count is None:
                count = self.counts[choice] = [0, 0]
            if not count[sign]:
                self.cost += -1 if count[1 - sign] else 1
            count[sign] += 1

    def change(self, place: int, order: Ordered, choices: list[_Choice]) -> None:
        """Give a clause another order."""
        for choice, sign in self.choices[place]:
            count = self.counts[choice]
            count[sign] -= 1
            if not count[sign]:
                self.cost += 1 if count[1 - sign] else -1
        self._add(choices)
        self.orders[place], self.choices[place] = order, choices
