"""Boolean formulas over single bits."""

from __future__ import annotations

from revsynth.elaborate.linear import equal, less, linear
from revsynth.elaborate.numbers import Number, truth_number
from revsynth.logic.network import Literal
from revsynth.logic.network_builder import NetworkBuilder
from revsynth.spec.formula import Formula


def formula_literal(builder: NetworkBuilder, formula: Formula) -> Literal:
    """Where a formula holds; its bits are the inputs of the network."""
    stack: list[Literal] = []
    for step in formula.steps:
        if step.name == "bit":
            stack.append(builder.input(step.argument))
        elif step.name == "const":
            stack.append(step.argument)
        else:
            operands = stack[len(stack) - step.argument :]
            del stack[len(stack) - step.argument :]
            stack.append(_apply(builder, step.name, operands))
    return stack[0]


def _apply(builder: NetworkBuilder, name: str, operands: list[Literal]) -> Literal:
    first = operands[0]
    if name in ("~", "not", "Not"):
        return first ^ 1
    if name == "ITE":
        return builder.mux(*operands)
    if name == "=>":
        return builder.or_(first ^ 1, operands[1])
    if name in ("==", "<=>"):
        return builder.xor(*operands) ^ 1
    if name in ("&", "and", "And"):
        return builder.all_of(operands)
    if name in ("|", "or", "Or"):
        return builder.any_of(operands)
    if name in ("^", "!=", "Xor"):
        return builder.parity(operands)
    terms: list[tuple[Number, int]] = [(truth_number(operand), 1) for operand in operands]
    count = linear(builder, terms, 0, len(operands))
    if name == "Majority":
        return less(builder, len(operands) // 2, count)
    return equal(builder, count, 1) if name == "OneHot" else less(builder, count, 2)
