"""Which line of an `embedded` block holds what: from the JSON key `placement`, or from comment lines.

Lines are listed least significant bit first, under the spec's own names. The comment lines read
`line 3: a[1] before, total[0] after`, with 0 or 1 before where the line is preset, and `(leftover)` after for
garbage, in brackets because an output word may be called so.
"""

from __future__ import annotations

import re
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import Any

from revsynth.spec.layout import bit_labels

_COMMENT = re.compile(r"line ([0-9]+): (\S+) before, (\S+) after")
_ABSENT = -1

Elements = Sequence[tuple[str, int]]
"""(name, bits) a word or array element."""


@dataclass(frozen=True)
class Lines:
    """Input bit i starts on line before[i], output bit j ends on line after[j]; preset: (line, 0 or 1)."""

    before: tuple[int, ...]
    preset: tuple[tuple[int, int], ...]
    after: tuple[int, ...]


def lines_from_object(
    placement: Mapping[str, Any], inputs: Elements, outputs: Elements, size: int
) -> Lines | str:
    """Read `{"before": ..., "preset": ..., "after": ...}`; a string says what is wrong with it."""
    try:
        before = [line for element in inputs for line in _listed(placement, "before", *element)]
        after = [line for element in outputs for line in _listed(placement, "after", *element)]
        preset = [(int(line), int(value)) for line, value in dict(placement.get("preset", {})).items()]
    except (TypeError, ValueError) as error:
        return f"placement: {error}"
    return _checked(before, preset, after, size)


def _listed(placement: Mapping[str, Any], side: str, name: str, bits: int) -> list[int]:
    lines = dict(placement.get(side, {})).get(name)
    if lines is None or len(lines) != bits:
        raise ValueError(f"'{side}' must list {bits} lines for {name}, not {lines}")
    return [int(line) for line in lines]


def is_line_comment(comment: str) -> bool:
    """Whether a comment says what is on a line."""
    return _COMMENT.fullmatch(comment.strip().lstrip("/").strip()) is not None


def lines_from_comments(
    comments: Sequence[str], inputs: Elements, outputs: Elements, size: int
) -> Lines | str:
    """Read the comment lines; a string says what is missing."""
    starts: dict[str, int] = {}
    ends: dict[str, int] = {}
    preset: list[tuple[int, int]] = []
    for comment in comments:
        found = _COMMENT.fullmatch(comment.strip().lstrip("/").strip())
        if found is None:
            continue
        line, start, end = int(found[1]), found[2], found[3]
        if start in ("0", "1"):
            preset.append((line, int(start)))
        else:
            starts[start] = line
        ends[end] = line
    if not starts and not ends:
        return (
            "nothing says which line of the embedded block holds what: "
            "comment lines like `// line 3: a[1] before, total[0] after` are missing"
        )
    before = [starts.get(label, _ABSENT) for label in bit_labels(inputs)]
    after = [ends.get(label, _ABSENT) for label in bit_labels(outputs)]
    for labels, lines, side in (
        (bit_labels(inputs), before, "before"),
        (bit_labels(outputs), after, "after"),
    ):
        if _ABSENT in lines:
            return f"no comment line says where {labels[lines.index(_ABSENT)]} is {side} the block"
    return _checked(before, preset, after, size)


def _checked(before: list[int], preset: list[tuple[int, int]], after: list[int], size: int) -> Lines | str:
    starts = [*before, *(line for line, _ in preset)]
    wrong = next((line for line in (*starts, *after) if not 0 <= line < size), None)
    if wrong is not None:
        return f"placement: line {wrong} is not in the register line of {size} qubits"
    if any(value not in (0, 1) for _, value in preset):
        return "placement: a line is preset to 0 or 1"
    for lines, side in ((starts, "before"), (after, "after")):
        twice = next((line for line in lines if lines.count(line) > 1), None)
        if twice is not None:
            return f"placement: line {twice} is used twice {side} the block"
    missing = next((line for line in range(size) if line not in starts), None)
    if missing is not None:
        return f"placement: nothing says how line {missing} starts"
    return Lines(tuple(before), tuple(preset), tuple(after))
