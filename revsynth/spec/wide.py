"""Specs with too many input bits for a table: what is checked, and the output words, without any table.

What cannot be known without looking at every input is left to whoever works with the structure: that no
operation is undefined inside the domain, and that a condition is never anything but 0 or 1.
"""

from __future__ import annotations

from revsynth.errors import SpecError
from revsynth.spec.bounds import Interval
from revsynth.spec.expression import Scope, parse
from revsynth.spec.formula import parse_formula
from revsynth.spec.images import register_of
from revsynth.spec.limits import MAX_INPUT_BITS, MAX_WIDE_BITS
from revsynth.spec.model import Output, Outputs, Permutation, Predicate, Spec, Word
from revsynth.spec.pla import OUTPUT_WORD
from revsynth.spec.steps import parse_steps


def wide_outputs(spec: Spec) -> tuple[Word, ...]:
    """The output words of a wide spec, every expression of which is parsed and checked on the way.

    () for a predicate; the input words for a permutation. Raises SpecError for more than MAX_WIDE_BITS input
    bits, for tables (which would need an entry an input), and for output words without `bits`, proposing a
    width; ExpressionError where an expression is not allowed.
    """
    if spec.input_bits > MAX_WIDE_BITS:
        raise SpecError(
            f"{spec.input_bits} input bits: up to {MAX_WIDE_BITS} are allowed", source=spec.source
        )
    scope = Scope({word.name: word for word in spec.inputs}, spec.constants)
    if spec.domain is not None:
        parse(spec.domain, scope, source=spec.source, place="[domain] where")
    body = spec.body
    if isinstance(body, Predicate):
        _check_predicate(body, spec, scope)
        return ()
    if isinstance(body, Outputs):
        return _output_words(body, spec, scope)
    _check_permutation(body, spec, scope)
    return spec.inputs


def _check_predicate(body: Predicate, spec: Spec, scope: Scope) -> None:
    if body.table is not None:
        raise _no_table(spec, "[predicate] table")
    if body.where is not None:
        parse(body.where, scope, source=spec.source, place="[predicate] where")
    elif body.formula is not None:
        parse_formula(body.formula, spec.inputs, source=spec.source, place="[predicate] formula")


def _output_words(body: Outputs, spec: Spec, scope: Scope) -> tuple[Word, ...]:
    if body.cover is not None:
        return (Word(OUTPUT_WORD, body.cover.outputs),)
    if body.netlist is not None:
        return tuple(Word(output.name, output.bits or 0) for output in body.words)
    return tuple(_output_word(output, spec, scope) for output in body.words)


def _output_word(output: Output, spec: Spec, scope: Scope) -> Word:
    place = f"[outputs] {output.name}"
    if output.value is None:
        raise _no_table(spec, f"{place} table")
    expression = parse(output.value, scope, source=spec.source, place=f"{place} value")
    if output.bits is not None:
        return Word(output.name, output.bits, output.signed)
    low, high = expression.bounds
    bits = width_for(expression.bounds, output.signed or low < 0)
    proposal = f"bits = {bits}, signed = true" if output.signed or low < 0 else f"bits = {bits}"
    raise SpecError(
        f"bits is wanted above {MAX_INPUT_BITS} input bits, where it is not worked out: "
        f"{proposal} holds every value from {_short(low)} to {_short(high)}",
        source=spec.source,
        place=place,
    )


def width_for(interval: Interval, signed: bool) -> int:
    """Bits that hold every number of the interval, at least 1."""
    most = max((end if end >= 0 else ~end).bit_length() for end in interval)
    return max(most + (1 if signed else 0), 1)


def _check_permutation(body: Permutation, spec: Spec, scope: Scope) -> None:
    if body.values is not None:
        raise _no_table(spec, "[permutation] values")
    if body.steps is not None:
        parse_steps(spec, body.steps)
    for name, text in (body.map or {}).items():
        register_of(spec, name)
        parse(text, scope, source=spec.source, place=f"[permutation] map {name}")


def _no_table(spec: Spec, place: str) -> SpecError:
    return SpecError(
        f"{spec.input_bits} input bits: a table has one entry an input and goes up to {MAX_INPUT_BITS} bits",
        source=spec.source,
        place=place,
    )


def _short(number: int) -> str:
    return (
        str(number) if abs(number) < 1 << 64 else f"{'-' if number < 0 else ''}2**{number.bit_length() - 1}"
    )
