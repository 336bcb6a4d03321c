"""What a spec wants at many chosen inputs at once, exactly, for specs too wide to be tabulated.

Inputs are columns of bits of the combined index, packed 64 inputs a word. Expressions go through the
vectorised evaluator (with Python's own integers where 64 bits do not suffice), formulas, clauses, covers and
netlists gate by gate over Python's big integers, one bit an input; all else input by input.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any, Literal

import numpy as np
from numpy.typing import NDArray

from revsynth.errors import ExpressionError
from revsynth.spec.expectation import Expectation
from revsynth.spec.expression import Expression, Scope, parse
from revsynth.spec.images import unfit_error
from revsynth.spec.lane_values import Numbers, Value
from revsynth.spec.lane_walk import Walk
from revsynth.spec.lanes import Lanes, Shared
from revsynth.spec.layout import decode, describe, value_range
from revsynth.spec.model import Outputs, Permutation, Predicate, Word
from revsynth.spec.over_domain import condition_error
from revsynth.spec.reference import evaluate
from revsynth.spec.sampled_gates import Gatewise, gatewise
from revsynth.spec.sampled_steps import SampledSteps
from revsynth.spec.step_reference import run_steps

if TYPE_CHECKING:
    from revsynth.spec.understand import Understanding

Words = NDArray[np.uint64]
Masks = NDArray[np.bool_]

LANES = 1 << 14
"""Inputs that are evaluated together: their columns stay in the cache."""
_SMALL_BITS = 62
_PLAIN_COST = 4
_LARGE_COST = 800
"""Rough costs of one operation at one input, in units of 1/4 ns: on 64-bit words, on Python's integers."""
_ALONE_COST = 200_000
"""The same for one input that is evaluated alone."""
_BUDGET = 4_000_000_000
"""In these units: about a second."""


@dataclass(frozen=True)
class Wanted:
    """By output bit, packed as the inputs: its value, and where it is free; and where inputs are inside."""

    domain: Words
    bits: Words
    free: Words


@dataclass(frozen=True)
class _Wish:
    """An output word and its expression (None: the input bits at the same place, as they are)."""

    expression: Expression | None
    word: Word
    kind: Literal["condition", "low bits", "exact"]


