"""Running every value of the variables finds a 1 where there is one, and says so where there is none."""

from __future__ import annotations

import random

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from revsynth.verification.lifting.parities import Parities
from revsynth.verification.proof import every_input, kernels
from revsynth.verification.proof.cone import Cone
from revsynth.verification.proof.every_input import find_one, variable_columns


def random_literal(seed: int, count: int) -> tuple[Parities, list[int], int]:
    """A literal over `count` variables, mostly 0: a product of random sums and products."""
    draw = random.Random(seed)
    parities = Parities(seed)
    variables = [parities.free() for _ in range(count)]
    made = list(variables)
    for _ in range(3 * count):
        a, b = draw.sample(made, 2)
        made.append((parities.and_ if draw.random() < 0.5 else parities.xor)(a, b ^ draw.getrandbits(1)))
    return parities, variables, parities.all_of(draw.sample(made, min(6, len(made)))) ^ draw.getrandbits(1)


@given(st.integers(0, 10_000), st.integers(2, 15))
def test_what_is_found_is_right(seed: int, count: int) -> None:
    parities, variables, literal = random_literal(seed, count)
    if literal < 2:
        return
    found = find_one(parities, variables, literal)
    cone = Cone(parities, variables, [literal])
    every = np.arange(1 << max(count, 6), dtype=np.uint64)
    bits = ((every[None, :] >> np.arange(count, dtype=np.uint64)[:, None]) & np.uint64(1)).astype(np.uint8)
    words = np.packbits(bits, axis=1, bitorder="little").view("<u8").astype(np.uint64)
    values = cone.values([literal], words)[0]
    if found is False:
        assert not values.any()
        return
    assert isinstance(found, tuple)
    number = sum(bit << place for place, bit in enumerate(found))
    assert int(values[number >> 6]) >> (number & 63) & 1


def test_the_compiled_loop_equals_its_python() -> None:
    draw = np.random.default_rng(3)
    is_xor = draw.integers(0, 2, 12).astype(np.bool_)
    left = np.array([draw.integers(0, 15 + gate) for gate in range(12)])
    right = np.array([draw.integers(0, 15 + gate) for gate in range(12)])
    found = []
    for loop in (kernels.search, kernels.compiled_search()):
        values = np.zeros((27, 64), dtype=np.uint64)
        values[1:13] = variable_columns(12)
        for flip in (0, 1):
            found.append((loop(is_xor, left, right, 14, 26, flip, 0, 4, values), values.copy()))
    assert [word for word, _ in found[:2]] == [word for word, _ in found[2:]]
    for (_, one), (_, other) in zip(found[:2], found[2:], strict=True):
        assert np.array_equal(one, other)


def test_too_much_work_is_not_begun(monkeypatch: pytest.MonkeyPatch) -> None:
    parities, variables, literal = random_literal(1, 12)
    monkeypatch.setattr(every_input, "MOST_WORK", 1)
    assert find_one(parities, variables, literal) is None


def test_columns_count_up() -> None:
    columns = variable_columns(12)
    for number in (0, 1, 63, 64, 4095, 2730):
        assert (
            sum((int(row[number >> 6]) >> (number & 63) & 1) << i for i, row in enumerate(columns)) == number
        )
