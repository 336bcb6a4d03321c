"""Which bits of the combined index a target stands for, and which bits an expression may read.

An index that depends on the input counts as reading all it could pick from; loops over constants are gone
through round by round.
"""

from __future__ import annotations

import ast
from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass
from typing import Any

from revsynth.spec.expression import Expression
from revsynth.spec.model import Constant, Word
from revsynth.spec.reference import constant_part

_UNKNOWN = object()


@dataclass(frozen=True)
class Place:
    """Neighbouring bits of the combined index: `first` is the lowest; signed: a whole signed word."""

    text: str
    first: int
    bits: int
    signed: bool = False

    @property
    def range(self) -> range:
        """The bits, the least significant first."""
        return range(self.first, self.first + self.bits)

    def overlaps(self, other: Place) -> bool:
        """Whether the two have a bit in common."""
        return self.first < other.first + other.bits and other.first < self.first + self.bits


@dataclass(frozen=True)
class _Array:
    """An array of words, from the bit `first` on."""

    first: int
    word: Word


class Places:
    """The words of a spec by their bits."""

    def __init__(self, words: Sequence[Word], constants: Mapping[str, Constant]) -> None:
        self.constants = constants
        self._words: dict[str, Place | _Array] = {}
        first = 0
        for word in words:
            if word.count is None:
                self._words[word.name] = Place(word.name, first, word.bits, word.signed)
            else:
                self._words[word.name] = _Array(first, word)
            first += word.total_bits

    def target(self, expression: Expression) -> Place | str:
        """The bits that an expression is a name for; else why they cannot be a target, in words."""
        found = self._named(expression.tree, expression, self.constants)
        if isinstance(found, Place):
            return Place(" ".join(expression.text.split()), found.first, found.bits, found.signed)
        node = expression.tree
        while isinstance(node, ast.Subscript):
            node = node.value
        shown = " ".join(expression.text.split())
        if isinstance(node, ast.Name) and node.id in self._words:
            if self._constant_indexes(expression):
                return f"{shown} holds no bits"
            return "an index on the left is a constant: which bits a step changes may not depend on the input"
        return f"{shown} is not a word, nor bits of one: a step changes words, such as {self._some()}"

    def _constant_indexes(self, expression: Expression) -> bool:
        """Whether all indexes behind a name are constants."""
        node = expression.tree
        while isinstance(node, ast.Subscript):
            index = node.slice
            parts = [index.lower, index.upper] if isinstance(index, ast.Slice) else [index]
            for part in parts:
                if part is not None and self._constant(part, expression, self.constants) is None:
                    return False
            node = node.value
        return True

    def array(self, node: ast.expr) -> str | None:
        """Why a bare name cannot be a target, where it is that of an array; None for all else."""
        if isinstance(node, ast.Name) and isinstance(self._words.get(node.id), _Array):
            return f"{node.id} is an array: change its words one by one, such as {node.id}[0]"
        return None

    def _some(self) -> str:
        name, found = next(iter(self._words.items()))
        return f"{name}[0]" if isinstance(found, _Array) else name

    def constant(self, expression: Expression) -> int | None:
        """The value of an expression that reads no word; None for others."""
        value = self._constant(expression.tree, expression, self.constants)
        return int(value) if isinstance(value, int) else None

    def _constant(self, node: ast.expr, expression: Expression, known: Mapping[str, Any]) -> Any:
        names = {part.id for part in ast.walk(node) if isinstance(part, ast.Name)}
        return None if names & set(self._words) else constant_part(expression, node, known)

    def _named(
        self, node: ast.expr, expression: Expression, known: Mapping[str, Any]
    ) -> Place | _Array | None:
        """The word, array or bits that a name, with constant indexes behind it, stands for."""
        indexes: list[ast.expr] = []
        while isinstance(node, ast.Subscript):
            indexes.append(node.slice)
            node = node.value
        found = self._words.get(node.id) if isinstance(node, ast.Name) else None
        for index in reversed(indexes):
            if found is None:
                return None
            found = self._part(found, index, expression, known)
        return found

    def _part(
        self, whole: Place | _Array, index: ast.expr, expression: Expression, known: Mapping[str, Any]
    ) -> Place | None:
        """The bits at a constant index, or slice; None where it is none, or out of range."""
        if isinstance(index, ast.Slice):
            if isinstance(whole, _Array) or index.step is not None:
                return None
            low = 0 if index.lower is None else self._constant(index.lower, expression, known)
            high = whole.bits if index.upper is None else self._constant(index.upper, expression, known)
            if low is None or high is None or not 0 <= low < high <= whole.bits:
                return None
            return Place("", whole.first + int(low), int(high) - int(low))
        at = self._constant(index, expression, known)
        if not isinstance(at, int):
            return None
        if isinstance(whole, Place):
            return Place("", whole.first + at, 1) if 0 <= at < whole.bits else None
        word = whole.word
        count = word.count or 1
        if not -count <= at < count:
            return None
        return Place("", whole.first + at % count * word.bits, word.bits, word.signed)

    def read(self, expression: Expression) -> set[int]:
        """The bits that the value of an expression may depend on."""
        found: set[int] = set()
        pending: list[tuple[ast.AST, Mapping[str, Any]]] = [(expression.tree, self.constants)]
        while pending:
            node, known = pending.pop()
            if isinstance(node, ast.Name | ast.Subscript):
                named = self._named(node, expression, known)
                if isinstance(named, Place):
                    found.update(named.range)
                    continue
                if isinstance(named, _Array):
                    found.update(range(named.first, named.first + named.word.total_bits))
                    continue
            if isinstance(node, ast.ListComp | ast.GeneratorExp):
                pending.extend(self._rounds(node, expression, known))
            elif isinstance(node, ast.Call):
                pending.extend((argument, known) for argument in node.args)
            else:
                pending.extend((child, known) for child in ast.iter_child_nodes(node))
        return found

    def _rounds(
        self, node: ast.ListComp | ast.GeneratorExp, expression: Expression, known: Mapping[str, Any]
    ) -> Iterator[tuple[ast.AST, Mapping[str, Any]]]:
        """All parts of a comprehension, with what each loop variable stands for where that is constant."""
        pending: list[tuple[int, Mapping[str, Any]]] = [(0, known)]
        while pending:
            level, names = pending.pop()
            if level == len(node.generators):
                yield node.elt, names
                continue
            loop = node.generators[level]
            items = self._constant(loop.iter, expression, names)
            if items is None:
                yield loop.iter, names
                rounds = [_bound(loop.target, _UNKNOWN)]
            else:
                rounds = [_bound(loop.target, item) for item in items]
            for bound in rounds:
                inner = {name: value for name, value in {**names, **bound}.items() if value is not _UNKNOWN}
                yield from ((condition, inner) for condition in loop.ifs)
                pending.append((level + 1, inner))


def _bound(target: ast.expr, value: Any) -> dict[str, Any]:
    """Loop variables of one round."""
    if isinstance(target, ast.Name):
        return {target.id: value}
    assert isinstance(target, ast.Tuple | ast.List)
    names = [part.id for part in target.elts if isinstance(part, ast.Name)]
    values = list(value) if isinstance(value, list | tuple) and len(value) == len(names) else []
    return dict(zip(names, values or [_UNKNOWN] * len(names), strict=True))
