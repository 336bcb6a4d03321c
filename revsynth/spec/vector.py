"""The vectorised evaluator: the value of an expression for all 2**n inputs, exactly.

Inputs are numbered by the combined index: the words of the scope in their order, the first word lowest,
element 0 of an array first, signed words by their bit pattern; bit 0 of a word is the least significant.
It must agree with `reference` for every input, errors included.
"""

from __future__ import annotations

import ast
import contextlib
from collections.abc import Iterator
from typing import Any

import numpy as np
from numpy.typing import NDArray

from revsynth.errors import ExpressionError, SpecError
from revsynth.spec.bounds import fits_int64
from revsynth.spec.expression import Expression
from revsynth.spec.lane_values import Numbers
from revsynth.spec.lane_walk import Comparison, Walk, pair
from revsynth.spec.lanes import Lanes, Shared
from revsynth.spec.layout import decode
from revsynth.spec.limits import MAX_INPUT_BITS
from revsynth.spec.model import Word
from revsynth.spec.reference import evaluate
from revsynth.spec.syntax import shortened

_CHUNK = 1 << 16
_HELD = 1 << 25
"""Items of lists, times inputs, that are held at once."""


def evaluate_all(expression: Expression, needed: NDArray[np.bool_] | None = None) -> NDArray[Any]:
    """The value for every input: shape (2**n,), dtype bool or int64, or object where 64 bits do not suffice.

    `needed`, of shape (2**n,), says which inputs count; the entries of the others mean nothing (they are
    0) and never raise. Raises ExpressionError naming the first needed input at which an undefined
    operation is reached, and SpecError beyond MAX_INPUT_BITS input bits. Takes time and memory
    proportional to 2**n.
    """
    return _evaluate(expression, needed, None)


def evaluate_with_warnings(
    expression: Expression, needed: NDArray[np.bool_] | None = None
) -> tuple[NDArray[Any], tuple[str, ...]]:
    """The values as `evaluate_all` gives them, and a line for each comparison that is constant.

    A comparison counts where it depends on the input and gives one answer for all needed inputs at which
    it is defined, such as ~a == 5 for an unsigned word. With fewer than two needed inputs nothing counts.
    """
    comparisons: dict[tuple[ast.Compare, int], Comparison] = {}
    values = _evaluate(expression, needed, comparisons)
    if (values.size if needed is None else int(np.count_nonzero(needed))) < 2:
        return values, ()
    found = []
    for key, seen in comparisons.items():
        if not (seen.ever and seen.never) and (seen.everywhere or _constant(expression, key, needed)):
            found.append(
                (expression.origin.position(key[0]), key[1], constant_comparison(expression, key, seen.ever))
            )
    return values, tuple(dict.fromkeys(text for _, _, text in sorted(found)))


def _evaluate(
    expression: Expression,
    needed: NDArray[np.bool_] | None,
    comparisons: dict[tuple[ast.Compare, int], Comparison] | None,
) -> NDArray[Any]:
    walk = Walk(expression, comparisons)
    result: NDArray[Any] = np.zeros(1 << _input_bits(expression, needed), dtype=np.bool_)
    for lanes in _chunks(expression, needed):
        value = walk.number(expression.tree, lanes)
        failure = lanes.shared.first_failure
        if failure is not None:
            try:
                evaluate(expression, decode(tuple(expression.scope.words.values()), failure))
            except ExpressionError as error:
                error.index = failure
                raise
            raise AssertionError(f"input {failure} failed side by side, but not alone: {expression.text}")
        array = _narrowest(value.array) if isinstance(value, Numbers) else _single(value)
        if result.dtype != array.dtype and _RANK[array.dtype.kind] > _RANK[result.dtype.kind]:
            result = result.astype(array.dtype)
        first, size = int(lanes.index[0]), lanes.size
        if int(lanes.index[-1]) - first + 1 == size:
            result[first : first + size] = array
        else:
            result[lanes.index] = array
    return result


