"""The combined index: words in order, the first lowest, signed words by their bit pattern."""

from __future__ import annotations

import pytest
from hypothesis import given
from hypothesis import strategies as st

from revsynth.spec.layout import bit_names, decode, describe, encode, value_range
from revsynth.spec.model import Word

WORDS = (Word("a", 3), Word("k", 2, signed=True), Word("cell", 2, count=2), Word("s", 2, True, 2))


def test_an_index_by_hand() -> None:
    # a = 6 (110), k = -1 (11), cell[0] = 1 (01), cell[1] = 2 (10), s[0] = -2 (10), s[1] = 1 (01)
    index = int("0110100111110", 2)
    values = {"a": 6, "k": -1, "cell": [1, 2], "s": [-2, 1]}
    assert decode(WORDS, index) == values
    assert encode(WORDS, values) == index
    assert describe(WORDS, index) == "a = 6, k = -1, cell = [1, 2], s = [-2, 1]"


def test_names_of_bits_lowest_first() -> None:
    names = list(bit_names(WORDS))
    assert names[:5] == ["a[0]", "a[1]", "a[2]", "k[0]", "k[1]"]
    assert names[5:9] == ["cell[0][0]", "cell[0][1]", "cell[1][0]", "cell[1][1]"]
    assert len(names) == sum(word.total_bits for word in WORDS)


@st.composite
def words(draw: st.DrawFn) -> tuple[Word, ...]:
    count = draw(st.integers(1, 4))
    return tuple(
        Word(
            f"w{number}",
            draw(st.integers(1, 5)),
            draw(st.booleans()),
            draw(st.one_of(st.none(), st.integers(1, 3))),
        )
        for number in range(count)
    )


@given(words(), st.data())
def test_there_and_back(layout: tuple[Word, ...], data: st.DataObject) -> None:
    size = 1 << sum(word.total_bits for word in layout)
    index = data.draw(st.integers(0, size - 1))
    values = decode(layout, index)
    assert encode(layout, values) == index
    for word in layout:
        found = values[word.name]
        lowest, highest = value_range(word)
        assert all(lowest <= one <= highest for one in ([found] if isinstance(found, int) else found))


@pytest.mark.parametrize(
    ("message", "values"),
    [
        ("word k has no value", {"a": 1}),
        ("there is no word z", {"z": 1}),
        ("a holds 0 to 7, not 8", {"a": 8, "k": 0, "cell": [0, 0], "s": [0, 0]}),
        ("k holds -2 to 1, not 2", {"a": 0, "k": 2, "cell": [0, 0], "s": [0, 0]}),
        ("cell is an array of 2 words", {"a": 0, "k": 0, "cell": [0], "s": [0, 0]}),
        ("cell is an array of 2 words", {"a": 0, "k": 0, "cell": 0, "s": [0, 0]}),
        ("a is one word, not an array", {"a": [0], "k": 0, "cell": [0, 0], "s": [0, 0]}),
    ],
)
def test_values_that_do_not_fit(message: str, values: dict[str, int | list[int]]) -> None:
    with pytest.raises(ValueError, match=message):
        encode(WORDS, values)


@pytest.mark.parametrize("index", [-1, 1 << 13])
def test_an_index_beyond_the_words(index: int) -> None:
    with pytest.raises(ValueError, match="does not fit the words"):
        decode(WORDS, index)
