"""Maps that are arithmetic modulo a constant, recognised from their trees: (a * c + d) % N, word by word.

Such a map is one-to-one on a < N exactly where c and N have no common factor (common practice), so nothing
has to be tabulated or searched.
"""

from __future__ import annotations

import ast
from collections.abc import Mapping
from dataclasses import dataclass
from math import gcd

from revsynth.elaborate.expressions import Expressions
from revsynth.elaborate.linear import less
from revsynth.errors import SpecError
from revsynth.logic.in_place_program import (
    Add,
    AddModulo,
    MultiplyModulo,
    Operation,
    Program,
    ProgramStep,
    ShiftAdd,
    Xor,
    odd_factors,
)
from revsynth.logic.network import FALSE, TRUE, Literal
from revsynth.logic.network_builder import NetworkBuilder
from revsynth.spec.expression import Expression, Scope, parse
from revsynth.spec.images import register_of
from revsynth.spec.model import Spec, Word
from revsynth.spec.reference import constant_part
from revsynth.spec.syntax import chain

CONFLICTS = 200_000


@dataclass(frozen=True)
class Modular:
    """The new value of one word: (word * factor + constant) % modulus; the factor is below the modulus."""

    name: str
    first: int
    word: Word
    factor: int
    constant: int
    modulus: int


def modular_program(spec: Spec, new_values: Mapping[str, str]) -> Program | None:
    """The program of a map whose every new value is modular arithmetic of that word alone; None for others.

    Raises SpecError where it is not one-to-one on its domain, naming two inputs or the common factor.
    """
    scope = Scope({word.name: word for word in spec.inputs}, spec.constants)
    found: list[Modular] = []
    for name, text in new_values.items():
        expression = parse(text, scope, source=spec.source, place=f"[permutation] map {name}")
        one = _recognised(spec, name, expression)
        if one is None:
            return None
        found.append(one)
    for one in found:
        if not _below(spec, one):
            return None
    for one in found:
        _check_factor(spec, one)
    return Program(spec.input_bits, tuple(_step(spec, one) for one in found))


def _recognised(spec: Spec, name: str, expression: Expression) -> Modular | None:
    tree = expression.tree
    if not isinstance(tree, ast.BinOp) or not isinstance(tree.op, ast.Mod):
        return None
    modulus = constant_part(expression, tree.right, spec.constants)
    first, word = register_of(spec, name)
    if not isinstance(modulus, int) or not 1 < modulus <= 1 << word.bits or word.signed:
        return None
    form = _linear(expression, tree.left, name, spec)
    if form is None or form[0] % modulus == 0:
        return None
    return Modular(name, first, word, form[0] % modulus, form[1] % modulus, int(modulus))


def _linear(expression: Expression, node: ast.expr, name: str, spec: Spec) -> tuple[int, int] | None:
    """(factor, constant) of a part that is a multiple of the word plus a constant; None for others."""
    if _is_word(node, name):
        return 1, 0
    constant = constant_part(expression, node, spec.constants)
    if isinstance(constant, int):
        return 0, int(constant)
    if isinstance(node, ast.UnaryOp) and isinstance(node.op, ast.USub):
        form = _linear(expression, node.operand, name, spec)
        return None if form is None else (-form[0], -form[1])
    if not isinstance(node, ast.BinOp):
        return None
    first, operations = chain(node)
    result = _linear(expression, first, name, spec)
    for operation in operations:
        right = _linear(expression, operation.right, name, spec)
        result = None if result is None or right is None else _combined(operation.op, result, right)
    return result


def _combined(op: ast.operator, left: tuple[int, int], right: tuple[int, int]) -> tuple[int, int] | None:
    if isinstance(op, ast.Add):
        return left[0] + right[0], left[1] + right[1]
    if isinstance(op, ast.Sub):
        return left[0] - right[0], left[1] - right[1]
    if isinstance(op, ast.Mult) and 0 in (left[0], right[0]):
        return left[0] * right[1] + left[1] * right[0], left[1] * right[1]
    return None


def _is_word(node: ast.expr, name: str) -> bool:
    """Whether a part is the word itself, or the element of an array by a written-out index."""
    return isinstance(node, ast.Name | ast.Subscript) and ast.unparse(node) == name


def _step(spec: Spec, one: Modular) -> ProgramStep:
    """Modulo a power of two sums and products simply drop their carry."""
    builder = NetworkBuilder(spec.input_bits)
    size = (one.modulus - 1).bit_length()
    found: list[Operation] = []
    if one.modulus == 1 << size:
        target = tuple(range(one.first, one.first + size))
        negate, subtract, shifts = odd_factors(one.factor, size)
        if negate:
            found.append(Xor(target, (1,) * size))
            found.append(Add(target, (1, *(0,) * (size - 1))))
        found.extend(ShiftAdd(target, shift, subtract) for shift in shifts)
        if one.constant:
            found.append(Add(target, tuple(one.constant >> place & 1 for place in range(size))))
    else:
        target = tuple(range(one.first, one.first + one.word.bits))
        if one.factor != 1:
            found.append(MultiplyModulo(target, one.factor, one.modulus))
        if one.constant:
            found.append(AddModulo(target, one.constant, one.modulus))
    return ProgramStep(builder.build([FALSE, TRUE]), tuple(found))


def _check_factor(spec: Spec, one: Modular) -> None:
    common = gcd(one.factor, one.modulus)
    if common > 1:
        other = one.modulus // common
        raise SpecError(
            f"not one-to-one: the factor {one.factor} and the modulus {one.modulus} are both multiples of "
            f"{common}, so {one.name} = 0 and {one.name} = {other} both become {one.constant}",
            source=spec.source,
            place=f"[permutation] map {one.name}",
        )


def _below(spec: Spec, one: Modular) -> bool:
    """Whether the word is below the modulus all over the domain, by a solver if need be."""
    if one.modulus == 1 << one.word.bits:
        return True
    if spec.domain is None:
        return False
    builder = NetworkBuilder(spec.input_bits)
    expressions = Expressions(spec, builder)
    inside = expressions.condition(spec.domain, "[domain] where")
    _, number = expressions.number(one.name, f"[permutation] map {one.name}")
    outside = builder.and_(inside, less(builder, number, one.modulus) ^ 1)
    return outside == FALSE or _never(builder, outside)


def _never(builder: NetworkBuilder, literal: Literal) -> bool:
    from revsynth.logic.equivalence import prove_equal

    proof = prove_equal(builder.build([literal]), builder.build([FALSE]), conflicts=CONFLICTS)
    return proof.equal is True
