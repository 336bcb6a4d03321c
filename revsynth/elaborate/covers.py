"""The covers of PLA files."""

from __future__ import annotations

from dataclasses import dataclass

from revsynth.logic.network import TRUE, Literal
from revsynth.logic.network_builder import NetworkBuilder
from revsynth.spec.model import Cover


@dataclass(frozen=True)
class CoverLiterals:
    """on, care: one literal an output; both: 1 where some output is on and off at once, which is an error."""

    on: list[Literal]
    care: list[Literal]
    both: Literal


def cover_literals(builder: NetworkBuilder, cover: Cover) -> CoverLiterals:
    """Where each output of a cover is on, and where it is fixed; column i of the rows is input bit i."""
    meant = {"f": "1", "fd": "1-", "fr": "10", "fdr": "10-"}[cover.kind]
    rows: dict[str, list[list[Literal]]] = {
        character: [[] for _ in range(cover.outputs)] for character in "10-"
    }
    for inputs, outputs in cover.rows:
        product = None
        for output, character in enumerate(outputs):
            if character in meant:
                product = _product(builder, inputs) if product is None else product
                rows[character][output].append(product)
    on, off, free = ([builder.any_of(terms) for terms in rows[character]] for character in "10-")
    pairs = zip(on, off, strict=True)
    both = builder.any_of(builder.and_(one, other) for one, other in pairs)
    if "0" in meant:
        care = [builder.or_(one, other) for one, other in zip(on, off, strict=True)]
    else:
        care = [builder.or_(one, other ^ 1) for one, other in zip(on, free, strict=True)]
    return CoverLiterals(on, care, both)


def _product(builder: NetworkBuilder, inputs: str) -> Literal:
    literals = [
        builder.input(place) ^ (character == "0")
        for place, character in enumerate(inputs)
        if character != "-"
    ]
    return builder.all_of(literals) if literals else TRUE
