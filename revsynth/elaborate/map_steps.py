"""Maps that are steps in other words: sums modulo 2**bits, XORs and exchanges, in an order that suits them
all.

All new values of a map are of the old words. Where every word's new value is its old one changed by what
other words hold, the words are changed one after the other, each before any word that its new value reads.
"""

from __future__ import annotations

import ast
from collections.abc import Mapping
from dataclasses import dataclass

from revsynth.elaborate.stepped import program_of_steps
from revsynth.errors import SpecError
from revsynth.logic.in_place_program import Program
from revsynth.spec.expression import Expression, Scope, parse
from revsynth.spec.images import register_of
from revsynth.spec.model import Spec, Word
from revsynth.spec.reference import constant_part
from revsynth.spec.step_bits import Places
from revsynth.spec.steps import parse_steps


@dataclass(frozen=True)
class _Entry:
    """A word that changes, the step that changes it, and the bits that the step reads."""

    bits: frozenset[int]
    text: str
    read: frozenset[int]


def stepped_map(spec: Spec, new_values: Mapping[str, str]) -> Program | None:
    """The program of such a map; None for others."""
    scope = Scope({word.name: word for word in spec.inputs}, spec.constants)
    parsed = {
        name: parse(text, scope, source=spec.source, place=f"[permutation] map {name}")
        for name, text in new_values.items()
    }
    places = Places(spec.inputs, spec.constants)
    entries: list[_Entry] = []
    for name, expression in parsed.items():
        found = _exchange(spec, name, parsed)
        if found is None:
            found = _change(spec, name, expression)
        if found is None:
            return None
        if not found:
            continue
        first, word = register_of(spec, name)
        own = frozenset(range(first, first + word.bits))
        entries.append(_Entry(own, found, frozenset(places.read(expression)) - own))
    ordered = _ordered(entries)
    if ordered is None:
        return None
    try:
        steps = parse_steps(spec, [entry.text for entry in ordered])
    except SpecError:
        return None
    return program_of_steps(spec, steps)


def _exchange(spec: Spec, name: str, parsed: Mapping[str, Expression]) -> str | None:
    """A step for two words that exchange their values, at the first of them; "" at the second."""
    other = ast.unparse(parsed[name].tree)
    if other == name or other not in parsed or ast.unparse(parsed[other].tree) != name:
        return None
    one, two = register_of(spec, name)[1], register_of(spec, other)[1]
    if (one.bits, one.signed) != (two.bits, two.signed):
        return None
    order = list(parsed)
    return f"{name}, {other} = {other}, {name}" if order.index(name) < order.index(other) else ""


def _change(spec: Spec, name: str, expression: Expression) -> str | None:
    """A step for a word that something is added to, taken from or XORed to; None for anything else."""
    word: Word = register_of(spec, name)[1]
    tree = expression.tree
    if ast.unparse(tree) == name:
        return ""
    if not word.signed and isinstance(tree, ast.BinOp) and isinstance(tree.op, ast.Mod):
        inner = tree.left
        modulus = constant_part(expression, tree.right, spec.constants)
        if modulus == 1 << word.bits and isinstance(inner, ast.BinOp):
            sign = {ast.Add: "+=", ast.Sub: "-="}.get(type(inner.op))
            return None if sign is None else _combined(name, inner, sign)
    if isinstance(tree, ast.BinOp) and isinstance(tree.op, ast.BitXor):
        return _combined(name, tree, "^=")
    return None


def _combined(name: str, node: ast.BinOp, sign: str) -> str | None:
    """`name sign E` for name + E, E + name and the like; None where the word is on neither side."""
    if ast.unparse(node.left) == name:
        return f"{name} {sign} {ast.unparse(node.right)}"
    if ast.unparse(node.right) == name and sign != "-=":
        return f"{name} {sign} {ast.unparse(node.left)}"
    return None


def _ordered(entries: list[_Entry]) -> list[_Entry] | None:
    """Every entry before those whose words it reads; None where they go around in a circle."""
    left, found = list(entries), []
    while left:
        for entry in left:
            if not any(other is not entry and other.read & entry.bits for other in left):
                found.append(entry)
                left.remove(entry)
                break
        else:
            return None
    return found
