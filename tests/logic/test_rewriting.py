"""Pair rewriting, by the numpy walk and by the compiled annealing: the same function before and after."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from revsynth.logic.annealing import anneal
from revsynth.logic.cube_codes import CodeSpace, decode, encode
from revsynth.logic.cubes import Cube, ExclusiveSum
from revsynth.logic.free_cubes import FreeCubes
from revsynth.logic.function import Function
from revsynth.logic.normal_form import best_polarity
from revsynth.logic.pair_rewriting import Walk, rewrite
from revsynth.logic.random_words import Random
from revsynth.logic.truth_table import last_word_mask, unpack
from tests.logic.tables import functions, random_column, sums


def flat(cubes: ExclusiveSum) -> list[int]:
    return [100 + 3 * k for k in range(cubes.inputs + 1)]


@given(sums(), st.integers(0, 2**64 - 1))
def test_every_step_of_a_walk_keeps_the_function(cubes: ExclusiveSum, seed: int) -> None:
    before = cubes.evaluate()
    walk = Walk(encode(cubes), CodeSpace(cubes.inputs, flat(cubes)), seed)
    for _ in range(12):
        if not walk.step(heat=0.3):
            break
        assert np.array_equal(decode(walk.codes, cubes.inputs, cubes.outputs).evaluate(), before)


@given(sums(max_inputs=8, max_cubes=20), st.integers(0, 2**64 - 1))
def test_rewriting_keeps_the_function_and_is_never_dearer(cubes: ExclusiveSum, seed: int) -> None:
    prices = flat(cubes)
    for after in (
        rewrite(cubes, prices, steps=25, seed=seed),
        anneal(cubes, prices, moves=500, heat=0.3, seed=seed),
    ):
        assert np.array_equal(after.evaluate(), cubes.evaluate())
        assert after.price(prices) <= cubes.in_order().price(prices)


@given(functions(max_inputs=5), st.integers(0, 1000))
def test_rewriting_with_free_values_keeps_what_is_fixed(function: Function, seed: int) -> None:
    n = function.inputs
    free = FreeCubes.of(function.care, n)
    if free is None:
        assert np.all(function.care == last_word_mask(n))
        return
    polarity, coefficients = best_polarity(function.values, n, [1] * (n + 1))
    cubes = ExclusiveSum.from_coefficients(coefficients, n, polarity)
    prices = flat(cubes)
    for after in (
        rewrite(cubes, prices, steps=25, seed=seed, free=free),
        decode(free.loosen(encode(cubes), CodeSpace(n, prices)), n, cubes.outputs),
    ):
        assert not np.any((after.evaluate() ^ function.values) & function.care)
        assert after.price(prices) <= cubes.price(prices)


@given(functions(max_inputs=4, max_outputs=2))
def test_the_table_of_free_cubes_is_right(function: Function) -> None:
    n = function.inputs
    table = FreeCubes(function.care, n)
    care = [unpack(row, n) for row in function.care]
    every = [Cube(mask, value, 1) for mask in range(1 << n) for value in range(1 << n) if value & ~mask == 0]
    masks = table.outputs(encode(ExclusiveSum.of(n, 1, every)))
    for cube, mask in zip(every, masks.tolist(), strict=True):
        inside = [x for x in range(1 << n) if x & cube.care == cube.value]
        wanted = sum(1 << j for j, row in enumerate(care) if not any(row[x] for x in inside))
        assert mask == wanted


# Hand-made pairs, one for each distance (1-0 stands for input 0 plain, input 1 absent, input 2 negated).


def cube(text: str, feeds: int = 1) -> Cube:
    care = sum(1 << i for i, c in enumerate(text) if c != "-")
    return Cube(care, sum(1 << i for i, c in enumerate(text) if c == "1"), feeds)


@pytest.mark.parametrize(
    ("before", "after"),
    [
        (["10-", "10-"], []),
        (["10-", "11-"], ["1--"]),
        (["1--", "10-"], ["11-"]),
        (["110", "001", "111", "000"], 2),
        (["1-1", "01-", "0-0"], 3),
        (["00--", "11--", "1010", "0110"], 4),
    ],
)
def test_hand_made_sums(before: list[str], after: list[str] | int) -> None:
    inputs = len(before[0])
    cubes = ExclusiveSum.of(inputs, 1, [cube(text) for text in before])
    found = rewrite(cubes, flat(cubes), steps=60)
    if isinstance(after, int):
        assert len(found) <= after
    else:
        assert [c.text(inputs) for c in found] == after


def test_cubes_that_differ_in_their_outputs_alone_become_one() -> None:
    cubes = ExclusiveSum.of(2, 3, [cube("10", 0b011), cube("10", 0b110)])
    for found in (rewrite(cubes, flat(cubes), steps=5), anneal(cubes, flat(cubes), moves=5)):
        assert list(found) == [cube("10", 0b101)]


@pytest.mark.parametrize("inputs", [0, 1])
def test_the_smallest_sums(inputs: int) -> None:
    for cubes in (
        ExclusiveSum.of(inputs, 1, []),
        ExclusiveSum.of(inputs, 1, [Cube(0, 0)]),
        ExclusiveSum.of(inputs, 1, [Cube(0, 0), Cube(0, 0), Cube(0, 0)]),
    ):
        for found in (rewrite(cubes, flat(cubes), steps=5), anneal(cubes, flat(cubes), moves=5)):
            assert np.array_equal(found.evaluate(), cubes.evaluate())
            assert len(found) <= 1


def test_the_same_seed_gives_the_same_sum() -> None:
    polarity, coefficients = best_polarity(random_column(8, seed=4)[None], 8, [1] * 9)
    cubes = ExclusiveSum.from_coefficients(coefficients, 8, polarity)
    for shorten in (
        lambda: rewrite(cubes, flat(cubes), steps=60, seed=5),
        lambda: anneal(cubes, flat(cubes), moves=5000, seed=5),
    ):
        assert list(shorten()) == list(shorten())


def test_annealing_refuses_bad_prices_and_moves() -> None:
    cubes = ExclusiveSum.of(1, 1, [Cube(0, 0), Cube(1, 1)])
    with pytest.raises(ValueError, match="2 prices from 1 up are needed"):
        anneal(cubes, [1, 0], moves=1)
    with pytest.raises(ValueError, match="moves -1 must be a number from 0 up"):
        anneal(cubes, [1, 1], moves=-1)


def test_free_cubes_have_limits() -> None:
    with pytest.raises(ValueError, match="14 inputs, 1 outputs: at most 13 and 64"):
        FreeCubes(np.zeros((1, 256), dtype=np.uint64), 14)


def test_random_words_are_the_published_sequence() -> None:
    """splitmix64 from the seed 1234567: first outputs as commonly quoted (common practice, from memory)."""
    assert Random(1234567).words(3).tolist() == [
        6457827717110365317,
        3203168211198807973,
        9817491932198370423,
    ]
    fractions = Random(1).fractions(1000)
    assert 0 < fractions.min() <= fractions.max() <= 1
