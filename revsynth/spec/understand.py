"""From a spec as read to the function it means, tabulated over all inputs.

Free is what lies outside the domain and what the spec leaves open; everything else is fixed exactly.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from revsynth.logic.function import Function
from revsynth.logic.truth_table import Column, Columns, pack, pack_values
from revsynth.spec.clause_columns import clauses_column
from revsynth.spec.cover_columns import cover_columns
from revsynth.spec.formula import parse_formula
from revsynth.spec.formula_columns import evaluate_formula
from revsynth.spec.images import listed_images, mapped_images
from revsynth.spec.limits import MAX_INPUT_BITS
from revsynth.spec.model import Cover, Outputs, Permutation, Predicate, Spec, Word
from revsynth.spec.netlist import Netlist
from revsynth.spec.netlist_columns import netlist_columns
from revsynth.spec.output_words import (
    check_length,
    check_size,
    output_columns,
    resolve_width,
    tabulate,
)
from revsynth.spec.over_domain import OverDomain
from revsynth.spec.pla import OUTPUT_WORD
from revsynth.spec.step_images import stepped_images
from revsynth.spec.wide import wide_outputs


@dataclass(frozen=True)
class Understanding:
    """What a spec means.

    tabulated: 1 output bit for a predicate; all bits of the output words, the first word lowest; n bits for
               a permutation, which gives the combined index of the image. None above MAX_INPUT_BITS input
               bits: then the function is known by its structure alone.
    outputs:   () for a predicate, the output words with their bits, or the input words of a permutation.
    warnings:  what the spec may not mean as written, one line each.
    """

    spec: Spec
    tabulated: Function | None
    outputs: tuple[Word, ...]
    warnings: tuple[str, ...]

    @property
    def function(self) -> Function:
        """The function as a table; raises ValueError where it is too wide for one."""
        if self.tabulated is None:
            raise ValueError(f"{self.spec.source}: {self.spec.input_bits} input bits are not tabulated")
        return self.tabulated

    @property
    def input_bits(self) -> int:
        """Bits of all input words."""
        return self.spec.input_bits

    @property
    def output_bits(self) -> int:
        """Bits of f(x): 1 for a predicate."""
        return sum(word.total_bits for word in self.outputs) if self.outputs else 1


def understand(spec: Spec) -> Understanding:
    """Tabulate a spec's function, up to MAX_INPUT_BITS input bits; wider ones are only read (see `wide`).

    Raises SpecError for an empty domain, tables of the wrong length, values that do not fit, permutations
    that are not one-to-one; and ExpressionError where an expression is not allowed or is undefined at an
    input of the domain.
    """
    if spec.input_bits > MAX_INPUT_BITS:
        return Understanding(spec, None, wide_outputs(spec), ())
    over = OverDomain(spec)
    body = spec.body
    if isinstance(body, Predicate):
        values, care = _predicate(body, over)
        outputs: tuple[Word, ...] = ()
    elif isinstance(body, Outputs):
        values, care, outputs = _outputs(body, over)
    else:
        values, care = _permutation(body, over)
        outputs = spec.inputs
    care &= over.domain
    values &= care
    function = Function(spec.input_bits, len(values), values, care, over.domain)
    return Understanding(spec, function, outputs, tuple(over.warnings))


def _predicate(body: Predicate, over: OverDomain) -> tuple[Columns, Columns]:
    if body.cover is not None:
        return cover_columns(body.cover, over.spec.source)
    if body.table is not None:
        return _table(body.table, over)
    if body.netlist is not None:
        return _netlist(body.netlist, over)
    values = _condition(body, over)[np.newaxis, :]
    return values, over.domain[np.newaxis, :].copy()


def _condition(body: Predicate, over: OverDomain) -> Column:
    if body.where is not None:
        return over.truth(body.where, "[predicate] where")
    if body.clauses is not None:
        return clauses_column(body.clauses)
    place = "[predicate] formula"
    formula = parse_formula(body.formula or "", over.spec.inputs, source=over.spec.source, place=place)
    return evaluate_formula(formula)


def _table(entries: tuple[int | None, ...], over: OverDomain) -> tuple[Columns, Columns]:
    check_length(len(entries), over, "[predicate] table")
    values = pack(np.array([entry == 1 for entry in entries]))
    care = pack(np.array([entry is not None for entry in entries]))
    return values[np.newaxis, :], care[np.newaxis, :]


def _outputs(body: Outputs, over: OverDomain) -> tuple[Columns, Columns, tuple[Word, ...]]:
    if body.cover is not None:
        return _cover(body.cover, over)
    if body.netlist is not None:
        named = tuple(Word(output.name, output.bits or 0) for output in body.words)
        return *_netlist(body.netlist, over), named
    words: list[Word] = []
    values: list[Columns] = []
    care: list[Columns] = []
    for output in body.words:
        table = tabulate(output, over)
        words.append(resolve_width(table, over))
        check_size(sum(word.bits for word in words), over)
        found = output_columns(table, words[-1])
        values.append(found[0])
        care.append(found[1])
    return np.concatenate(values), np.concatenate(care), tuple(words)


def _cover(cover: Cover, over: OverDomain) -> tuple[Columns, Columns, tuple[Word, ...]]:
    check_size(cover.outputs, over)
    values, care = cover_columns(cover, over.spec.source)
    return values, care, (Word(OUTPUT_WORD, cover.outputs),)


def _netlist(netlist: Netlist, over: OverDomain) -> tuple[Columns, Columns]:
    check_size(len(netlist.outputs), over)
    values = netlist_columns(netlist)
    return values, np.tile(over.domain, (len(values), 1))


def _permutation(body: Permutation, over: OverDomain) -> tuple[Columns, Columns]:
    if body.values is not None:
        images, fixed = listed_images(body.values, over)
    elif body.steps is not None:
        images, fixed = stepped_images(body.steps, over)
    else:
        images, fixed = mapped_images(body.map or {}, over)
    care = np.tile(pack(fixed), (over.inputs, 1))
    return pack_values(images, over.inputs) & care, care
