"""A whole spec in gates: the bits of f(x), and whether x is inside the domain."""

from __future__ import annotations

import ast
from collections.abc import Mapping, Sequence
from dataclasses import dataclass

from revsynth.spec.expression import Scope, parse
from revsynth.spec.formula_reference import Node, read_again
from revsynth.spec.model import Clauses, Cover, Outputs, Permutation, Predicate, Spec, Word
from revsynth.spec.netlist import Netlist
from revsynth.spec.reference import constant_part
from revsynth.verification.translation.gates import (
    FALSE,
    TRUE,
    Bit,
    Gates,
    TooLargeToTranslateError,
    choose,
    either,
    every,
    odd,
    some,
)
from revsynth.verification.translation.lists import Items, Value
from revsynth.verification.translation.numbers import Arithmetic, Number, constant
from revsynth.verification.translation.steps import stepped_bits, word_values
from revsynth.verification.translation.walk import Walk

MODULAR_BITS = 28
"""Input bits of products modulo a number that are still run at every input, in about a minute."""


@dataclass(frozen=True)
class Translation:
    """bits: f(x), the first word lowest; free: where a bit does not count; domain: whether x is inside it."""

    bits: tuple[Bit, ...]
    free: tuple[Bit, ...]
    domain: Bit


def translate(
    spec: Spec,
    outputs: Sequence[Word],
    gates: Gates,
    inputs: Sequence[Bit],
    *,
    by_columns: bool = False,
) -> Translation:
    """Say the spec in gates over the literals of its input bits, the first word lowest, bit 0 first.

    outputs: the output words with their widths. by_columns: how sums and products are added up (see
    `Arithmetic`): the same function in other gates. Raises TooLargeToTranslateError where it cannot be said
    in reasonable size (and for tables, which are looked up instead).
    """
    return _Translator(spec, outputs, gates, inputs, by_columns).translation()


class _Translator:
    def __init__(
        self,
        spec: Spec,
        outputs: Sequence[Word],
        gates: Gates,
        inputs: Sequence[Bit],
        by_columns: bool,
    ) -> None:
        self.spec = spec
        self.by_columns = by_columns
        self.outputs = outputs
        self.gates = gates
        self.inputs = list(inputs)
        self.scope = Scope({word.name: word for word in spec.inputs}, spec.constants)
        self.words = word_values(spec.inputs, self.inputs)

    def translation(self) -> Translation:
        domain = TRUE if self.spec.domain is None else self._condition(self.spec.domain)
        body = self.spec.body
        if isinstance(body, Predicate):
            bits, free = self._predicate(body)
        elif isinstance(body, Outputs):
            bits, free = self._outputs(body)
        else:
            bits, free = self._permutation(body), []
        return Translation(tuple(bits), tuple(free or [FALSE] * len(bits)), domain)

    def _expression(self, text: str) -> Number:
        expression = parse(text, self.scope, source=self.spec.source)
        return Walk(expression, self.gates, self.words, by_columns=self.by_columns).result()

    def _condition(self, text: str) -> Bit:
        return Arithmetic(self.gates).nonzero(self._expression(text))

    def _predicate(self, body: Predicate) -> tuple[list[Bit], list[Bit]]:
        if body.where is not None:
            return [self._condition(body.where)], []
        if body.formula is not None:
            nodes = read_again(body.formula, self.spec.inputs)
            return [_formula(nodes, self.words, self.gates, self.by_columns)], []
        if body.clauses is not None:
            return [_clauses(body.clauses, self.inputs, self.gates)], []
        if body.cover is not None:
            return _cover(body.cover, self.inputs, self.gates)
        if body.netlist is not None:
            return _netlist(body.netlist, self.inputs, self.gates), []
        raise TooLargeToTranslateError("a table")

    def _outputs(self, body: Outputs) -> tuple[list[Bit], list[Bit]]:
        if body.cover is not None:
            return _cover(body.cover, self.inputs, self.gates)
        if body.netlist is not None:
            return _netlist(body.netlist, self.inputs, self.gates), []
        numbers = Arithmetic(self.gates)
        bits: list[Bit] = []
        for output, word in zip(body.words, self.outputs, strict=True):
            if output.value is None:
                raise TooLargeToTranslateError("a table")
            bits += numbers.extended(self._expression(output.value), word.bits)[: word.bits]
        return bits, []

    def _check_provable(self, name: str, text: str) -> None:
        """Raise where a proof would have to undo a product modulo a number in gates, which no solver does.

        That scratch is clean then rests on c * c**-1 being 1 modulo N, which no step of a circuit shows.
        """
        expression = parse(text, self.scope, source=self.spec.source)
        tree = expression.tree
        if not isinstance(tree, ast.BinOp) or not isinstance(tree.op, ast.Mod):
            return
        modulus = constant_part(expression, tree.right, self.spec.constants)
        if self.spec.input_bits <= MODULAR_BITS or not isinstance(modulus, int):
            return
        if modulus & (modulus - 1) and _multiplies(tree.left, set(self.words)):
            raise TooLargeToTranslateError(f"the new value of {name} is a product modulo {modulus}")

    def _permutation(self, body: Permutation) -> list[Bit]:
        if body.steps is not None:
            return stepped_bits(self.spec, body.steps, self.gates, self.inputs)
        if body.map is None:
            raise TooLargeToTranslateError("images one by one")
        numbers = Arithmetic(self.gates)
        for name, text in body.map.items():
            self._check_provable(name, text)
        images = {name: self._expression(text) for name, text in body.map.items()}
        bits: list[Bit] = []
        place = 0
        for word in self.spec.inputs:
            for name, width in word.elements():
                image = images.get(name)
                kept = self.inputs[place : place + width]
                bits += kept if image is None else numbers.extended(image, width)[:width]
                place += width
        return bits


