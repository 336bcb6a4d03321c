"""Naming the lines of an `embedded` block, or of an in-place one with its outputs in any order.

Both the JSON key `placement` and the comment lines of the file.

Lines are listed least significant bit first, under the spec's own names.
"""

from __future__ import annotations

from typing import Any

from revsynth.spec.understand import Understanding
from revsynth.synthesis.interface import Block


def describe_placement(block: Block, understanding: Understanding) -> dict[str, Any] | None:
    """The contract's object for an embedded block (None for others): before, preset, after, leftover."""
    placement = block.placement
    if placement is None:
        return None
    lines = range(block.inputs)
    spec = understanding.spec
    outputs = spec.inputs if spec.kind == "permutation" else understanding.outputs
    return {
        "before": _by_word(understanding.spec.inputs, placement.before),
        "preset": {str(line): value for line, value in sorted(placement.preset)},
        "after": _by_word(outputs, placement.after) or {"mark": list(placement.after)},
        "leftover": [line for line in lines if line not in placement.after],
    }


def placement_comments(block: Block, understanding: Understanding) -> list[str]:
    """One comment a line: `line 3: a[1] before, total[0] after`."""
    described = describe_placement(block, understanding)
    if described is None:
        return []
    before = _labels(described["before"])
    after = _labels(described["after"])
    comments = []
    for line in range(block.inputs):
        start = before.get(line, f"{described['preset'].get(str(line), 0)}")
        comments.append(f"line {line}: {start} before, {after.get(line, '(leftover)')} after")
    return comments


def _by_word(words: Any, lines: tuple[int, ...]) -> dict[str, list[int]]:
    found: dict[str, list[int]] = {}
    start = 0
    for word in words:
        for name, bits in word.elements():
            found[name] = list(lines[start : start + bits])
            start += bits
    return found


def _labels(by_word: dict[str, list[int]]) -> dict[int, str]:
    return {
        line: name if len(lines) == 1 else f"{name}[{bit}]"
        for name, lines in by_word.items()
        for bit, line in enumerate(lines)
    }
