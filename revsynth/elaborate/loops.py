"""Comprehensions, and the functions that go through a list: they are unrolled."""

from __future__ import annotations

import ast
from collections.abc import Callable
from typing import TYPE_CHECKING

from revsynth.elaborate.bitwise import masked, select, truth
from revsynth.elaborate.linear import gather, plain, total
from revsynth.elaborate.lists import display, equal, round_of, rounds, unpack
from revsynth.elaborate.numbers import Number, Sum, bounds_of, truth_number
from revsynth.elaborate.reach import Path, Reach
from revsynth.elaborate.values import Items, Value, as_number
from revsynth.logic.network import FALSE, TRUE, Literal
from revsynth.logic.network_builder import NetworkBuilder
from revsynth.spec import refusals

if TYPE_CHECKING:
    from revsynth.elaborate.walk import Walk

Visit = Callable[[Value, Literal], "Literal | None"]
"""What is done with each item, and where it is there. It may answer where the loop goes on."""
Pick = Callable[[NetworkBuilder, Number, Number], Number]


class Loops:
    """Everything that goes through the items of a list, on behalf of a walk."""

    def __init__(self, walk: Walk) -> None:
        self.walk = walk

    def listed(self, node: ast.ListComp, reach: Reach) -> Value:
        """The list of a comprehension."""
        values, present = self._items(node, reach)
        if all(there == TRUE for there in present):
            return display(values)
        return Items(tuple(values), tuple(present))

    def truths(self, node: ast.Call, reach: Reach) -> Value:
        """any(...) and all(...); over a comprehension without brackets they stop early, as in Python."""
        assert isinstance(node.func, ast.Name)
        seeks = node.func.id == "any"
        builder = reach.builder
        ends: list[Literal] = []

        def visit(value: Value, present: Literal) -> Literal:
            holds = truth(builder, as_number(value))
            ends.append(builder.and_(holds if seeks else holds ^ 1, present))
            return ends[-1] ^ 1

        def go_on(value: Value, present: Literal) -> None:
            visit(value, present)

        lazy = isinstance(node.args[0], ast.GeneratorExp)
        self._through(node.args[0], reach, visit if lazy else go_on)
        found = builder.any_of(ends)
        return truth_number(found if seeks else found ^ 1)

    def total(self, node: ast.Call, reach: Reach) -> Value:
        """sum(list, start): all of it is added up at once."""
        builder = reach.builder
        coefficients: dict[Literal, int] = {}
        start = self.walk.number(node.args[1], reach) if len(node.args) > 1 else 0
        lo, hi = bounds_of(start)
        constant = gather(builder, coefficients, start, 1)

        def visit(value: Value, present: Literal) -> None:
            nonlocal constant, lo, hi
            addend = masked(builder, as_number(value), present)
            low, high = bounds_of(addend)
            lo, hi = lo + low, hi + high
            constant += gather(builder, coefficients, addend, 1)

        self._through(node.args[0], reach, visit)
        return total(coefficients, constant, lo, hi)

    def extreme(self, node: ast.expr, pick: Pick, name: str, reach: Reach) -> Number:
        """min(list) or max(list); it fails where the list is empty."""
        builder = reach.builder
        best: Number = 0
        found: Literal = FALSE

        def visit(value: Value, present: Literal) -> None:
            nonlocal best, found
            number = plain(builder, as_number(value))
            better = number if found == FALSE else select(builder, found, pick(builder, best, number), number)
            best = plain(builder, better if found == FALSE else select(builder, present, better, best))
            found = builder.or_(found, present)

        self._through(node, reach, visit)
        reach.fail(found ^ 1, refusals.EMPTY_LIST, name=name)
        return best

    def distinct(self, node: ast.Call, reach: Reach) -> Value:
        """distinct(x, y, ...) or distinct(list): no two are equal."""
        builder = reach.builder
        if len(node.args) > 1:
            values: list[Value] = [self.walk.number(argument, reach) for argument in node.args]
            present = [TRUE] * len(values)
        else:
            values, present = self._items(node.args[0], reach)
        numbers = [plain(builder, as_number(value)) for value in values]
        twice = []
        for second, number in enumerate(numbers):
            reach.build.check_size()
            for first in range(second):
                same = equal(numbers[first], number, reach)
                twice.append(builder.all_of((same, present[first], present[second])))
        return truth_number(builder.any_of(twice) ^ 1)

    def _items(self, node: ast.expr, reach: Reach) -> tuple[list[Value], list[Literal]]:
        """All items of a list, and where each is there."""
        values: list[Value] = []
        present: list[Literal] = []

        def visit(value: Value, there: Literal) -> None:
            values.append(known(value, reach))
            present.append(there)

        self._through(node, reach, visit)
        return values, present

    def _through(self, node: ast.expr, reach: Reach, visit: Visit) -> None:
        """Visit the items of a list, or of a comprehension without making a list of them."""
        if isinstance(node, ast.ListComp | ast.GeneratorExp):
            self._loop(node, 0, reach, TRUE, _Going(), visit)
            return
        values = self.walk.value(node, reach)
        for number in range(rounds(values)):
            value, present = round_of(values, number, reach)
            if present != FALSE:
                visit(value, present)

    def _loop(
        self,
        node: ast.ListComp | ast.GeneratorExp,
        level: int,
        reach: Reach,
        present: Literal,
        going: _Going,
        visit: Visit,
    ) -> None:
        """One loop of a comprehension; `present` is where it is gone through, seen from the outermost."""
        builder = reach.builder
        generator = node.generators[level]
        values = self.walk.value(generator.iter, reach)
        outer = reach.path
        for number in range(rounds(values)):
            reach.build.check_size()
            if going.stopped:
                return
            # what is reached in this round: the loop gets there, nothing before has ended it
            reach = Reach(reach.build, going.joined(outer), reach.names)
            value, there = round_of(values, number, reach)
            inner = reach.narrow(there)
            here = builder.and_(present, there)
            if inner is not None:
                inner = inner.bind(_bound(generator.target, value, inner))
            for condition in generator.ifs:
                if inner is not None:
                    holds = self.walk.condition(condition, inner)
                    here = builder.and_(here, holds)
                    inner = inner.narrow(holds)
            if inner is None or here == FALSE:
                continue
            if level + 1 < len(node.generators):
                self._loop(node, level + 1, inner, here, going, visit)
            else:
                going.end(visit(self.walk.value(node.elt, inner), here))


class _Going:
    """Where a loop still goes on, after some of its rounds may have ended it."""

    def __init__(self) -> None:
        self.stopped = False
        self.so_far: Path | None = None

    def end(self, goes_on: Literal | None) -> None:
        """A round has answered where the loop goes on; None for everywhere."""
        if goes_on is None or goes_on == TRUE:
            return
        self.stopped = self.stopped or goes_on == FALSE
        self.so_far = Path(self.so_far, goes_on)

    def joined(self, path: Path) -> Path:
        """A path where the loop goes on too."""
        return path if self.so_far is None else Path(path, TRUE, self.so_far)


def _bound(target: ast.expr, value: Value, reach: Reach) -> dict[str, Value]:
    """The loop variables of one round."""
    if isinstance(target, ast.Name):
        return {target.id: known(value, reach)}
    assert isinstance(target, ast.Tuple | ast.List)
    values = unpack(value, len(target.elts), reach)
    return {
        part.id: known(one, reach)
        for part, one in zip(target.elts, values, strict=True)
        if isinstance(part, ast.Name)
    }


def known(value: Value, reach: Reach) -> Value:
    """A value that may be used several times: sums are added up."""
    return plain(reach.builder, value) if isinstance(value, Sum) else value