_RANK = {"b": 0, "i": 1, "O": 2}


def _single(value: int) -> NDArray[Any]:
    if isinstance(value, bool):
        return np.array(value)
    return np.array(value, dtype=np.int64 if fits_int64((value, value)) else object)


def _narrowest(array: NDArray[Any]) -> NDArray[Any]:
    if array.dtype == object and fits_int64((array.min(), array.max())):
        return array.astype(np.int64)
    return array


def _input_bits(expression: Expression, needed: NDArray[np.bool_] | None) -> int:
    bits = expression.scope.input_bits
    if bits > MAX_INPUT_BITS:
        raise SpecError(
            f"{bits} input bits are too many to go through all inputs; at most {MAX_INPUT_BITS} are allowed",
            source=expression.source,
            place=expression.place,
        )
    if needed is not None and (needed.shape != (1 << bits,) or needed.dtype != np.bool_):
        raise ValueError(f"needed: bool of shape {(1 << bits,)} wanted, not {needed.dtype} {needed.shape}")
    return bits


def _chunks(expression: Expression, needed: NDArray[np.bool_] | None) -> Iterator[Lanes]:
    """The needed inputs in ascending order, some at a time."""
    layout: dict[str, tuple[Word, int]] = {}
    offset = 0
    for name, word in expression.scope.words.items():
        layout[name] = word, offset
        offset += word.total_bits
    chunk = _CHUNK
    while chunk > 64 and chunk * expression.stored > _HELD:
        chunk >>= 1
    tables: dict[int, tuple[Any, Any]] = {}
    for first in range(0, 1 << offset, chunk):
        end = min(first + chunk, 1 << offset)
        if needed is None:
            index = np.arange(first, end, dtype=np.int64)
        else:
            index = np.flatnonzero(needed[first:end]).astype(np.int64) + first
        if index.size:
            yield Lanes(index, layout, Shared(index.size, tables=tables))


def _constant(expression: Expression, key: tuple[ast.Compare, int], needed: NDArray[np.bool_] | None) -> bool:
    """Whether a comparison that only some inputs reach is constant over all at which it is defined."""
    left, _, right = pair(*key)
    known = {**expression.scope.words, **expression.scope.constants}
    bound = {name.id for part in (left, right) for name in ast.walk(part) if isinstance(name, ast.Name)}
    loops = any(isinstance(part, ast.comprehension) for side in (left, right) for part in ast.walk(side))
    if loops or any(name not in known and name not in _functions(left, right) for name in bound):
        return False
    walk = Walk(expression)
    ever = never = False
    for lanes in _chunks(expression, needed):
        answer = walk.answer(*key, lanes)
        sound = lanes.sound()
        used = answer if sound is None or isinstance(answer, bool) else answer[sound]
        if sound is not None and not sound.any():
            continue
        ever = ever or bool(np.any(used))
        never = never or not np.all(used)
        if ever and never:
            return False
    return True


def _functions(*parts: ast.expr) -> set[str]:
    """Names that are called."""
    calls = (node.func for part in parts for node in ast.walk(part) if isinstance(node, ast.Call))
    return {function.id for function in calls if isinstance(function, ast.Name)}


def constant_comparison(expression: Expression, key: tuple[ast.Compare, int], always: bool) -> str:
    """The warning for a comparison (a pair of a chain by its node and place) that has one answer only."""
    node, origin = key[0], expression.origin
    shown = origin.shown(node)
    if len(node.ops) > 1:
        left, op, right = pair(*key)
        with contextlib.suppress(RecursionError):
            shown = shortened(ast.unparse(ast.Compare(left, [op], [right])))
    where, often = origin.where(*origin.position(node)), "always" if always else "never"
    text = f"{where}: '{shown}' is {often} true over the domain"
    return ": ".join(part for part in (expression.source, expression.place, text) if part)
