"""What a function is before anything is built: all that `inspect` shows.

Bits are named as in a spec, `a[2]` or `cell[0][1]`, a one-bit word by its name alone; inputs are given in
words.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field
from typing import TYPE_CHECKING, Any

import numpy as np
from numpy.typing import NDArray

from revsynth.embed.multiplicity import bounded_multiplicity, most_frequent
from revsynth.logic.completion import low_degree_completion
from revsynth.logic.function import Function
from revsynth.logic.normal_form import algebraic_normal_form, degree
from revsynth.logic.permutation import CycleStructure, cycle_structure
from revsynth.logic.structure import (
    EXACT_DEGREE_INPUTS,
    affine_form,
    independent_nonlinear,
    indices,
    inputs_without_effect,
    least_degree,
    linear_inputs,
    symmetric_groups,
)
from revsynth.logic.truth_table import (
    Columns,
    count_ones,
    first_inputs,
    last_word_mask,
    unpack,
    unpack_values,
)
from revsynth.spec.layout import bit_labels, decode
from revsynth.spec.model import Word

if TYPE_CHECKING:
    from revsynth.spec.understand import Understanding

SHOWN_INPUTS = 8
"""Marked inputs that are listed."""
SHOWN_CYCLES = 12
"""Cycle lengths that are listed in words."""
_EXACT_DEGREE_WORK = 1 << 12


@dataclass(frozen=True)
class OutputFacts:
    """One output bit (of a predicate: which inputs are marked). Counts are over the domain.

    degree: of the algebraic normal form; with free values the least that some choice of them reaches
    (`degree_exact`), or an upper bound. affine: the form in words, or None. without_effect, linear,
    symmetric: names of input bits; where values are free, `without_effect` bits can be chosen to have none.
    """

    name: str
    ones: int
    zeros: int
    free: int
    degree: int
    degree_exact: bool
    affine: str | None
    without_effect: tuple[str, ...]
    linear: tuple[str, ...]
    symmetric: tuple[tuple[str, ...], ...]

    @property
    def balanced(self) -> bool:
        """As many ones as zeros, and nothing free."""
        return self.ones == self.zeros and self.free == 0

    def to_json(self) -> dict[str, Any]:
        """Plain data."""
        return {
            "name": self.name,
            "ones": self.ones,
            "zeros": self.zeros,
            "free": self.free,
            "balanced": self.balanced,
            "degree": self.degree,
            "degree_exact": self.degree_exact,
            "affine": self.affine,
            "without_effect": list(self.without_effect),
            "linear": list(self.linear),
            "symmetric": [list(group) for group in self.symmetric],
        }


@dataclass(frozen=True)
class Embedding:
    """What embedding in place needs: garbage bits tell apart the inputs with the most frequent output.

    exact: whether no choice of free output bits needs less; otherwise all four are upper bounds.
    """

    multiplicity: int
    garbage: int
    lines: int
    constants: int
    exact: bool = True

    def to_json(self) -> dict[str, Any]:
        """Plain data."""
        return {
            "multiplicity": self.multiplicity,
            "garbage": self.garbage,
            "lines": self.lines,
            "constant_lines": self.constants,
            "exact": self.exact,
        }


@dataclass(frozen=True)
class PermutationFacts:
    """A bijection on the inputs. `free` images still open; cycles None unless at most one is."""

    free: int
    cycles: CycleStructure | None

    def to_json(self) -> dict[str, Any]:
        """Plain data."""
        known = self.cycles
        return {
            "free_images": self.free,
            "fixed_points": None if known is None else known.fixed_points,
            "cycles": None if known is None else [list(pair) for pair in known.cycles],
            "order": None if known is None else str(known.order),
            "odd": None if known is None else known.odd,
        }


@dataclass(frozen=True)
class Bound:
    """A lower bound on the number of ANDs over AND, XOR, NOT, and why."""

    ands: int
    why: str


@dataclass(frozen=True)
class Analysis:
    """Everything `inspect` shows. `marked_first` lists the first marked inputs in words (predicates only).

    labels: the names that the spec's file gives to single bits, by ours.
    """

    title: str
    source: str
    kind: str
    inputs: tuple[Word, ...]
    outputs: tuple[Word, ...]
    input_bits: int
    output_bits: int
    condition: str | None
    domain: int
    free: int
    marked: int | None
    marked_first: tuple[dict[str, Any], ...]
    facts: tuple[OutputFacts, ...]
    without_effect: tuple[str, ...]
    symmetric: tuple[tuple[str, ...], ...]
    bijective: bool | None
    embedding: Embedding | None
    permutation: PermutationFacts | None
    bound: Bound | None
    warnings: tuple[str, ...] = field(default=())
    labels: Mapping[str, str] = field(default_factory=dict)

    @property
    def affine(self) -> bool:
        """Whether every output bit is (or can be chosen to be) a XOR of input bits and a constant."""
        return all(fact.affine is not None for fact in self.facts)

    @property
    def degree(self) -> int:
        """The largest degree of an output bit."""
        return max((fact.degree for fact in self.facts), default=0)

    def to_json(self) -> dict[str, Any]:
        """The JSON object of `inspect --json`."""
        return {
            "title": self.title,
            "kind": self.kind,
            "inputs": {word.name: word.to_json() for word in self.inputs},
            "outputs": {word.name: word.to_json() for word in self.outputs},
            "input_bits": self.input_bits,
            "output_bits": self.output_bits,
            "domain": self.domain,
            "domain_where": self.condition,
            "free": self.free,
            "marked": self.marked,
            "marked_first": list(self.marked_first),
            "degree": self.degree,
            "affine": self.affine,
            "without_effect": list(self.without_effect),
            "symmetric": [list(group) for group in self.symmetric],
            "bijective": self.bijective,
            "embedding": None if self.embedding is None else self.embedding.to_json(),
            "permutation": None if self.permutation is None else self.permutation.to_json(),
            "lower_bound": None if self.bound is None else {"ands": self.bound.ands, "why": self.bound.why},
            "bits": [fact.to_json() for fact in self.facts],
            "labels": dict(self.labels),
            "warnings": list(self.warnings),
        }


def analyse(understanding: Understanding) -> Analysis:
    """Work out all facts. About 2^n / 64 word operations for each output bit and pair of inputs, at most."""
    spec, function = understanding.spec, understanding.function
    n = function.inputs
    names = _bit_labels(spec.inputs)
    predicate = spec.kind == "predicate"
    outputs = understanding.outputs
    labels = ["marked"] if predicate else _bit_labels(outputs)
    facts = tuple(_output_facts(function, row, labels[row], names) for row in range(function.outputs))
    full = bool(np.all(function.care == last_word_mask(n)))
    joint = function.values if full else np.concatenate([function.values, function.care])
    idle = inputs_without_effect(function.values, function.care, n)
    values = _whole_values(function)
    bijective, permutation = _permutation_facts(function, spec.kind, values)
    marked = function.values[0] & function.domain if predicate else None
    return Analysis(
        title=spec.title,
        source=spec.source,
        kind=spec.kind,
        inputs=spec.inputs,
        outputs=outputs if spec.kind == "outputs" else (),
        input_bits=n,
        output_bits=function.outputs,
        condition=spec.domain,
        domain=count_ones(function.domain),
        free=function.free,
        marked=None if marked is None else count_ones(marked),
        marked_first=()
        if marked is None
        else tuple(dict(decode(spec.inputs, x)) for x in first_inputs(marked, SHOWN_INPUTS)),
        facts=facts,
        without_effect=_named(idle, names),
        symmetric=_groups(joint, n, names, idle),
        bijective=bijective,
        embedding=_embedding(function, values),
        permutation=permutation,
        bound=_lower_bound(function, facts, full),
        warnings=understanding.warnings,
        labels=spec.labels,
    )


def _bit_labels(words: Sequence[Word]) -> list[str]:
    return bit_labels([element for word in words for element in word.elements()])


def _named(mask: int, names: Sequence[str]) -> tuple[str, ...]:
    return tuple(names[i] for i in indices(mask))


def _groups(rows: Columns, inputs: int, names: Sequence[str], idle: int) -> tuple[tuple[str, ...], ...]:
    return tuple(
        tuple(("~" if negated else "") + names[i] for i, negated in group)
        for group in symmetric_groups(rows, inputs, idle)
    )


def _output_facts(function: Function, row: int, name: str, names: Sequence[str]) -> OutputFacts:
    n = function.inputs
    values, care = function.values[row], function.care[row]
    complete = bool(np.all(care == last_word_mask(n)))
    ones = count_ones(values & function.domain)
    fixed = count_ones(care & function.domain)
    found, exact = _degree(function, row, complete)
    form = None
    if found <= 1 or not exact:
        form = affine_form(values, care, n)
    if form is not None:
        found, exact = min(form[0].bit_count(), 1), True
    rows = values[None] if complete else np.stack([values, care])
    idle = inputs_without_effect(values[None], care[None], n)
    return OutputFacts(
        name=name,
        ones=ones,
        zeros=fixed - ones,
        free=count_ones(function.domain) - fixed,
        degree=found,
        degree_exact=exact,
        affine=None if form is None else affine_text(*form, names),
        without_effect=_named(idle, names),
        linear=_named(linear_inputs(values, care, n), names),
        symmetric=_groups(rows, n, names, idle),
    )


def _degree(function: Function, row: int, complete: bool) -> tuple[int, bool]:
    """(degree, exact)."""
    n = function.inputs
    values, care = function.values[row], function.care[row]
    if complete:
        return degree(algebraic_normal_form(values, n), n), True
    if n <= EXACT_DEGREE_INPUTS and function.outputs << n <= _EXACT_DEGREE_WORK:
        return least_degree(values, care, n), True
    low = low_degree_completion(values, care, n)
    return degree(algebraic_normal_form(low, n), n), False


def affine_text(mask: int, constant: int, names: Sequence[str]) -> str:
    """`a[0] ^ a[2] ^ 1`, or `0` and `1` for constants."""
    terms = [names[i] for i in indices(mask)]
    if constant or not terms:
        terms.append(str(constant))
    return " ^ ".join(terms)


def _whole_values(function: Function) -> NDArray[np.int64] | None:
    """Output values by input, where each is wholly fixed or wholly free; None otherwise, or over 63 bits."""
    if 0 < function.outputs <= 63 and np.all(function.care == function.care[:1]):
        return unpack_values(function.values, function.inputs)
    return None


def _embedding(function: Function, values: NDArray[np.int64] | None) -> Embedding | None:
    """Inputs against outputs + ceil(log2 of the largest multiplicity); None for no or over 63 output bits."""
    if not 0 < function.outputs <= 63:
        return None
    if values is not None:
        values = values[unpack(function.care[0], function.inputs).astype(bool)]
        most, exact = most_frequent(values, function.outputs), True
    else:
        most, exact = bounded_multiplicity(function)
    garbage = (most - 1).bit_length()
    lines = max(function.inputs, function.outputs + garbage)
    return Embedding(most, garbage, lines, lines - function.inputs, exact)


def _permutation_facts(
    function: Function, kind: str, values: NDArray[np.int64] | None
) -> tuple[bool | None, PermutationFacts | None]:
    """Whether the outputs are (or can be made) a bijection of the inputs; None where single bits are open."""
    n = function.inputs
    if kind == "predicate" or not 0 < function.outputs == n:
        return (None if kind == "predicate" else False), None
    if values is None:
        return None, None
    fixed = unpack(function.care[0], n).astype(bool)
    used = np.zeros(1 << n, dtype=bool)
    used[values[fixed]] = True
    open_images = int((~fixed).sum())
    if int(used.sum()) + open_images != 1 << n:
        return False, None
    if open_images > 1:
        return True, PermutationFacts(open_images, None)
    values = values.copy()
    values[~fixed] = np.flatnonzero(~used)
    return True, PermutationFacts(open_images, cycle_structure(values))


def _lower_bound(function: Function, facts: tuple[OutputFacts, ...], full: bool) -> Bound | None:
    """The best of: degree - 1 of an output bit, and the outputs that are independent modulo affine functions.

    Sources: C. P. Schnorr, "The multiplicative complexity of Boolean functions", AAECC-6, 1988 (the degree);
    each AND adds at most one dimension to the signals modulo affine functions (common practice).
    """
    sure = [fact for fact in facts if fact.degree_exact]
    bound = Bound(0, "")
    if sure:
        top = max(sure, key=lambda fact: fact.degree)
        if top.degree >= 2:
            bound = Bound(
                top.degree - 1, f"{top.name} has degree {top.degree}: at least degree - 1 (Schnorr 1988)"
            )
    if not bound.ands and any(fact.affine is None for fact in facts):
        bound = Bound(1, "not affine: at least one AND")
    if full and len(facts) > 1:
        rank = independent_nonlinear(algebraic_normal_form(function.values, function.inputs), function.inputs)
        if rank > bound.ands:
            bound = Bound(rank, f"{rank} bits are independent modulo affine functions: an AND for each")
    return bound if bound.ands else None


def describe(analysis: Analysis) -> str:
    """The text for the terminal: plain, at most about 100 columns wide."""
    from revsynth.logic.analysis_text import text

    return text(analysis)
