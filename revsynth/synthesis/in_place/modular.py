"""Arithmetic modulo a constant in place: adding a constant, and multiplying by one.

Sources: adding, taking the modulus away, and adding it back where that went below 0: Vedral, Barenco and
Ekert, "Quantum networks for elementary arithmetic operations", Physical Review A 54, 1996; a product out of
place, a swap, and the inverse product away: Beauregard, Quantum Information and Computation 3, 2003.
"""

from __future__ import annotations

from collections.abc import Sequence

from revsynth.cascade.model import Line
from revsynth.synthesis.in_place.held_carries import add_held, xor_carry
from revsynth.synthesis.in_place.sheet import FALSE, Sheet, Value, value_of


def add_modulo(sheet: Sheet, target: Sequence[Line], constant: int, modulus: int) -> None:
    """x becomes (x + constant) % modulus for x < modulus, with 0 < constant < modulus."""
    _add_chosen(sheet, target, FALSE ^ 1, constant, modulus)


def multiply_modulo(sheet: Sheet, target: Sequence[Line], factor: int, modulus: int) -> None:
    """x becomes x * factor % modulus for x < modulus; the factor is coprime to the modulus."""
    size = len(target)
    scratch = sheet.take(size)
    for place, weight, wraps in _weights(factor, size, modulus):
        chosen = value_of(target[place])
        if wraps:
            _add_chosen(sheet, scratch, chosen, weight, modulus)
        elif place == 0:
            for line, value in zip(scratch, _either(0, weight, chosen, size), strict=True):
                sheet.xor(line, value)
        else:
            add_held(sheet, scratch, _either(0, weight, chosen, size))
    for one, other in zip(target, scratch, strict=True):
        sheet.swap(one, other)
    for place, weight, wraps in reversed(_weights(pow(factor, -1, modulus), size, modulus)):
        chosen = value_of(target[place])
        if wraps:
            _add_chosen(sheet, scratch, chosen, modulus - weight, modulus)
        elif place == 0:
            for line, value in zip(scratch, _either(0, weight, chosen, size), strict=True):
                sheet.xor(line, value)
        else:
            add_held(sheet, scratch, _either(0, weight, chosen, size), subtract=True)
    sheet.give(scratch)


def _weights(factor: int, size: int, modulus: int) -> list[tuple[int, int, bool]]:
    """(place, factor * 2**place % modulus, whether the sum up to there may reach the modulus)."""
    found: list[tuple[int, int, bool]] = []
    most = 0
    for place in range(size):
        weight = (factor << place) % modulus
        most += weight
        found.append((place, weight, most >= modulus))
    return found


def _add_chosen(sheet: Sheet, target: Sequence[Line], chosen: Value, constant: int, modulus: int) -> None:
    """x becomes (x + constant) % modulus where `chosen` is 1; x < modulus, 0 < constant < modulus.

    x + constant - modulus is worked out with one more bit, its sign; the modulus is added back under the
    sign, and the sign is taken away again: it was set where the result is not below what was added.
    """
    size = len(target)
    (sign,) = sheet.take()
    wide = [*target, sign]
    less, more = -modulus % (2 << size), (constant - modulus) % (2 << size)
    sheet.check_size()
    add_held(sheet, wide, _either(less, more, chosen, size + 1))
    add_held(sheet, target, _either(0, modulus, value_of(sign), size))
    xor_carry(sheet, sign, target, _either(0, constant, chosen, size), subtract=True)
    sheet.flip(sign)
    sheet.give([sign])


def _either(zero: int, one: int, chosen: Value, size: int) -> list[Value]:
    """The bits of `one` where `chosen` is 1, of `zero` where it is 0."""
    found: list[Value] = []
    for place in range(size):
        low, high = zero >> place & 1, one >> place & 1
        found.append(low if low == high else chosen ^ low)
    return found
