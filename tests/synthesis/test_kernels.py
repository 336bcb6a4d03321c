"""The compiled kernels: equal to their own Python text, and to the batch form."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from revsynth.cascade.simulate import permutation
from revsynth.synthesis import kernels
from revsynth.synthesis.rows import transform_many
from tests.strategies import permutations

ALL = np.uint64(0xFFFFFFFFFFFFFFFF)
EDGES = [0, 1, 2, 63, 64, 1 << 31, 1 << 32, (1 << 63) - 1, 1 << 63, int(ALL) - 1, int(ALL)]
words = st.one_of(st.sampled_from(EDGES), st.integers(0, int(ALL)))


def column_arrays(max_lines: int = 5, count: int = 3) -> st.SearchStrategy[np.ndarray]:
    return st.integers(1, max_lines).flatmap(
        lambda lines: st.lists(words, min_size=lines * count, max_size=lines * count).map(
            lambda flat: np.array(flat, dtype=np.uint64).reshape(lines, count)
        )
    )


@given(column_arrays(), st.integers(0, 191))
def test_read_value(columns: np.ndarray, index: int) -> None:
    row = np.uint64(index)
    expected = sum(((int(column[index >> 6]) >> (index & 63)) & 1) << b for b, column in enumerate(columns))
    assert int(kernels.read_value(columns, row)) == expected
    assert int(kernels.read_value.py_func(columns, row)) == expected


@given(column_arrays(), st.sampled_from([1, 3, 0xFF, int(ALL)]), st.integers(0, 31))
def test_find_value(columns: np.ndarray, valid: int, value: int) -> None:
    value &= (1 << columns.shape[0]) - 1
    arguments = (columns, np.uint64(valid), np.uint64(value))
    found = int(kernels.find_value(*arguments))
    assert found == int(kernels.find_value.py_func(*arguments))
    holders = [
        row
        for row in range(192)
        if (valid >> (row & 63)) & 1 and int(kernels.read_value(columns, np.uint64(row))) == value
    ]
    assert found == (holders[0] if holders else 0)


@given(column_arrays(), st.integers(0, 3), st.integers(0, 31), st.integers(0, 4))
def test_apply_gate(columns: np.ndarray, start: int, care: int, target: int) -> None:
    lines = columns.shape[0]
    target %= lines
    mask = np.uint64(care & ((1 << lines) - 1) & ~(1 << target))
    fast, slow = columns.copy(), columns.copy()
    kernels.apply_gate(fast, np.zeros(3, dtype=np.uint64), start, mask, target)
    kernels.apply_gate.py_func(slow, np.zeros(3, dtype=np.uint64), start, mask, target)
    product = np.full(3, ALL)
    for line in range(lines):
        if (int(mask) >> line) & 1:
            product &= columns[line]
    expected = columns.copy()
    expected[target, start:] ^= product[start:]
    assert np.array_equal(fast, expected)
    assert np.array_equal(slow, expected)


@given(words, words)
def test_differing_bits(one: int, other: int) -> None:
    arguments = (np.uint64(one), np.uint64(other))
    assert kernels.differing_bits(*arguments) == (one ^ other).bit_count()
    assert kernels.differing_bits.py_func(*arguments) == (one ^ other).bit_count()


@given(st.integers(0, 255), st.integers(0, 255), st.booleans())
def test_choose_controls(value: int, row: int, minimal: bool) -> None:
    arguments = (np.uint64(value), np.uint64(row), 8, minimal)
    chosen = int(kernels.choose_controls(*arguments))
    assert chosen == int(kernels.choose_controls.py_func(*arguments))
    assert chosen & ~value == 0
    if not minimal or value < row:
        assert chosen == value
    else:
        lowest = chosen & -chosen
        assert chosen >= row
        assert not chosen or chosen ^ lowest < row


@given(permutations(max_lines=7), st.booleans(), st.booleans())
def test_transform_equals_its_python_text_and_the_batch_form(
    values: list[int], both: bool, minimal: bool
) -> None:
    table = np.array(values)
    options = {
        "directions": "both" if both else "one",
        "controls": "minimal" if minimal else "published",
    }
    compiled = kernels.transform_one(table, **options)
    with pytest.MonkeyPatch.context() as patch:
        for name in ("transform", "read_value", "find_value", "apply_gate", "choose_controls"):
            patch.setattr(kernels, name, getattr(kernels, name).py_func)
        interpreted = kernels.transform_one(table, **options)
    batch = transform_many(table[None], **options)
    assert compiled.cascade(0) == interpreted.cascade(0) == batch.cascade(0)


@pytest.mark.parametrize("lines", [8, 11, 12])
@pytest.mark.parametrize("directions", ["one", "both"])
def test_large_permutations(lines: int, directions: str) -> None:
    table = np.random.default_rng(lines).permutation(1 << lines)
    assert np.array_equal(permutation(kernels.transform_one(table, directions=directions).cascade(0)), table)


@pytest.mark.parametrize("table", [[0, 1, 2], [0, 0], [1, 2], [-1, 0]])
def test_what_is_no_permutation_is_refused(table: list[int]) -> None:
    with pytest.raises(ValueError, match=r"2\*\*lines"):
        kernels.transform_one(np.array(table))
