"""Which sums are compared several times, so that they are better added up once.

A sum that is compared once is cheaper taken apart: its equality with a constant needs no carry that ripples.
But what `a + b == 3 or a + b == 5` has in common is all of the sum.
"""

from __future__ import annotations

import ast

_Loop = ast.ListComp | ast.GeneratorExp


def repeated_operands(tree: ast.expr) -> frozenset[ast.expr]:
    """The operands of comparisons that stand in the tree more than once, or do not change in a loop."""
    seen: dict[str, list[ast.expr]] = {}
    found: set[ast.expr] = set()
    pending: list[tuple[ast.AST, tuple[frozenset[str], ...]]] = [(tree, ())]
    while pending:
        node, loops = pending.pop()
        if isinstance(node, _Loop):
            loops = (*loops, frozenset(name for one in node.generators for name in _names(one.target)))
        elif isinstance(node, ast.Compare):
            for operand in (node.left, *node.comparators):
                if isinstance(operand, ast.Name | ast.Constant):
                    continue
                seen.setdefault(_key(operand), []).append(operand)
                if loops and not loops[-1].intersection(_names(operand)):
                    found.add(operand)
        pending.extend((child, loops) for child in ast.iter_child_nodes(node))
    for operands in seen.values():
        if len(operands) > 1:
            found.update(operands)
    return frozenset(found)


def _key(operand: ast.expr) -> str:
    """The same for parts that are written alike; a part too deep to be written down has its own."""
    try:
        return ast.dump(operand)
    except RecursionError:
        return f"at {id(operand)}"


def _names(operand: ast.expr) -> set[str]:
    return {name.id for name in ast.walk(operand) if isinstance(name, ast.Name)}
