"""Each compiled kernel equals its plain Python body on edge words."""

from __future__ import annotations

import numpy as np
import pytest

from revsynth.logic import kernels

EDGES = [0, 1, 2, 3, 0x5555555555555555, 0xAAAAAAAAAAAAAAAA, (1 << 63), (1 << 64) - 1, 0xDEADBEEF]


@pytest.fixture(autouse=True)
def _wrapping() -> object:
    """Plain numpy warns where a hash overflows on purpose."""
    with np.errstate(over="ignore"):
        yield


@pytest.mark.parametrize("word", EDGES)
def test_small_kernels(word: int) -> None:
    w = np.uint64(word)
    table = np.zeros(64, dtype=np.int64)
    prices = np.arange(33, dtype=np.int64)
    assert kernels.popcount(w) == kernels.popcount.py_func(w) == word.bit_count()
    assert kernels.slot_of(w, table) == kernels.slot_of.py_func(w, table)
    assert kernels.price_of(w, 32, prices) == kernels.price_of.py_func(w, 32, prices)
    seeds = np.array([word | 1], dtype=np.uint64), np.array([word | 1], dtype=np.uint64)
    assert kernels.random_word(seeds[0]) == kernels.random_word.py_func(seeds[1])
    assert seeds[0] == seeds[1]
    assert kernels.random_below(seeds[0], 7) == kernels.random_below.py_func(seeds[1], 7)


@pytest.mark.parametrize("place", [0, 15, 31])
def test_other_value_gives_the_two_others(place: int) -> None:
    for here in (1, 2, 3):
        code = np.uint64(here << 2 * place)
        got = {int(kernels.other_value(code, place, which)) >> 2 * place for which in (0, 1)}
        plain = {int(kernels.other_value.py_func(code, place, which)) >> 2 * place for which in (0, 1)}
        assert got == plain == {1, 2, 3} - {here}


class Store:
    """The arrays of a sum under rewriting, twice: for the compiled and for the plain body."""

    def __init__(self, codes: list[int], masks: list[int], inputs: int) -> None:
        self.inputs = inputs
        self.prices = np.arange(10, 10 + inputs + 1, dtype=np.int64)
        self.codes = np.zeros(32, dtype=np.uint64)
        self.masks = np.zeros(32, dtype=np.uint64)
        self.table = np.zeros(128, dtype=np.int64)
        self.state = np.zeros(2, dtype=np.int64)
        for code, mask in zip(codes, masks, strict=True):
            kernels.insert(np.uint64(code), np.uint64(mask), *self.arrays)

    @property
    def arrays(self) -> tuple[object, ...]:
        return self.codes, self.masks, self.table, self.state, self.inputs, self.prices

    def same_as(self, other: Store) -> bool:
        return all(
            np.array_equal(a, b)
            for a, b in zip(self.arrays[:4], other.arrays[:4], strict=True)  # type: ignore[arg-type]
        )


CUBES = [0b10_10_10, 0b01_10_10, 0b11_11_11, 0b01_01_10, 0b10_01_01, 0b01_01_01]
MASKS = [1, 3, 1, 1, 2, 3]


def pair() -> tuple[Store, Store]:
    return Store(CUBES, MASKS, 3), Store(CUBES, MASKS, 3)


def test_inserting_finding_removing() -> None:
    one, two = pair()
    kernels.insert(np.uint64(0b11_10_01), np.uint64(1), *one.arrays)
    kernels.insert.py_func(np.uint64(0b11_10_01), np.uint64(1), *two.arrays)
    assert one.same_as(two)
    for index in (3, 0, 4):
        kernels.remove(index, *one.arrays)
        kernels.remove.py_func(index, *two.arrays)
        assert one.same_as(two)
    for code in [*CUBES, 0b11_10_01, 0]:
        found = kernels.find(np.uint64(code), one.codes, one.table)
        assert found == kernels.find.py_func(np.uint64(code), two.codes, two.table)
        assert found == -1 or one.codes[found] == code
    assert one.state[0] == 4
    assert one.state[1] == sum(kernels.price_of(c, 3, one.prices) for c in one.codes[:4])


