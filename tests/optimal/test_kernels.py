"""The kernels for packed permutations of four lines against slow, obvious Python."""

from __future__ import annotations

from collections.abc import Iterator
from contextlib import contextmanager
from itertools import permutations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from revsynth.optimal import kernels, packed

EDGES = [
    list(range(16)),
    list(range(16))[::-1],
    [x ^ 8 for x in range(16)],
    [x >> 1 | x << 3 & 8 for x in range(16)],
    [15, *range(15)],
]
images = st.one_of(st.sampled_from(EDGES), st.permutations(range(16)).map(list))


def word(of: list[int]) -> np.uint64:
    return np.uint64(packed.pack(of))


def renamed(of: list[int], naming: tuple[int, ...]) -> list[int]:
    """Line l of the new permutation is line naming[l] of the old one."""

    def moved(state: int, places: list[int]) -> int:
        return sum((state >> place & 1) << line for line, place in enumerate(places))

    back = [naming.index(line) for line in range(4)]
    return [moved(of[moved(x, back)], list(naming)) for x in range(16)]


def inverse(of: list[int]) -> list[int]:
    return [of.index(x) for x in range(16)]


def smallest_word(of: list[int]) -> int:
    return min(
        packed.pack(renamed(way, naming)) for way in (of, inverse(of)) for naming in permutations(range(4))
    )


@given(images)
def test_the_smallest_word_is_that_of_all_names_and_both_directions(of: list[int]) -> None:
    assert int(kernels.canonical(word(of))) == smallest_word(of)


@given(images)
def test_names_are_in_the_order_that_is_told(of: list[int]) -> None:
    out = np.empty(24, dtype=np.uint64)
    kernels.namings(word(of), out)
    namings = packed.namings()
    assert sorted(namings) == sorted(permutations(range(4)))
    assert out.tolist() == [packed.pack(renamed(of, naming)) for naming in namings]


@given(images, images)
def test_composition_and_inverse(one: list[int], other: list[int]) -> None:
    assert packed.unpack(int(kernels.composed(word(one), word(other)))) == [one[y] for y in other]
    assert packed.unpack(int(kernels.inverted(word(one)))) == inverse(one)


@given(images, st.sampled_from(range(32)))
def test_a_gate_behind_and_before(of: list[int], index: int) -> None:
    target, controls = int(packed.TARGETS[index]), int(packed.CONTROLS[index])
    acts = [x ^ (1 << target) if x & controls == controls else x for x in range(16)]
    args = packed.TARGETS[index], packed.CONTROLS[index]
    assert packed.unpack(int(kernels.after_gate(word(of), *args))) == [acts[y] for y in of]
    assert packed.unpack(int(kernels.before_gate(word(of), *args))) == [of[y] for y in acts]


@given(images)
def test_a_class_has_one_pair_of_signatures(of: list[int]) -> None:
    points = packed.points()
    found = {
        tuple(int(s) for s in kernels.signatures(word(renamed(way, naming)), points))
        for way in (of, inverse(of))
        for naming in permutations(range(4))
    }
    assert len(found) == 1


@given(images)
def test_classes_are_counted_by_their_different_words(of: list[int]) -> None:
    words = {packed.pack(renamed(way, n)) for way in (of, inverse(of)) for n in permutations(range(4))}
    assert kernels.words_of_classes(np.array([word(of)])).tolist() == [len(words)]


@given(st.lists(st.integers(0, (1 << 64) - 1), min_size=1, max_size=20, unique=True).map(sorted))
def test_differences_are_coded_and_read_back(words: list[int]) -> None:
    level = np.array(words, dtype=np.uint64)
    out = np.empty(10 * len(words), dtype=np.uint8)
    differences = np.diff(level, prepend=np.uint64(0))
    used = int(kernels.varint_encoded(differences, out))
    again = np.empty(len(words), dtype=np.uint64)
    assert kernels.varint_decoded(out[:used], again)
    assert again.tolist() == words
    assert not kernels.varint_decoded(out[: used - 1], again)
    assert not kernels.varint_decoded(np.append(out[:used], np.uint8(0)), again)


