"""Specs in TOML: every section and key, checked before anything is understood.

Whatever is unknown, doubled or of the wrong type is an error that names the file, the key, and what would be
right. Expressions stay text here; `understand` parses them.
"""

from __future__ import annotations

import sys
import tomllib
from collections.abc import Callable, Mapping, Sequence
from typing import Any

from revsynth.errors import SpecError
from revsynth.spec.model import Constant, Output, Outputs, Permutation, Predicate, Spec, Word
from revsynth.spec.names import check_name

BODIES = ("predicate", "outputs", "permutation")
TOP_LEVEL = ("title", "inputs", "constants", "domain", *BODIES)
PREDICATES = ("where", "formula", "table")
PERMUTATIONS = ("values", "map", "steps")
WORD_KEYS = ("bits", "signed", "count")
OUTPUT_KEYS = ("value", "table", "bits", "signed")
IMPLICIT_WORD = "v"
"""The one input word of a permutation whose spec has no [inputs]."""


def parse_toml(text: str, source: str = "spec.toml") -> Spec:
    """The spec that a TOML text describes; `source` is the file's base name.

    Raises SpecError (one line) for TOML that cannot be read and for everything `spec_from_document` refuses.
    """
    try:
        document = tomllib.loads(text)
    except RecursionError:
        raise SpecError("lists or tables are nested too deeply", source=source) from None
    except ValueError as error:
        if "integer string conversion" in str(error):
            limit = sys.get_int_max_str_digits()
            raise SpecError(f"a number has more than {limit:,} digits", source=source) from None
        raise SpecError(f"this is not TOML: {_one_line(str(error), 200)}", source=source) from None
    return spec_from_document(document, source=source)


def spec_from_document(document: Mapping[str, Any], *, source: str) -> Spec:
    """The spec in a document already read, as tomllib gives it: tables are dicts, arrays are lists.

    Raises SpecError for unknown keys, missing or doubled sections and alternatives, and mistyped values.
    """
    _known_keys(document, TOP_LEVEL, source, "")
    title = document.get("title", "")
    if not isinstance(title, str):
        raise SpecError(f"a text is wanted, not {_shown(title)}", source=source, place="title")
    chosen = [name for name in BODIES if name in document]
    if len(chosen) != 1:
        found = "there is none" if not chosen else f"not {' and '.join(f'[{name}]' for name in chosen)}"
        wanted = "exactly one of [predicate], [outputs] and [permutation] is wanted"
        raise SpecError(f"{wanted}, {found}", source=source)
    section = chosen[0]
    table = _table(document[section], source, f"[{section}]")
    body = _BODY_READERS[section](table, source)
    inputs = _inputs(document, body, source)
    constants = _constants(document.get("constants", {}), source)
    _distinct_names(inputs, constants, body, source)
    domain = None
    if "domain" in document:
        domain_table = _table(document["domain"], source, "[domain]")
        _known_keys(domain_table, ("where",), source, "[domain]")
        if "where" not in domain_table:
            raise SpecError('the key where is missing: where = "EXPRESSION"', source=source, place="[domain]")
        domain = _text(domain_table["where"], source, "[domain] where")
    return Spec(inputs, body, title, constants, domain, source)


def _inputs(document: Mapping[str, Any], body: Any, source: str) -> tuple[Word, ...]:
    if "inputs" in document:
        table = _table(document["inputs"], source, "[inputs]")
        if not table:
            raise SpecError("at least one word is wanted, such as a = 4", source=source, place="[inputs]")
        return tuple(_word(name, value, source) for name, value in table.items())
    if isinstance(body, Permutation) and body.values is not None:
        size = len(body.values)
        if size < 2 or size & (size - 1):
            raise SpecError(
                f"without [inputs] the number of images is a power of two from 2 on, not {size}",
                source=source,
                place="[permutation] values",
            )
        return (Word(IMPLICIT_WORD, size.bit_length() - 1),)
    raise SpecError("the section [inputs] is missing: one word a line, such as a = 4", source=source)


def _word(name: str, value: Any, source: str) -> Word:
    place = f"[inputs] {name}"
    check_name(name, source=source, place="[inputs]")
    if _is_integer(value):
        return Word(name, _at_least_one(value, source, place))
    if not isinstance(value, Mapping):
        raise SpecError(
            f"a number or a table such as {{ bits = 3, signed = true }} is wanted, not {_shown(value)}",
            source=source,
            place=place,
        )
    _known_keys(value, WORD_KEYS, source, place)
    if "bits" not in value:
        raise SpecError("the key bits is missing: write { bits = 3 } or the like", source=source, place=place)
    count = _at_least_one(value["count"], source, f"{place} count") if "count" in value else None
    bits = _at_least_one(value["bits"], source, f"{place} bits")
    return Word(name, bits, _truth(value.get("signed", False), source, f"{place} signed"), count)