def test_adding_merges_alike() -> None:
    for code, mask in ((0b10_10_10, 1), (0b01_10_01, 3), (0b11_11_01, 2), (0b10_01_10, 1)):
        one, two = pair()
        seeds = np.array([99], dtype=np.uint64), np.array([99], dtype=np.uint64)
        kernels.add(np.uint64(code), np.uint64(mask), *one.arrays, seeds[0])
        kernels.add.py_func(np.uint64(code), np.uint64(mask), *two.arrays, seeds[1])
        assert one.same_as(two)
    one, two = pair()
    seeds = np.array([5], dtype=np.uint64), np.array([5], dtype=np.uint64)
    more = np.array([0b11_10_01, 0b11_10_10], dtype=np.uint64), np.array([1, 1], dtype=np.uint64)
    kernels.add_all(*more, *one.arrays, seeds[0])
    kernels.add_all.py_func(*more, *two.arrays, seeds[1])
    assert one.same_as(two)


def test_looking_for_partners_and_gains() -> None:
    one, _ = pair()
    places = np.zeros(3, dtype=np.int64), np.zeros(3, dtype=np.int64)
    for a in range(6):
        seeds = np.array([7 + a], dtype=np.uint64), np.array([7 + a], dtype=np.uint64)
        found = kernels.partner_two(a, one.codes, one.masks, one.table, 3, seeds[0])
        assert found == kernels.partner_two.py_func(a, one.codes, one.masks, one.table, 3, seeds[1])
        for b in range(6):
            distance = kernels.places_between(a, b, one.codes, one.masks, 3, places[0])
            assert distance == kernels.places_between.py_func(a, b, one.codes, one.masks, 3, places[1])
            assert np.array_equal(*places)
            code, mask = one.codes[b] ^ np.uint64(3), one.masks[a]
            rest = (code, mask, a, -1, one.codes, one.masks, one.table, 3, one.prices)
            assert kernels.gain_of(*rest) == kernels.gain_of.py_func(*rest)
        assert found < 0 or kernels.places_between(a, found, one.codes, one.masks, 3, places[0]) == 2


def test_mixing_and_shuffling() -> None:
    one, _ = pair()
    places = np.array([0, 2, 3], dtype=np.int64)
    for kinds in ([0, 1, 2], [2, 0, 1], [1, 2, 0]):
        out = [np.zeros(3, dtype=np.uint64) for _ in range(4)]
        rest = (places, np.array(kinds, dtype=np.int64), 3, one.codes, one.masks, 3)
        kernels.mixed(0, 4, *rest, out[0], out[1], 1)
        kernels.mixed.py_func(0, 4, *rest, out[2], out[3], 1)
        assert np.array_equal(out[0], out[2])
        assert np.array_equal(out[1], out[3])
    seeds = np.array([3], dtype=np.uint64), np.array([3], dtype=np.uint64)
    orders = np.zeros(3, dtype=np.int64), np.zeros(3, dtype=np.int64)
    kernels.shuffle(orders[0], 3, seeds[0])
    kernels.shuffle.py_func(orders[1], 3, seeds[1])
    assert np.array_equal(*orders)
    assert sorted(orders[0]) == [0, 1, 2]


def test_annealing_alike() -> None:
    one, two = pair()
    best = [np.zeros(32, dtype=np.uint64) for _ in range(4)]
    seeds = np.array([11], dtype=np.uint64), np.array([11], dtype=np.uint64)
    size = kernels.anneal(*one.arrays, 60, 5.0, seeds[0], best[0], best[1])
    plain = kernels.anneal.py_func(*two.arrays, 60, 5.0, seeds[1], best[2], best[3])
    assert size == plain
    assert one.same_as(two)
    assert np.array_equal(best[0], best[2])
    assert np.array_equal(best[1], best[3])


def test_cycle_lengths_alike() -> None:
    images = np.array([2, 1, 0, 4, 5, 3], dtype=np.int64)
    assert kernels.cycle_lengths(images).tolist() == [2, 1, 3]
    assert kernels.cycle_lengths.py_func(images).tolist() == [2, 1, 3]