class SampledSpec:
    """Evaluates one spec at many inputs."""

    def __init__(self, understanding: Understanding) -> None:
        self.spec = understanding.spec
        self.size = understanding.output_bits
        self.input_bits = understanding.input_bits
        self._expectation = Expectation(understanding)
        scope = Scope({word.name: word for word in self.spec.inputs}, self.spec.constants)

        def parsed(text: str) -> Expression:
            return parse(text, scope, source=self.spec.source)

        self._domain = None if self.spec.domain is None else parsed(self.spec.domain)
        self._values: list[_Wish] = []
        self._gatewise: Gatewise | None = None
        body = self.spec.body
        if isinstance(body, Predicate) and body.where is not None:
            self._values = [_Wish(parsed(body.where), Word("", 1), "condition")]
        elif (
            isinstance(body, Outputs)
            and body.words
            and all(output.value is not None for output in body.words)
        ):
            self._values = [
                _Wish(parsed(output.value or ""), word, "low bits")
                for output, word in zip(body.words, understanding.outputs, strict=True)
            ]
        elif isinstance(body, Permutation) and body.map is not None:
            images = {name: parsed(text) for name, text in body.map.items()}
            self._values = [
                _Wish(images.get(name), Word(name, bits, word.signed), "exact")
                for word in self.spec.inputs
                for name, bits in word.elements()
            ]
        self._steps: SampledSteps | None = None
        if isinstance(body, Permutation) and body.steps is not None:
            self._steps = SampledSteps(self.spec, body.steps, self._in_state)
        elif not self._values:
            self._gatewise = gatewise(self.spec)

    def count(self, most: int) -> int:
        """How many inputs, at most `most`, take about a second: a function of the spec alone."""
        cost = 0
        evaluated = [self._domain, *(wish.expression for wish in self._values)]
        if self._steps is not None:
            cost += self._steps.cost
            evaluated += self._steps.expressions
        if any(expression is not None for expression in evaluated):
            probe = self._probe()
            for expression in evaluated:
                if expression is None:
                    continue
                counting = _Counting(expression)
                counting.value(expression.tree, probe)
                cost += counting.cost
        if not self._values and self._steps is None:
            cost += _ALONE_COST if self._gatewise is None else self._gatewise.cost
        return max(min(most, _BUDGET // max(cost, 1)) & -64, 64)

    def _probe(self) -> Lanes:
        words = np.random.default_rng(0).integers(0, 1 << 64, (self.input_bits, 1), dtype=np.uint64)
        return _Sample(self.spec.inputs, words).lanes()

    def wanted(self, inputs: Words) -> Wanted:
        """What is wanted at the inputs of columns, uint64 (input bits, words).

        Raises ExpressionError, naming an input, where the spec is undefined at one inside the domain.
        """
        parts = [
            self._block(inputs[:, at : at + LANES // 64]) for at in range(0, inputs.shape[1], LANES // 64)
        ]
        return Wanted(
            np.concatenate([part.domain for part in parts]),
            np.concatenate([part.bits for part in parts], axis=1),
            np.concatenate([part.free for part in parts], axis=1),
        )

    def _block(self, inputs: Words) -> Wanted:
        sample = _Sample(self.spec.inputs, inputs)
        words = inputs.shape[1]
        inside = np.ones(64 * words, dtype=np.bool_)
        if self._domain is not None:
            inside = np.asarray(_filled(self._evaluated(self._domain, sample, inside), 64 * words) != 0)
        domain = packed_bits(inside[None, :])[0]
        free = np.zeros((self.size, words), dtype=np.uint64)
        if self._values:
            bits = self._words(sample, inside, inputs)
        elif self._steps is not None:
            bits = self._stepped(self._steps, sample, inside)
        elif self._gatewise is not None:
            bits, free = self._gatewise.columns(inputs)
        else:
            bits, free = self._alone(sample)
        return Wanted(domain, bits & domain, free | ~domain)

    def _stepped(self, steps: SampledSteps, sample: _Sample, inside: Masks) -> Words:
        """The columns after all steps; an error names the input from the start."""
        try:
            return steps.columns(sample.inputs, inside)
        except ExpressionError as error:
            if error.index is not None:
                run_steps(self.spec, steps.steps, sample.index(error.index))
            raise

    def _in_state(self, expression: Expression, state: Words, inside: Masks) -> NDArray[Any]:
        """The values of an expression between two steps."""
        return _filled(self._evaluated(expression, _Sample(self.spec.inputs, state), inside), len(inside))

    def _words(self, sample: _Sample, inside: Masks, inputs: Words) -> Words:
        """The packed columns of all output words."""
        found: list[Words] = []
        place = 0
        for wish in self._values:
            if wish.expression is None:
                found.append(inputs[place : place + wish.word.bits])
            else:
                array = _filled(self._evaluated(wish.expression, sample, inside), len(inside))
                self._check(wish, array, sample, inside)
                found.append(packed_bits(_bit_rows(array, wish.word.bits)))
            place += wish.word.bits
        return np.concatenate(found)

    def _check(self, wish: _Wish, array: NDArray[Any], sample: _Sample, inside: Masks) -> None:
        """Raise where a value inside the domain is not what may stand there."""
        if wish.kind == "low bits" or array.dtype == np.bool_:
            return
        low, high = (0, 1) if wish.kind == "condition" else value_range(wish.word)
        wrong = np.flatnonzero(((array < low) | (array > high)) & inside)
        if not len(wrong):
            return
        assert wish.expression is not None
        index, value = sample.index(int(wrong[0])), int(array[wrong[0]])
        if wish.kind == "condition":
            raise condition_error(wish.expression, value, describe(self.spec.inputs, index))
        raise unfit_error(self.spec, (wish.word.name, wish.word), wish.expression.text, value, index)

    def _evaluated(self, expression: Expression, sample: _Sample, inside: Masks) -> NDArray[Any]:
        """The values of an expression; where the mask does not hold they mean nothing."""
        lanes = sample.lanes().narrow(inside)
        if lanes is None:
            return np.zeros(len(inside), dtype=np.bool_)
        outer = sample.lanes()
        value = Walk(expression).value(expression.tree, lanes)
        failure = lanes.shared.first_failure
        if failure is not None:
            try:
                evaluate(expression, decode(self.spec.inputs, sample.index(failure)))
            except ExpressionError as error:
                error.index = failure
                raise
            raise AssertionError(f"row {failure} failed side by side, but not alone: {expression.text}")
        value = lanes.widened(value, outer)
        assert isinstance(value, int | Numbers)
        if isinstance(value, Numbers):
            return value.array
        return np.array(value, dtype=object if abs(value) >> 62 else None)

    def _alone(self, sample: _Sample) -> tuple[Words, Words]:
        """Input by input."""
        rows = list(self._expectation.at([sample.index(row) for row in range(sample.size)]))
        bits = np.array([[bit == 1 for bit in row] for row in rows], dtype=np.bool_).T
        free = np.array([[bit is None for bit in row] for row in rows], dtype=np.bool_).T
        return packed_bits(bits), packed_bits(free)


class _Sample:
    """Chosen inputs, and the words' bits at them."""

    def __init__(self, words: Sequence[Word], inputs: Words) -> None:
        self.inputs = inputs
        self.size = 64 * inputs.shape[1]
        self.layout: dict[str, tuple[Word, int]] = {}
        offset = 0
        for word in words:
            self.layout[word.name] = word, offset
            offset += word.total_bits
        self._known: dict[int, NDArray[Any]] = {}

    def lanes(self) -> Lanes:
        """All of them, for the vectorised evaluator."""
        return Lanes(
            np.arange(self.size, dtype=np.int64), self.layout, Shared(self.size, patterns=self._pattern)
        )

    def index(self, row: int) -> int:
        """The combined index of one of the inputs."""
        column = self.inputs[:, row >> 6] >> np.uint64(row & 63) & np.uint64(1)
        return int.from_bytes(np.packbits(column.astype(np.uint8), bitorder="little").tobytes(), "little")

    def _pattern(self, word: Word, offset: int) -> NDArray[Any]:
        if offset not in self._known:
            self._known[offset] = _numbers(self.inputs[offset : offset + word.bits])
        return self._known[offset]


class _Counting(Walk):
    """Walks an expression and adds up what its operations cost at one input."""

    def __init__(self, expression: Expression) -> None:
        super().__init__(expression)
        self.cost = 1

    def value(self, node: Any, lanes: Lanes) -> Value:
        """The value, its cost counted."""
        found = super().value(node, lanes)
        if isinstance(found, Numbers):
            self.cost += _LARGE_COST if found.array.dtype == object else _PLAIN_COST
        return found


def packed_bits(rows: Masks) -> Words:
    """Rows of Booleans, a multiple of 64 long, as packed words: input x in bit x % 64 of word x // 64."""
    packed = np.ascontiguousarray(np.packbits(rows, axis=1, bitorder="little"))
    return packed.view("<u8").astype(np.uint64)


def _numbers(columns: Words) -> NDArray[Any]:
    """The numbers whose bits are packed columns, bit 0 first: int64, or object for 63 bits and more."""
    octets = np.unpackbits(columns.astype("<u8").view(np.uint8), axis=1, bitorder="little")
    raw = np.packbits(octets, axis=0, bitorder="little")
    limbs = np.zeros((-(-len(raw) // 8) * 8, raw.shape[1]), dtype=np.uint8)
    limbs[: len(raw)] = raw
    parts = np.ascontiguousarray(limbs.T).view("<u8").T
    found: NDArray[Any] = parts[0].astype(np.int64 if len(columns) <= _SMALL_BITS else object)
    for place, part in enumerate(parts[1:], 1):
        found = found | part.astype(object) << 64 * place
    return found


def _filled(array: NDArray[Any], size: int) -> NDArray[Any]:
    return np.broadcast_to(array, (size,)) if array.ndim == 0 else array


def _bit_rows(array: NDArray[Any], bits: int) -> Masks:
    """The low bits of numbers, two's complement, bool (bits, inputs)."""
    if array.dtype == np.bool_:
        rows = np.zeros((bits, len(array)), dtype=np.bool_)
        rows[0] = array
        return rows
    if array.dtype != object:
        places = np.minimum(np.arange(bits, dtype=np.int64), 63)[:, None]
        return (array.astype(np.int64)[None, :] >> places & 1).astype(np.bool_)
    size = -(-bits // 8)
    mask = (1 << bits) - 1
    raw = b"".join((number & mask).to_bytes(size, "little") for number in array.tolist())
    octets = np.frombuffer(raw, dtype=np.uint8).reshape(len(array), size)
    return np.unpackbits(octets, axis=1, bitorder="little")[:, :bits].T.astype(np.bool_)
