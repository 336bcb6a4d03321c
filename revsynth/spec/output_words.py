"""Output words: values over the domain, how wide they are, and their packed columns."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

from revsynth.logic.truth_table import Columns, pack, words_for
from revsynth.spec.layout import value_range
from revsynth.spec.model import Output, Word
from revsynth.spec.over_domain import OverDomain

MOST_BITS = 4096
"""Output bits of one spec."""
MOST_WORDS = 1 << 24
"""64-bit words of all output columns together: 128 MB, and as much again for what is free."""


@dataclass(frozen=True)
class Tabulated:
    """An output's values at all inputs (int64 or object), and where they are fixed, shape (2**n,)."""

    output: Output
    values: NDArray[Any]
    fixed: NDArray[np.bool_]
    place: str


def tabulate(output: Output, over: OverDomain) -> Tabulated:
    """The values of an output word, by its expression or its table.

    Raises SpecError where the table has the wrong length, ExpressionError as `OverDomain.numbers` does.
    """
    inside = np.ones(1 << over.inputs, dtype=bool) if over.needed is None else over.needed
    if output.value is not None:
        place = f"[outputs] {output.name} value"
        return Tabulated(output, over.numbers(output.value, place), inside, place)
    place = f"[outputs] {output.name} table"
    entries = output.table or ()
    check_length(len(entries), over, place)
    fixed = np.array([entry is not None for entry in entries]) & inside
    numbers = [0 if entry is None else entry for entry in entries]
    small = all(-(1 << 62) <= number < 1 << 62 for number in numbers)
    return Tabulated(output, np.array(numbers, dtype=np.int64 if small else object), fixed, place)


def check_length(found: int, over: OverDomain, place: str) -> None:
    """Raise SpecError unless a table has one entry an input."""
    wanted = 1 << over.inputs
    if found != wanted:
        raise over.error(
            f"{found} entries, but {over.inputs} input bits need {wanted} (input 0 first)", place
        )


def resolve_width(table: Tabulated, over: OverDomain) -> Word:
    """The output's word; `bits` left out is just wide enough for every fixed value, and at least 1.

    Raises SpecError naming an input where a value is negative and neither signed nor bits are given. With
    bits given, a table's entries that do not fit are cut to their low bits with a warning.
    """
    output = table.output
    if output.bits is not None:
        word = Word(output.name, output.bits, output.signed)
        if output.table is not None:
            _warn_of_cut_entries(table, word, over)
        return word
    fixed: Any = table.values[table.fixed]
    lowest, highest = (int(fixed.min()), int(fixed.max())) if len(fixed) else (0, 0)
    if lowest < 0 and not output.signed:
        below = np.asarray(table.values < 0, dtype=bool) & table.fixed
        at = int(np.argmax(below))
        raise over.error(
            f"the value is {table.values[at]} at {over.named(at)}: negative values need signed = true, "
            "or bits = N for the low bits modulo 2**N",
            f"[outputs] {output.name}",
        )
    bits = max((end if end >= 0 else ~end).bit_length() for end in (lowest, highest))
    return Word(output.name, max(bits + (1 if output.signed else 0), 1), output.signed)


def _warn_of_cut_entries(table: Tabulated, word: Word, over: OverDomain) -> None:
    lowest, highest = value_range(word)
    outside = np.asarray((table.values < lowest) | (table.values > highest), dtype=bool) & table.fixed
    count = int(np.count_nonzero(outside))
    if count:
        at = int(np.argmax(outside))
        entries = f"entry {at} is {table.values[at]}"
        more = f" (and {count - 1} more)" if count > 1 else ""
        over.warnings.append(
            f"{over.spec.source}: {table.place}: {entries}{more}: only the low {word.bits} bits are kept"
        )


def check_size(bits: int, over: OverDomain) -> None:
    """Raise SpecError where columns for so many output bits would take too much memory."""
    words = bits * words_for(over.inputs)
    if bits > MOST_BITS or words > MOST_WORDS:
        allowed = min(MOST_BITS, MOST_WORDS // words_for(over.inputs))
        raise over.error(
            f"{bits} output bits over {over.inputs} input bits are too many: {allowed} are allowed",
            "[outputs]",
        )


def output_columns(table: Tabulated, word: Word) -> tuple[Columns, Columns]:
    """Values and care of an output word, shape (bits, words), bit 0 first, values 0 where free."""
    fixed = pack(table.fixed)
    values = np.zeros((word.bits, len(fixed)), dtype=np.uint64)
    for bit in range(word.bits):
        values[bit] = pack(_bit(table.values, bit)) & fixed
    return values, np.tile(fixed, (word.bits, 1))


def _bit(values: Any, bit: int) -> NDArray[np.uint8]:
    shift = min(bit, 63) if values.dtype == np.int64 else bit
    return np.asarray((values >> shift) & 1, dtype=np.uint8)
