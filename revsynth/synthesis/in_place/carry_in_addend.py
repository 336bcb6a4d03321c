"""Addition in place with one clean line in all: the carries run through the addend's own lines.

Source: Cuccaro, Draper, Kutin and Moulton, "A new quantum ripple-carry addition circuit", 2004: two Toffolis
a bit. Bits of the addend that are constant, or on one line more than once, are put on clean lines first.
"""

from __future__ import annotations

from collections.abc import Sequence

from revsynth.cascade.model import Line
from revsynth.synthesis.in_place.sheet import FALSE, TRUE, Sheet, Value, line_of, value_of


def add_through(
    sheet: Sheet, target: Sequence[Line], addend: Sequence[Value], subtract: bool = False
) -> None:
    """The number on `target` (bit 0 first) plus, or minus, the addend, modulo 2**len(target).

    The addend's lines are not those of the target.
    """
    first = next((place for place, value in enumerate(addend) if value != FALSE), len(addend))
    target, addend = target[first:], list(addend[first:])
    if not target:
        return
    sheet.xor(target[-1], addend[-1])
    start = len(sheet.gates)
    lines, borrowed = _own_lines(sheet, addend[:-1])
    prepared = len(sheet.gates)
    if subtract:
        for line in target:
            sheet.flip(line)
    (carry,) = sheet.take()
    chain = [carry, *lines]
    for place, line in enumerate(lines):
        _majority(sheet, chain[place], target[place], line)
    sheet.xor(target[-1], value_of(chain[-1]))
    for place in range(len(lines) - 1, -1, -1):
        _unmajority(sheet, chain[place], target[place], lines[place])
    sheet.give([carry])
    if subtract:
        for line in target:
            sheet.flip(line)
    sheet.undo_from(start, prepared)
    sheet.give(borrowed)


def _own_lines(sheet: Sheet, addend: Sequence[Value]) -> tuple[list[Line], list[Line]]:
    """(a line for every bit of the addend, clean lines among them)."""
    lines: list[Line] = []
    borrowed: list[Line] = []
    turned: list[Line] = []
    for value in addend:
        if value <= TRUE or line_of(value) in lines:
            (line,) = sheet.take()
            borrowed.append(line)
            sheet.xor(line, value)
        else:
            line = line_of(value)
            if value & 1:
                turned.append(line)
        lines.append(line)
    for line in turned:
        sheet.flip(line)
    return lines, borrowed


def _majority(sheet: Sheet, carry: Line, sum_: Line, addend: Line) -> None:
    """The addend's line becomes the carry out."""
    sheet.xor(sum_, value_of(addend))
    sheet.xor(carry, value_of(addend))
    sheet.both(addend, value_of(sum_), value_of(carry))


def _unmajority(sheet: Sheet, carry: Line, sum_: Line, addend: Line) -> None:
    """Carry and addend as they were, and the sum."""
    sheet.both(addend, value_of(sum_), value_of(carry))
    sheet.xor(carry, value_of(addend))
    sheet.xor(sum_, value_of(carry))
