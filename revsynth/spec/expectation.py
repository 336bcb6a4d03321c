"""What a spec wants at one input, worked out a second time with none of the tabulating code.

Verification compares with this. Expressions go through the reference evaluator, formulas through their second
reading, clauses and covers are looked up row by row, netlists gate by gate: Python integers, one input at
a time.
"""

from __future__ import annotations

from collections.abc import Callable, Iterator, Mapping, Sequence
from typing import TYPE_CHECKING

from revsynth.errors import ExpressionError
from revsynth.spec.expression import Scope, parse
from revsynth.spec.formula_reference import read_again, value_of, values_of
from revsynth.spec.layout import Value, decode, encode, value_range
from revsynth.spec.model import Clauses, Cover, Output, Outputs, Permutation, Predicate, Word
from revsynth.spec.netlist import Netlist
from revsynth.spec.netlist_reference import netlist_values
from revsynth.spec.reference import evaluate
from revsynth.spec.step_reference import run_steps
from revsynth.spec.steps import parse_steps

if TYPE_CHECKING:
    from revsynth.spec.understand import Understanding

Bits = tuple[int | None, ...]
"""One entry an output bit, bit 0 of the first word first; None where the value is free."""
Rule = Callable[[int, Mapping[str, Value]], Bits]
"""From an input's combined index and its words' values to the bits wanted there."""


class Expectation:
    """The bits that a spec wants at each input, by combined index.

    Parses every expression once; each call then evaluates one input. The bits are those of the rows of
    `Function`: one for a predicate, all output words in order, or the image's combined index.
    """

    def __init__(self, understanding: Understanding) -> None:
        self.spec = understanding.spec
        self.words = understanding.outputs
        self.size = understanding.output_bits
        self._scope = Scope({word.name: word for word in self.spec.inputs}, self.spec.constants)
        self._domain = None if self.spec.domain is None else self._number(self.spec.domain)
        self._rule = self._rule_for(self.spec.body)

    def __call__(self, index: int) -> Bits:
        """The bits at one input; all None outside the domain.

        Raises ExpressionError where an expression is undefined there.
        """
        values = decode(self.spec.inputs, index)
        if self._domain is not None and not self._domain(values):
            return (None,) * self.size
        return self._rule(index, values)

    def at(self, indices: Sequence[int]) -> Iterator[Bits]:
        """The bits at several inputs, in order; formulas and netlists are evaluated for all together."""
        body = self.spec.body
        netlist = None if isinstance(body, Permutation) else body.netlist
        if netlist is not None:
            for index, bits in zip(indices, netlist_values(netlist, indices), strict=True):
                yield bits if self.in_domain(index) else (None,) * self.size
            return
        formula = body.formula if isinstance(body, Predicate) else None
        if formula is None:
            yield from map(self, indices)
            return
        nodes = read_again(formula, self.spec.inputs)
        values = values_of(nodes, [decode(self.spec.inputs, index) for index in indices])
        for index, value in zip(indices, values, strict=True):
            yield (value if self.in_domain(index) else None,)

    def in_domain(self, index: int) -> bool:
        """Whether an input is inside the domain."""
        return self._domain is None or bool(self._domain(decode(self.spec.inputs, index)))

    def _number(self, text: str) -> Callable[[Mapping[str, Value]], int]:
        expression = parse(text, self._scope, source=self.spec.source)
        return lambda values: int(evaluate(expression, values))

    def _rule_for(self, body: Predicate | Outputs | Permutation) -> Rule:
        if isinstance(body, Predicate):
            return self._predicate(body)
        if isinstance(body, Outputs):
            if body.cover is not None:
                return _cover_rule(body.cover)
            return self._outputs(body) if body.netlist is None else _netlist_rule(body.netlist)
        return self._permutation(body)

    def _predicate(self, body: Predicate) -> Rule:
        if body.where is not None:
            number = self._number(body.where)
            return lambda index, values: (_truth(number(values)),)
        if body.formula is not None:
            nodes = read_again(body.formula, self.spec.inputs)
            return lambda index, values: (value_of(nodes, values),)
        if body.table is not None:
            table = body.table
            return lambda index, values: (table[index],)
        if body.cover is not None:
            return _cover_rule(body.cover)
        if body.netlist is not None:
            return _netlist_rule(body.netlist)
        clauses = body.clauses or Clauses(0, ())
        return lambda index, values: (int(_satisfies(clauses, index)),)

    def _outputs(self, body: Outputs) -> Rule:
        rules = [self._output(output, word) for output, word in zip(body.words, self.words, strict=True)]
        return lambda index, values: tuple(bit for rule in rules for bit in rule(index, values))

    def _output(self, output: Output, word: Word) -> Rule:
        table = output.table or ()
        number = None if output.value is None else self._number(output.value)
        lowest, highest = value_range(word)

        def rule(index: int, values: Mapping[str, Value]) -> Bits:
            wanted = table[index] if number is None else number(values)
            if output.bits is None and wanted is not None and not lowest <= wanted <= highest:
                raise AssertionError(f"{word.name} was taken for {word.bits} bits, but holds {wanted}")
            return _bits(wanted, word.bits)

        return rule

    def _permutation(self, body: Permutation) -> Rule:
        size = self.size
        if body.values is not None:
            images = body.values
            return lambda index, values: _bits(images[index], size)
        if body.steps is not None:
            steps = parse_steps(self.spec, body.steps)
            return lambda index, values: _bits(run_steps(self.spec, steps, index), size)
        numbers = {name: self._number(text) for name, text in (body.map or {}).items()}

        def rule(index: int, values: Mapping[str, Value]) -> Bits:
            after: dict[str, int | Sequence[int]] = dict(values)
            for name, number in numbers.items():
                word, bracket, element = name.partition("[")
                if bracket:
                    elements = list(after[word])  # type: ignore[arg-type]
                    elements[int(element.rstrip("]"))] = number(values)
                    after[word] = elements
                else:
                    after[word] = number(values)
            return _bits(encode(self.spec.inputs, after), size)

        return rule


