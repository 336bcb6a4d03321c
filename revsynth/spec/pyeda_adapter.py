"""PyEDA as an independent second opinion on formulas. The only module that imports it.

PyEDA orders variables by when they were made, drops those that cancel, takes any non-zero integer for 1 and
recurses in its parser. So here every bit gets a variable of its own name, operators are applied one by one to
variables and to 0 and 1 only, and results are spread over all inputs in our order, unused bits included.
"""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

import numpy as np
from numpy.typing import NDArray

from revsynth.errors import ExpressionError
from revsynth.spec.formula_reference import Node, read_again
from revsynth.spec.layout import bit_names
from revsynth.spec.model import Word

WHOLE_COLUMN = 12
"""Most input bits for a whole column: PyEDA takes seconds from there on."""
DEEPEST = 100
"""Most operations within each other: PyEDA recurses."""
WIDEST_MAJORITY = 11
"""Most arguments of Majority: PyEDA writes out every choice of more than half of them."""


def second_opinion(
    text: str, words: Sequence[Word], indices: Sequence[int] | None = None, *, source: str = ""
) -> NDArray[np.uint8]:
    """What PyEDA says the formula's values are: at the given inputs, or at all 2**n (n at most WHOLE_COLUMN).

    indices: inputs by combined index (bit 0 the least significant bit of the first word). The result is
    0/1, shape (len(indices),) or (2**n,), input 0 first.
    Raises ExpressionError where the formula is too wide, too deep or no formula.
    """
    names = list(bit_names(words))
    nodes = read_again(text, words)
    _check_size(nodes, len(names), indices is None, source)
    variables = {name: _variable(number) for number, name in enumerate(names)}
    expression = _build(nodes, variables)
    if indices is None:
        return _whole_column(expression, [variables[name] for name in names])
    found = [_value_at(expression, [variables[name] for name in names], index) for index in indices]
    return np.array(found, dtype=np.uint8)


def _check_size(nodes: Sequence[Node], inputs: int, whole: bool, source: str) -> None:
    if whole and inputs > WHOLE_COLUMN:
        raise ExpressionError(
            f"PyEDA gives whole columns up to {WHOLE_COLUMN} input bits, this has {inputs}", source=source
        )
    depth: list[int] = []
    for node in nodes:
        depth.append(1 + max((depth[part] for part in node.parts), default=0))
        if node.kind == "Majority" and len(node.parts) > WIDEST_MAJORITY:
            raise ExpressionError(
                f"PyEDA takes Majority of at most {WIDEST_MAJORITY} bits, not {len(node.parts)}",
                source=source,
            )
    if max(depth) > DEEPEST:
        raise ExpressionError(
            f"PyEDA takes at most {DEEPEST} operations within each other, not {max(depth)}", source=source
        )


def _variable(number: int) -> Any:
    from pyeda.boolalg.expr import exprvar

    return exprvar("input", number)


def _build(nodes: Sequence[Node], variables: dict[str, Any]) -> Any:
    from pyeda.boolalg import expr

    operators = {
        "~": expr.Not, "not": expr.Not, "Not": expr.Not, "&": expr.And, "and": expr.And, "And": expr.And,
        "|": expr.Or, "or": expr.Or, "Or": expr.Or, "^": expr.Xor, "Xor": expr.Xor, "==": expr.Equal,
        "<=>": expr.Equal, "!=": expr.Unequal, "=>": expr.Implies, "ITE": expr.ITE,
        "Majority": expr.Majority, "OneHot": expr.OneHot, "OneHot0": expr.OneHot0,
    }  # fmt: skip
    built: list[Any] = []
    for node in nodes:
        if node.kind == "constant":
            built.append(expr.One if node.constant else expr.Zero)
        elif node.kind == "bit":
            name = node.name if node.element is None else f"{node.name}[{node.element}]"
            built.append(variables[f"{name}[{node.bit}]"])
        else:
            built.append(operators[node.kind](*(built[part] for part in node.parts)))
    return built[-1]


def _value_at(expression: Any, variables: Sequence[Any], index: int) -> int:
    point = {variable: index >> bit & 1 for bit, variable in enumerate(variables)}
    return int(bool(expression.restrict({key: point[key] for key in expression.inputs}).is_one()))


def _whole_column(expression: Any, variables: Sequence[Any]) -> NDArray[np.uint8]:
    """PyEDA's image over the variables it kept (its first input fastest), spread over all inputs."""
    kept = [variables.index(variable) for variable in expression.inputs]
    values = np.array([int(value.is_one()) for value in expression.iter_image()], dtype=np.uint8)
    everything = np.arange(1 << len(variables))
    row = np.zeros_like(everything)
    for position, bit in enumerate(kept):
        row |= (everything >> bit & 1) << position
    return values[row]