def _multiplies(tree: ast.expr, words: set[str]) -> bool:
    """Whether a word is multiplied anywhere in a tree."""
    return any(
        isinstance(node, ast.BinOp)
        and isinstance(node.op, ast.Mult)
        and any(isinstance(part, ast.Name) and part.id in words for part in ast.walk(node))
        for node in ast.walk(tree)
    )


def _formula(nodes: Sequence[Node], words: Mapping[str, Value], gates: Gates, by_columns: bool) -> Bit:
    found: list[Bit] = []
    for node in nodes:
        if node.kind == "constant":
            found.append(node.constant)
        elif node.kind == "bit":
            value = words[node.name]
            number = value.entries[node.element or 0][1] if isinstance(value, Items) else value
            assert isinstance(number, tuple)
            found.append(number[node.bit])
        else:
            found.append(_operate(node.kind, [found[part] for part in node.parts], gates, by_columns))
    return found[-1]


def _operate(kind: str, parts: list[Bit], gates: Gates, by_columns: bool) -> Bit:
    if kind in ("~", "not", "Not"):
        return parts[0] ^ 1
    if kind in ("&", "and", "And"):
        return every(gates, parts)
    if kind in ("|", "or", "Or"):
        return some(gates, parts)
    if kind in ("^", "!=", "Xor"):
        return odd(gates, parts)
    if kind in ("==", "<=>"):
        return gates.differ(parts[0], parts[1]) ^ 1
    if kind == "=>":
        return either(gates, parts[0] ^ 1, parts[1])
    if kind == "ITE":
        return choose(gates, parts[0], parts[1], parts[2])
    numbers = Arithmetic(gates, by_columns=by_columns)
    count = numbers.count(parts)
    if kind == "Majority":
        return numbers.less(constant(len(parts)), numbers.add(count, count))
    one = numbers.equal(count, constant(1))
    return one if kind == "OneHot" else either(gates, one, numbers.equal(count, constant(0)))


def _clauses(clauses: Clauses, inputs: Sequence[Bit], gates: Gates) -> Bit:
    def bit(literal: int) -> Bit:
        return inputs[abs(literal) - 1] ^ (literal < 0)

    plain = [some(gates, map(bit, clause)) for clause in clauses.clauses]
    return every(gates, plain + [odd(gates, map(bit, clause)) for clause in clauses.xor_clauses])


def _cover(cover: Cover, inputs: Sequence[Bit], gates: Gates) -> tuple[list[Bit], list[Bit]]:
    """On outranks off and free; what no row says is free where 0 means off, and 0 elsewhere."""
    fits = [
        every(gates, (bit ^ (said == "0") for said, bit in zip(row, inputs, strict=True) if said in "01"))
        for row, _ in cover.rows
    ]
    bits, free = [], []
    for column in range(cover.outputs):
        rows = [(fit, said[column]) for fit, (_, said) in zip(fits, cover.rows, strict=True)]
        on = some(gates, [fit for fit, said in rows if said == "1"])
        off = some(gates, [fit for fit, said in rows if said == "0"]) if "r" in cover.kind else FALSE
        open_ = some(gates, [fit for fit, said in rows if said == "-"]) if "d" in cover.kind else FALSE
        left = either(gates, open_, TRUE) if "r" in cover.kind else open_
        bits.append(on)
        free.append(every(gates, (on ^ 1, off ^ 1, left)))
    return bits, free


def _netlist(netlist: Netlist, inputs: Sequence[Bit], gates: Gates) -> list[Bit]:
    found = [FALSE, *inputs]

    def bit(signal: int) -> Bit:
        return found[signal >> 1] ^ (signal & 1)

    for gate in netlist.gates:
        operands = [bit(signal) for signal in gate.operands]
        if gate.kind == "and":
            found.append(every(gates, operands))
        elif gate.kind == "or":
            found.append(some(gates, operands))
        elif gate.kind == "xor":
            found.append(odd(gates, operands))
        else:
            rows = [
                every(
                    gates, (x ^ (said == "0") for said, x in zip(row, operands, strict=True) if said != "-")
                )
                for row in gate.rows
            ]
            found.append(some(gates, rows))
    return [bit(signal) for signal in netlist.outputs]
