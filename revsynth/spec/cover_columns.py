"""The columns of a PLA's cover: where each output is on, off, and free."""

from __future__ import annotations

import numpy as np

from revsynth.errors import SpecError
from revsynth.logic.truth_table import Columns, first_inputs, ones, variable, words_for
from revsynth.spec.model import Cover


def cover_columns(cover: Cover, source: str) -> tuple[Columns, Columns]:
    """Values and care of each output, shape (outputs, words); column i of the rows is input bit i.

    What the types mean is told in `pla`; on and off outrank free. Raises SpecError naming an input, and the
    rows, where an output is on and off at once.
    """
    shape = (cover.outputs, words_for(cover.inputs))
    marked = {character: np.zeros(shape, dtype=np.uint64) for character in "10-"}
    literals = [variable(cover.inputs, index) for index in range(cover.inputs)]
    everything = ones(cover.inputs)
    meant = {"f": "1", "fd": "1-", "fr": "10", "fdr": "10-"}[cover.kind]
    for inputs, outputs in cover.rows:
        if not any(character in meant for character in outputs):
            continue
        product = everything.copy()
        for literal, character in zip(literals, inputs, strict=True):
            if character != "-":
                product &= literal if character == "1" else ~literal
        for output, character in enumerate(outputs):
            if character in meant:
                marked[character][output] |= product
    on, off, free = marked["1"], marked["0"], marked["-"]
    _refuse_conflicts(cover, on & off, source)
    care = on | off if "0" in meant else (everything & ~free) | on
    return on, care


def _refuse_conflicts(cover: Cover, both: Columns, source: str) -> None:
    for output, column in enumerate(both):
        found: list[int] = first_inputs(column, 1)
        if found:
            raise SpecError(_conflict(cover, output, found[0]), source=source)


def _conflict(cover: Cover, output: int, index: int) -> str:
    first_one = _covering_row(cover, output, index, "1")
    first_zero = _covering_row(cover, output, index, "0")
    columns = "".join(str(index >> bit & 1) for bit in range(cover.inputs))
    return (
        f"output {output} is both 1 (row {first_one}) and 0 (row {first_zero}) at the input v = {index}, "
        f"columns {columns}: on and off rows may not overlap"
    )


def _covering_row(cover: Cover, output: int, index: int, character: str) -> int:
    """The number (from 1) of the first row that gives the output this character at an input."""
    for number, (inputs, outputs) in enumerate(cover.rows, 1):
        fits = all(c == "-" or int(c) == index >> bit & 1 for bit, c in enumerate(inputs))
        if fits and outputs[output] == character:
            return number
    return 0


def conflict_error(cover: Cover, index: int, source: str) -> SpecError | None:
    """The error where an output is on and off at once at an input; None where none is."""
    for output in range(cover.outputs):
        if all(_covering_row(cover, output, index, character) for character in "10"):
            return SpecError(_conflict(cover, output, index), source=source)
    return None
