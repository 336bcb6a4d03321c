"""Comprehensions, and the functions that go through a list, on many inputs at once."""

from __future__ import annotations

import ast
from collections.abc import Callable, Iterator
from typing import TYPE_CHECKING

import numpy as np

from revsynth.spec.bounds import fits_int64
from revsynth.spec.lane_lists import both, display, either, equal, negated, round_of, rounds, unpack
from revsynth.spec.lane_numbers import binary, truth, where_bad
from revsynth.spec.lane_values import (
    Items,
    Mask,
    Number,
    Numbers,
    Stepped,
    Value,
    bounds_of,
    is_truth,
    plain,
    select,
    truths,
)
from revsynth.spec.lanes import Lanes

if TYPE_CHECKING:
    from revsynth.spec.lane_walk import Walk

Visit = Callable[[Value, Lanes], None]
"""What is done with each item of a list, on the lanes where it is there."""

_SORTED = 6
"""Lists of more items than this are checked for equal items by sorting, shorter ones pair by pair."""


class Decision:
    """Which lanes of a chunk have their answer, so that `any` and `all` need not go on for them."""

    def __init__(self, lanes: Lanes) -> None:
        self.settled: Mask = np.zeros(lanes.shared.size, dtype=np.bool_)
        self.changes = 0

    def settle(self, lanes: Lanes, where: bool | Mask) -> None:
        """The lanes in use where the condition holds have their answer."""
        hits = both(where, True if lanes.active is None else lanes.active)
        if not np.any(hits):
            return
        self.changes += 1
        if lanes.rows is None:
            self.settled |= hits
        else:
            self.settled[lanes.rows if hits is True else lanes.rows[hits]] = True

    def open(self, lanes: Lanes) -> Mask:
        """The lanes that have no answer yet."""
        return ~(self.settled if lanes.rows is None else self.settled[lanes.rows])

    def on(self, lanes: Lanes) -> bool | Mask:
        """The lanes that have their answer; one truth value where all in use agree."""
        if not self.changes:
            return False
        settled = self.settled if lanes.rows is None else self.settled[lanes.rows]
        used = settled if lanes.active is None else settled[lanes.active]
        return True if used.all() else settled


