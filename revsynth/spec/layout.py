"""The combined index of an input: its words in declared order, the first lowest, element 0 first.

Bit 0 of a word is the least significant; a signed word takes part by its two's complement bit pattern.
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from typing import TypeAlias

from revsynth.spec.model import Word

Value: TypeAlias = "int | list[int]"
"""The value of a word, or of the words of an array."""


def decode(words: Sequence[Word], index: int) -> dict[str, Value]:
    """The values of the words at a combined index; signed ones may be negative, arrays are lists.

    Raises ValueError where the index is negative or too large for the words.
    """
    if index < 0 or index >> sum(word.total_bits for word in words):
        raise ValueError(f"index {index} does not fit the words")
    values: dict[str, Value] = {}
    for word in words:
        elements = []
        for _ in range(1 if word.count is None else word.count):
            pattern = index & ((1 << word.bits) - 1)
            index >>= word.bits
            elements.append(from_pattern(pattern, word))
        values[word.name] = elements[0] if word.count is None else elements
    return values


def encode(words: Sequence[Word], values: Mapping[str, int | Sequence[int]]) -> int:
    """The combined index of the values of all words.

    Raises ValueError where a word has no value, a value does not fit, or an array has the wrong length.
    """
    unknown = [name for name in values if name not in {word.name for word in words}]
    if unknown:
        raise ValueError(f"there is no word {unknown[0]}")
    index = 0
    shift = 0
    for word in words:
        if word.name not in values:
            raise ValueError(f"word {word.name} has no value")
        for value in _elements(word, values[word.name]):
            lowest, highest = value_range(word)
            if not lowest <= value <= highest:
                raise ValueError(f"{word.name} holds {lowest} to {highest}, not {value}")
            index |= to_pattern(value, word) << shift
            shift += word.bits
    return index


def _elements(word: Word, value: int | Sequence[int]) -> Sequence[int]:
    if word.count is None:
        if not isinstance(value, int):
            raise ValueError(f"{word.name} is one word, not an array")
        return (value,)
    if isinstance(value, int) or len(value) != word.count:
        raise ValueError(f"{word.name} is an array of {word.count} words")
    return value


def value_range(word: Word) -> tuple[int, int]:
    """The least and the greatest value of a word (of one element, for an array)."""
    if word.signed:
        return -(1 << (word.bits - 1)), (1 << (word.bits - 1)) - 1
    return 0, (1 << word.bits) - 1


def to_pattern(value: int, word: Word) -> int:
    """The bit pattern of a value: its low bits, modulo 2**bits."""
    return value & ((1 << word.bits) - 1)


def from_pattern(pattern: int, word: Word) -> int:
    """The value of a bit pattern, negative where a signed word's top bit is 1."""
    return pattern - (1 << word.bits) if word.signed and pattern >> (word.bits - 1) else pattern


def bit_names(words: Sequence[Word]) -> Iterator[str]:
    """Names of all bits from index 0 on: `a[0]`, `a[1]`, ..., `cell[2][0]`, ..."""
    for word in words:
        for name, bits in word.elements():
            for bit in range(bits):
                yield f"{name}[{bit}]"


def bit_labels(elements: Sequence[tuple[str, int]]) -> list[str]:
    """Names of all bits of words and array elements given as (name, bits), the lowest bit first.

    They are for people: `a[0]`, `a[1]`, `cell[2][0]`, and a one-bit word goes by its own name.
    """
    return [name if bits == 1 else f"{name}[{bit}]" for name, bits in elements for bit in range(bits)]


def describe(words: Sequence[Word], index: int) -> str:
    """An input in words, for messages: `a = 3, k = -1, cell = [0, 2]`."""
    return ", ".join(f"{name} = {value}" for name, value in decode(words, index).items())