def expected_value(understanding: Understanding, index: int) -> Bits:
    """The bits that a spec wants at one input. For many inputs, make one `Expectation` and call it."""
    return Expectation(understanding)(index)


def _truth(number: int) -> int:
    if number not in (0, 1):
        raise ExpressionError(f"a condition is true or false, or 0 or 1, not {number}")
    return number


def _bits(number: int | None, size: int) -> Bits:
    return tuple(None if number is None else number >> bit & 1 for bit in range(size))


def _satisfies(clauses: Clauses, index: int) -> bool:
    def holds(literal: int) -> bool:
        return (index >> (abs(literal) - 1) & 1) == (literal > 0)

    return all(any(map(holds, clause)) for clause in clauses.clauses) and all(
        sum(map(holds, clause)) % 2 == 1 for clause in clauses.xor_clauses
    )


def _netlist_rule(netlist: Netlist) -> Rule:
    return lambda index, values: netlist_values(netlist, (index,))[0]


def _cover_rule(cover: Cover) -> Rule:
    """Look through the rows: on and off outrank free; what no row says is free where 0 means off."""
    unlisted = None if "r" in cover.kind else 0
    rows = [(_literals(inputs, "01"), _literals(inputs, "1"), outputs) for inputs, outputs in cover.rows]

    def rule(index: int, values: Mapping[str, Value]) -> Bits:
        covering = [outputs for care, value, outputs in rows if index & care == value]
        seen = map("".join, zip(*covering, strict=True)) if covering else [""] * cover.outputs
        return tuple(_covered(said, cover.kind, unlisted) for said in seen)

    return rule


def _literals(inputs: str, which: str) -> int:
    """The columns of a row's input part that hold one of these characters; column i is bit i."""
    return sum(1 << column for column, character in enumerate(inputs) if character in which)


def _covered(said: str, kind: str, unlisted: int | None) -> int | None:
    if "1" in said:
        return 1
    if "0" in said and "r" in kind:
        return 0
    if "-" in said and "d" in kind:
        return None
    return unlisted
