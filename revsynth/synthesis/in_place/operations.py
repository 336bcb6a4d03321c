"""The operations of a program on the lines of a sheet."""

from __future__ import annotations

from collections.abc import Sequence

from revsynth.logic.in_place_program import (
    Add,
    AddModulo,
    Moves,
    MultiplyModulo,
    Operation,
    ShiftAdd,
    Swaps,
    Xor,
)
from revsynth.synthesis.in_place.carry_in_addend import add_through
from revsynth.synthesis.in_place.held_carries import add_held
from revsynth.synthesis.in_place.modular import add_modulo, multiply_modulo
from revsynth.synthesis.in_place.sheet import FALSE, TRUE, Sheet, Value, line_of, value_of


def carry_out(operation: Operation, sheet: Sheet, sources: Sequence[Value], narrow: bool) -> None:
    """Write one operation; `narrow`: on as few lines as there are ways for."""
    if isinstance(operation, Xor):
        for bit, source in zip(operation.target, operation.sources, strict=True):
            sheet.xor(sheet.at(bit), sources[source])
    elif isinstance(operation, Add):
        _add(operation, sheet, sources, narrow)
    elif isinstance(operation, ShiftAdd):
        _shift_add(operation, sheet, sources)
    elif isinstance(operation, Moves):
        under = TRUE if operation.under is None else sources[operation.under]
        for one, other in operation.pairs:
            sheet.both(sheet.at(other), value_of(sheet.at(one)), under)
    elif isinstance(operation, Swaps):
        _swap(operation, sheet, sources)
    elif isinstance(operation, AddModulo):
        add_modulo(sheet, sheet.lines_of(operation.target), operation.constant, operation.modulus)
    else:
        assert isinstance(operation, MultiplyModulo)
        multiply_modulo(sheet, sheet.lines_of(operation.target), operation.factor, operation.modulus)


def _add(operation: Add, sheet: Sheet, sources: Sequence[Value], narrow: bool) -> None:
    """Carries on lines of their own, or through the addend where that takes fewer."""
    target = sheet.lines_of(operation.target)
    addend = [sources[source] for source in operation.sources]
    varying = [value for value in addend[:-1] if value > TRUE]
    own = len({line_of(value) for value in varying})
    if narrow and own >= 2 and len(addend) - own < own:
        add_through(sheet, target, addend, operation.subtract)
    else:
        add_held(sheet, target, addend, operation.subtract)


def _shift_add(operation: ShiftAdd, sheet: Sheet, sources: Sequence[Value]) -> None:
    """The lower bits of the target itself, or their products with the condition, on top of the upper ones."""
    target = sheet.lines_of(operation.target)
    upper, lower = target[operation.shift :], target[: len(target) - operation.shift]
    under = TRUE if operation.under is None else sources[operation.under]
    if under == FALSE or not upper:
        return
    addend = [value_of(line) for line in lower]
    if under == TRUE:
        add_held(sheet, upper, addend, operation.subtract)
        return
    products = sheet.take(len(lower))
    for product, value in zip(products, addend, strict=True):
        sheet.both(product, value, under)

    def release(place: int) -> None:
        sheet.both(products[place], addend[place], under)
        sheet.give([products[place]])

    add_held(sheet, upper, [value_of(line) for line in products], operation.subtract, release, lower)


def _swap(operation: Swaps, sheet: Sheet, sources: Sequence[Value]) -> None:
    """Without a condition only the places of the bits are renamed."""
    under = TRUE if operation.under is None else sources[operation.under]
    for one, other in operation.pairs:
        if under == TRUE:
            sheet.home[one], sheet.home[other] = sheet.home[other], sheet.home[one]
        elif under != FALSE:
            sheet.swap(sheet.at(one), sheet.at(other), under)