class Loops:
    """Everything that goes through the items of a list, on behalf of a walk."""

    def __init__(self, walk: Walk) -> None:
        self.walk = walk

    def listed(self, node: ast.ListComp, lanes: Lanes) -> Value:
        """The list of a comprehension."""
        values, present = self._items(node, lanes)
        if all(there is None for there in present):
            return display(values)
        return Items(tuple(values), tuple(present))

    def truths(self, node: ast.Call, lanes: Lanes) -> Value:
        """any(...) and all(...); over a comprehension without brackets they stop early, as in Python."""
        assert isinstance(node.func, ast.Name)
        seeks = node.func.id == "any"
        decision = Decision(lanes)

        def visit(value: Value, inner: Lanes) -> None:
            holds = truth(_as_number(value))
            decision.settle(inner, holds if seeks else negated(holds))

        lazy = isinstance(node.args[0], ast.GeneratorExp)
        self._through(node.args[0], lanes, visit, decision if lazy else None)
        settled = decision.on(lanes)
        answer = settled if seeks else negated(settled)
        return answer if isinstance(answer, bool) else truths(answer)

    def total(self, node: ast.Call, lanes: Lanes) -> Value:
        """sum(list, start)."""
        result = self.walk.number(node.args[1], lanes) if len(node.args) > 1 else 0

        def visit(value: Value, inner: Lanes) -> None:
            nonlocal result
            addend = _as_number(inner.widened(value, lanes))
            covered = inner.coverage(lanes)
            if covered is not None:
                addend = select(covered, addend, False if is_truth(addend) else 0)
            result = binary(ast.Add, result, addend, lanes)

        self._through(node.args[0], lanes, visit)
        return result

    def extreme(
        self, node: ast.expr, pick: Callable[[Number, Number, Lanes], Number], lanes: Lanes
    ) -> Number:
        """min(list) or max(list); it fails where the list is empty."""
        best: Number = 0
        found: bool | Mask = False

        def visit(value: Value, inner: Lanes) -> None:
            nonlocal best, found
            number = _as_number(inner.widened(value, lanes))
            covered = inner.coverage(lanes)
            if found is False:
                better = number
            elif found is True:
                better = pick(best, number, lanes)
            else:
                better = select(found, pick(best, number, lanes), number)
            best = better if covered is None else select(covered, better, best)
            found = True if covered is None else either(found, covered)

        self._through(node, lanes, visit)
        where_bad(lanes, negated(found))
        return best

    def distinct(self, node: ast.Call, lanes: Lanes) -> Value:
        """distinct(x, y, ...) or distinct(list): no two are equal."""
        if len(node.args) > 1:
            values: list[Value] = [self.walk.number(argument, lanes) for argument in node.args]
            present: list[Mask | None] = [None] * len(values)
        else:
            values, present = self._items(node.args[0], lanes)
        numbers = [_as_number(value) for value in values]
        small = all(fits_int64(bounds_of(number)) for number in numbers)
        if len(numbers) > _SORTED and small and all(there is None for there in present):
            if not any(isinstance(number, Numbers) for number in numbers):
                return len(set(numbers)) == len(numbers)
            rows = np.stack([np.broadcast_to(plain(number), lanes.size) for number in numbers])
            rows.sort(axis=0)
            return truths(~np.any(rows[1:] == rows[:-1], axis=0))
        twice: bool | Mask = False
        for second in range(len(numbers)):
            for first in range(second):
                pair = equal(numbers[first], numbers[second], lanes)
                for there in (present[first], present[second]):
                    pair = both(pair, True if there is None else there)
                twice = either(twice, pair)
            if twice is True:
                break
        answer = negated(twice)
        return answer if isinstance(answer, bool) else truths(answer)

    def _items(self, node: ast.expr, lanes: Lanes) -> tuple[list[Value], list[Mask | None]]:
        """All items of a list, and on which lanes each is there (None: on all in use)."""
        values: list[Value] = []
        present: list[Mask | None] = []

        def visit(value: Value, inner: Lanes) -> None:
            values.append(inner.widened(value, lanes))
            present.append(inner.coverage(lanes))

        self._through(node, lanes, visit)
        return values, present

    def _through(self, node: ast.expr, lanes: Lanes, visit: Visit, decision: Decision | None = None) -> None:
        """Visit the items of a list, or of a comprehension without making a list of them."""
        if isinstance(node, ast.ListComp | ast.GeneratorExp):
            self._loop(node, 0, lanes, visit, decision)
            return
        for value, inner in _each(self.walk.value(node, lanes), lanes, None):
            visit(value, inner)

    def _loop(
        self,
        node: ast.ListComp | ast.GeneratorExp,
        level: int,
        lanes: Lanes,
        visit: Visit,
        decision: Decision | None,
    ) -> None:
        generator = node.generators[level]
        for value, reached in _each(self.walk.value(generator.iter, lanes), lanes, decision):
            inner: Lanes | None = reached.bind(_bound(generator.target, value, reached))
            for condition in generator.ifs:
                if inner is not None:
                    inner = inner.narrow(self.walk.condition(condition, inner))
            if inner is None:
                continue
            if level + 1 < len(node.generators):
                self._loop(node, level + 1, inner, visit, decision)
            else:
                visit(self.walk.value(node.elt, inner), inner)


def _each(values: Value, lanes: Lanes, decision: Decision | None) -> Iterator[tuple[Value, Lanes]]:
    """The items of a list one by one, each on the lanes where it is there and still wanted."""
    changes = 0
    for number in range(rounds(values)):
        if decision is not None and decision.changes != changes:
            changes = decision.changes
            still = lanes.narrow(decision.open(lanes))
            if still is None:
                return
            values, lanes = still.narrowed(values, lanes), still
        value, present = round_of(values, number, lanes)
        inner = lanes.narrow(present)
        if inner is not None:
            yield inner.narrowed(value, lanes), inner
        elif isinstance(values, Stepped):
            return


def _bound(target: ast.expr, value: Value, lanes: Lanes) -> dict[str, Value]:
    """The loop variables of one round."""
    if isinstance(target, ast.Name):
        return {target.id: value}
    assert isinstance(target, ast.Tuple | ast.List)
    values = unpack(value, len(target.elts), lanes)
    return {part.id: one for part, one in zip(target.elts, values, strict=True) if isinstance(part, ast.Name)}


def _as_number(value: Value) -> Number:
    assert isinstance(value, int | Numbers)
    return value