def _constants(value: Any, source: str) -> dict[str, Constant]:
    table = _table(value, source, "[constants]")
    for name, constant in table.items():
        check_name(name, source=source, place="[constants]")
        check_constant(constant, source, f"[constants] {name}")
    return dict(table)


def check_constant(value: Any, source: str, place: str) -> None:
    """Raise SpecError unless `value` is an integer, a Boolean, or a (nested) list of such."""
    pending: list[tuple[Any, str]] = [(value, place)]
    while pending:
        found, where = pending.pop()
        if isinstance(found, list):
            pending.extend((entry, f"{where}[{index}]") for index, entry in enumerate(found))
        elif not isinstance(found, int):
            raise SpecError(
                f"integers, Booleans and lists of them are wanted, not {_shown(found)}",
                source=source,
                place=where,
            )


def _predicate(table: Mapping[str, Any], source: str) -> Predicate:
    chosen = _one_of(table, PREDICATES, source, "[predicate]")
    text = _text(table[chosen], source, f"[predicate] {chosen}")
    if chosen == "where":
        return Predicate(where=text)
    if chosen == "formula":
        return Predicate(formula=text)
    return Predicate(table=table_entries(text, source, "[predicate] table"))


def table_entries(text: str, source: str, place: str) -> tuple[int | None, ...]:
    """The entries of a predicate's table: '0', '1' and '-' (free); white space and '_' are ignored."""
    kept = "".join(text.split()).replace("_", "")
    entries = {"0": 0, "1": 1, "-": None}
    try:
        return tuple([entries[character] for character in kept])
    except KeyError:
        position, character = next((i, c) for i, c in enumerate(kept) if c not in entries)
        raise SpecError(
            f"entry {position} is {character!r}: only 0, 1 and - are allowed (spaces and _ are ignored)",
            source=source,
            place=place,
        ) from None


def _outputs(table: Mapping[str, Any], source: str) -> Outputs:
    if not table:
        raise SpecError(
            'at least one output word is wanted, such as total = { value = "a + b" }',
            source=source,
            place="[outputs]",
        )
    return Outputs(tuple(_output(name, value, source) for name, value in table.items()))


def _output(name: str, value: Any, source: str) -> Output:
    place = f"[outputs] {name}"
    check_name(name, source=source, place="[outputs]")
    if not isinstance(value, Mapping):
        raise SpecError(
            f'a table such as {{ value = "a + b", bits = 5 }} is wanted, not {_shown(value)}',
            source=source,
            place=place,
        )
    _known_keys(value, OUTPUT_KEYS, source, place)
    chosen = _one_of(
        {key: entry for key, entry in value.items() if key in ("value", "table")},
        ("value", "table"),
        source,
        place,
    )
    bits = _at_least_one(value["bits"], source, f"{place} bits") if "bits" in value else None
    signed = _truth(value.get("signed", False), source, f"{place} signed")
    if chosen == "value":
        return Output(name, value=_text(value["value"], source, f"{place} value"), bits=bits, signed=signed)
    return Output(name, table=_images(value["table"], source, f"{place} table"), bits=bits, signed=signed)


def _permutation(table: Mapping[str, Any], source: str) -> Permutation:
    chosen = _one_of(table, PERMUTATIONS, source, "[permutation]")
    place = f"[permutation] {chosen}"
    if chosen == "values":
        return Permutation(values=_images(table["values"], source, place))
    if chosen == "steps":
        return Permutation(steps=_steps(table["steps"], source, place))
    images = _table(table["map"], source, place)
    if not images:
        raise SpecError(
            'at least one word is wanted, such as { a = "(a + 3) % 16" }', source=source, place=place
        )
    return Permutation(
        map={name: _text(text, source, f"{place} {_one_line(name)}") for name, text in images.items()}
    )


def _steps(value: Any, source: str, place: str) -> tuple[str, ...]:
    """A list of texts, one a step."""
    if not isinstance(value, Sequence) or isinstance(value, str) or not value:
        wanted = 'a list of texts with at least one is wanted, such as ["x += y"]'
        shown = "an empty list" if isinstance(value, Sequence) and not value else _shown(value)
        raise SpecError(f"{wanted}, not {shown}", source=source, place=place)
    return tuple(_text(step, source, f"{place} {number}") for number, step in enumerate(value, 1))


