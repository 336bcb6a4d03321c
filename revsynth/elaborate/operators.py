"""The operators of the language on numbers: which operation each one is."""

from __future__ import annotations

import ast
from collections.abc import Callable, Sequence

from revsynth.elaborate.bitwise import bit_and, bit_or, bit_xor, invert, truth
from revsynth.elaborate.division import floor_divide, remainder
from revsynth.elaborate.linear import equal, less, linear, modulo_power
from revsynth.elaborate.numbers import Number, bounds_of, truth_number
from revsynth.elaborate.products import multiply, power
from revsynth.elaborate.reach import Reach
from revsynth.elaborate.shifts import left_shift, right_shift
from revsynth.logic.network import FALSE, TRUE, Literal
from revsynth.logic.network_builder import NetworkBuilder
from revsynth.spec import arithmetic, bounds
from revsynth.spec.arithmetic import Undefined


def binary(op: type[ast.operator], x: Number, y: Number, reach: Reach) -> Number:
    """x op y for every operator of the language."""
    if isinstance(x, int) and isinstance(y, int):
        return uniform(arithmetic.BINARY[op], reach, x, y)
    return _OPERATIONS[op](x, y, reach)


def uniform(operation: Callable[..., int], reach: Reach, *operands: int) -> int:
    """An operation on numbers that do not depend on the input."""
    try:
        return int(operation(*operands))
    except Undefined as undefined:
        reach.fail(TRUE, undefined.refusal, **undefined.fields)
        return 0


def add(x: Number, y: Number, reach: Reach) -> Number:
    """x + y, added up later together with what is added to it."""
    return linear(reach.builder, [(x, 1), (y, 1)], *bounds.add(bounds_of(x), bounds_of(y)))


def subtract(x: Number, y: Number, reach: Reach) -> Number:
    """x - y."""
    return linear(reach.builder, [(x, 1), (y, -1)], *bounds.subtract(bounds_of(x), bounds_of(y)))


def add_all(terms: Sequence[tuple[Number, int]], reach: Reach) -> Number:
    """The sum of numbers, each times 1 or -1."""
    lo = hi = 0
    for number, sign in terms:
        low, high = bounds_of(number)
        lo, hi = (lo + low, hi + high) if sign > 0 else (lo - high, hi - low)
    return linear(reach.builder, terms, lo, hi)


def unary(op: type[ast.unaryop], x: Number, reach: Reach) -> Number:
    """-x, +x, ~x or not x."""
    if isinstance(x, int):
        return int(arithmetic.UNARY[op](x))
    if op is ast.Not:
        return truth_number(truth(reach.builder, x) ^ 1)
    if op is ast.Invert:
        return invert(reach.builder, x)
    if op is ast.USub:
        return linear(reach.builder, [(x, -1)], *bounds.negate(bounds_of(x)))
    return x


def compare(op: type[ast.cmpop], x: Number, y: Number, builder: NetworkBuilder) -> Literal:
    """Where x op y, for == != < <= > >=."""
    if isinstance(x, int) and isinstance(y, int):
        return TRUE if arithmetic.COMPARE[op](x, y) else FALSE
    if op in (ast.Eq, ast.NotEq):
        return equal(builder, x, y) ^ (op is ast.NotEq)
    if op in (ast.Lt, ast.GtE):
        return less(builder, x, y) ^ (op is ast.GtE)
    return less(builder, y, x) ^ (op is ast.LtE)


def _bit_and(x: Number, y: Number, reach: Reach) -> Number:
    for number, mask in ((x, y), (y, x)):
        if isinstance(mask, int) and mask >= 0 and mask & (mask + 1) == 0:
            return modulo_power(reach.builder, number, mask.bit_length())
    return bit_and(reach.builder, x, y)


_OPERATIONS: dict[type[ast.operator], Callable[[Number, Number, Reach], Number]] = {
    ast.Add: add,
    ast.Sub: subtract,
    ast.Mult: multiply,
    ast.FloorDiv: floor_divide,
    ast.Mod: remainder,
    ast.Pow: power,
    ast.LShift: left_shift,
    ast.RShift: right_shift,
    ast.BitAnd: _bit_and,
    ast.BitOr: lambda x, y, reach: bit_or(reach.builder, x, y),
    ast.BitXor: lambda x, y, reach: bit_xor(reach.builder, x, y),
}