@contextmanager
def plain_python() -> Iterator[None]:
    """Every kernel is its `.py_func`, also where one calls another; numpy's wrap-around is meant."""
    with pytest.MonkeyPatch.context() as patch, np.errstate(over="ignore"):
        for name, kernel in list(vars(kernels).items()):
            if hasattr(kernel, "py_func"):
                patch.setattr(kernels, name, kernel.py_func)
        yield


def words_of(of: list[int]) -> list[int]:
    """What the kernels make of one word."""
    one, other = word(of), word([15, *range(15)])
    gate = packed.TARGETS[7], packed.CONTROLS[7]
    found = [
        kernels.swapped01(one), kernels.swapped12(one), kernels.swapped23(one), kernels.canonical(one),
        kernels.composed(one, other), kernels.inverted(one), kernels.after_gate(one, *gate),
        kernels.before_gate(one, *gate), *kernels.signatures(one, packed.points()),
    ]  # fmt: skip
    return [int(number) for number in found]


def a_small_table() -> list[object]:
    """Building, looking up, meeting and peeling over the classes of up to two gates."""
    points = packed.points()
    table = np.zeros(64, dtype=np.uint64)
    levels = [np.array([packed.IDENTITY], dtype=np.uint64)]
    assert kernels.add_level(levels[0], 0, table) == 1
    for size, count in ((1, 4), (2, 33)):
        found = np.empty(count, dtype=np.uint64)
        assert kernels.next_level(levels[-1], packed.TARGETS, packed.CONTROLS, size, table, found) == count
        levels.append(np.sort(found))
    first, second = np.zeros(16, dtype=np.uint64), np.zeros(16, dtype=np.uint64)
    kernels.enter_signatures(levels[2], points, first, second)
    sizes = [int(kernels.size_of_class(w, table)) for w in (*levels[2], np.uint64(1))]
    assert sizes == [2] * 33 + [-1]
    out = np.empty(24, dtype=np.uint64)
    kernels.namings(np.uint64(kernels.composed(levels[2][-1], levels[1][-1])), out)
    named = np.array([packed.unpack(int(w)) for w in out], dtype=np.uint8)
    met = int(kernels.meet(named, levels[1], 2, table, points, first, second))
    assert met >= 0
    gates = np.zeros(2, dtype=np.int64)
    count = int(kernels.peeled(levels[2][5], packed.TARGETS, packed.CONTROLS, table, gates))
    coded = np.empty(10 * 33, dtype=np.uint8)
    used = int(kernels.varint_encoded(np.diff(levels[2], prepend=np.uint64(0)), coded))
    again = np.empty(33, dtype=np.uint64)
    assert kernels.varint_decoded(coded[:used], again)
    counts = kernels.words_of_classes(levels[2]).tolist()
    arrays = [part.tolist() for part in (*levels, table, first, second, again, coded[:used], gates)]
    return [*arrays, out.tolist(), met, count, counts]


@pytest.mark.parametrize("of", EDGES)
def test_each_kernel_is_its_own_python(of: list[int]) -> None:
    compiled = words_of(of)
    with plain_python():
        assert words_of(of) == compiled


def test_the_kernels_of_tables_are_their_own_python() -> None:
    compiled = a_small_table()
    with plain_python():
        assert a_small_table() == compiled


def test_a_level_that_does_not_fit_is_told() -> None:
    table = np.zeros(64, dtype=np.uint64)
    identity = np.array([packed.IDENTITY], dtype=np.uint64)
    kernels.add_level(identity, 0, table)
    found = np.empty(3, dtype=np.uint64)
    assert kernels.next_level(identity, packed.TARGETS, packed.CONTROLS, 1, table, found) == 4


def test_only_permutations_are_packed() -> None:
    with pytest.raises(ValueError, match="16 images, each of 0"):
        packed.pack([0] * 16)