def _images(value: Any, source: str, place: str) -> tuple[int | None, ...]:
    """A list of integers in which "-" is free."""
    if not isinstance(value, Sequence) or isinstance(value, str):
        raise SpecError(
            f'a list of integers and "-" is wanted, not {_shown(value)}', source=source, place=place
        )
    for index, entry in enumerate(value):
        if entry != "-" and not _is_integer(entry):
            raise SpecError(
                f'entry {index} is {_shown(entry)}: an integer or "-" is wanted', source=source, place=place
            )
    return tuple(None if entry == "-" else int(entry) for entry in value)


_BODY_READERS: dict[str, Callable[[Mapping[str, Any], str], Predicate | Outputs | Permutation]] = {
    "predicate": _predicate,
    "outputs": _outputs,
    "permutation": _permutation,
}


def _distinct_names(
    inputs: Sequence[Word], constants: Mapping[str, Constant], body: Any, source: str
) -> None:
    """Raise SpecError where a name stands for two things; doubled keys of one section are TOML errors."""
    taken = {word.name: "[inputs]" for word in inputs}
    later = [(name, "[constants]") for name in constants]
    if isinstance(body, Outputs):
        later.extend((word.name, "[outputs]") for word in body.words)
    for name, section in later:
        if name in taken:
            raise SpecError(
                f"{name} is already a name of {taken[name]}: choose another", source=source, place=section
            )
        taken[name] = section


def _one_of(table: Mapping[str, Any], allowed: Sequence[str], source: str, place: str) -> str:
    _known_keys(table, allowed, source, place)
    chosen = [key for key in allowed if key in table]
    if len(chosen) == 1:
        return chosen[0]
    found = "there is none" if not chosen else f"not {' and '.join(chosen)} at once"
    raise SpecError(f"exactly one of {_listed(allowed)} is wanted, {found}", source=source, place=place)


def _known_keys(table: Mapping[str, Any], allowed: Sequence[str], source: str, place: str) -> None:
    for key in table:
        if key not in allowed:
            from difflib import get_close_matches

            close = get_close_matches(key, allowed, n=1)
            meant = f" (did you mean {close[0]}?)" if close else ""
            kind = "key" if place else "section or key"
            raise SpecError(
                f"unknown {kind} {_one_line(key)!r}{meant}: {_listed(allowed)} are known"
                if len(allowed) > 1
                else f"unknown {kind} {_one_line(key)!r}{meant}: only {allowed[0]} is known",
                source=source,
                place=place,
            )


def _table(value: Any, source: str, place: str) -> Mapping[str, Any]:
    if not isinstance(value, Mapping):
        raise SpecError(f"a table is wanted, not {_shown(value)}", source=source, place=place)
    return value


def _text(value: Any, source: str, place: str) -> str:
    if not isinstance(value, str):
        raise SpecError(f"a text in quotes is wanted, not {_shown(value)}", source=source, place=place)
    return value


def _truth(value: Any, source: str, place: str) -> bool:
    if not isinstance(value, bool):
        raise SpecError(f"true or false is wanted, not {_shown(value)}", source=source, place=place)
    return value


def _at_least_one(value: Any, source: str, place: str) -> int:
    if not _is_integer(value) or value < 1:
        raise SpecError(f"an integer from 1 on is wanted, not {_shown(value)}", source=source, place=place)
    return int(value)


def _is_integer(value: Any) -> bool:
    return isinstance(value, int) and not isinstance(value, bool)


def _listed(names: Sequence[str]) -> str:
    return names[0] if len(names) == 1 else f"{', '.join(names[:-1])} and {names[-1]}"


def _shown(value: Any) -> str:
    """A value as TOML would name it, short and on one line."""
    if isinstance(value, bool):
        return "true" if value else "false"
    if isinstance(value, Mapping):
        return "a table"
    if isinstance(value, list | tuple):
        return "a list"
    if isinstance(value, str):
        return f"the text {_one_line(value)!r}"
    if isinstance(value, int) and value.bit_length() > 200:
        return f"an integer of {value.bit_length()} bits"
    return _one_line(str(value))


def _one_line(text: str, limit: int = 60) -> str:
    flat = " ".join(text.split())
    return flat if len(flat) <= limit else flat[: limit - 3] + "..."
