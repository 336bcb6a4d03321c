"""Classes of four lines and meeting in the middle against the published counts and sizes.

Source of the counts: Golubitsky, Maslov, "A study of optimal 4-bit reversible Toffoli circuits and their
synthesis", IEEE Trans. Computers 61(9), 2012.
"""

from __future__ import annotations

import numpy as np
import pytest

from revsynth.cascade.simulate import permutation
from revsynth.optimal.classes import Classes, found_classes, functions_of
from revsynth.optimal.meeting import Answer, shortest
from revsynth.optimal.packed import GATES, pack
from tests.slow_simulator import run_cascade

FUNCTIONS = [1, 32, 784, 16_204, 294_507, 4_807_552, 70_763_560]
CLASSES = [1, 4, 33, 425, 6_538, 101_983, 1_482_686]

SIZES = [
    ([x + 1 & 15 for x in range(16)], 4),
    ([3 * x & 15 for x in range(16)], 6),
    ([5 * x & 15 for x in range(16)], 3),
    ([0, 7, 6, 9, 4, 11, 10, 13, 8, 15, 14, 1, 12, 3, 2, 5], 4),
    ([1, 2, 4, 8, 0, 3, 5, 6, 7, 9, 10, 11, 12, 13, 14, 15], 10),
]
"""Recomputed by exhaustive search over the published method; the fourth is a full adder block."""
LONG = [
    ([0, 2, 4, 12, 8, 5, 9, 11, 1, 6, 10, 13, 3, 14, 7, 15], 11),
    ([15, 1, 12, 3, 5, 6, 8, 7, 0, 10, 13, 9, 2, 4, 14, 11], 12),
    ([12, 5, 6, 11, 9, 0, 10, 13, 3, 14, 15, 8, 4, 7, 1, 2], 11),
]
"""The hidden weighted bit (rotation by the weight), a random one, the S-box of ISO/IEC 29192-2."""


def silent(_: str) -> None:
    """Says nothing."""


@pytest.fixture(scope="module")
def classes() -> Classes:
    return found_classes(5, silent)


def checked(images: list[int], classes: Classes) -> Answer:
    """The answer, its cascade run state by state."""
    answer = shortest([pack(images)], classes, silent)
    if answer.cascade is not None:
        assert [run_cascade(answer.cascade, x) for x in range(16)] == [(image, 1) for image in images]
        assert len(answer.cascade) == answer.at_least
        assert all(gate in GATES for gate in answer.cascade)
    return answer


def test_classes_and_functions_by_size(classes: Classes) -> None:
    assert [len(level) for level in classes.levels] == CLASSES[:6]
    assert functions_of(classes.levels) == FUNCTIONS[:6]


@pytest.mark.slow
def test_the_table_of_size_six() -> None:
    """Classes, functions, and the longer of the published sizes."""
    classes = found_classes(6, silent)
    assert [len(level) for level in classes.levels] == CLASSES
    assert functions_of(classes.levels) == FUNCTIONS
    for images, size in SIZES + LONG:
        assert checked(images, classes).at_least == size


def test_published_sizes(classes: Classes) -> None:
    for images, size in SIZES:
        answer = checked(images, classes)
        assert answer.cascade is not None
        assert answer.at_least == size


def test_beyond_the_table_a_bound_is_proved(classes: Classes) -> None:
    """Of 11 gates, and the table of size 5 reaches 10."""
    assert checked(LONG[0][0], classes) == Answer(None, 11)


def test_smaller_tables_give_the_same_sizes(classes: Classes) -> None:
    """Random circuits of up to seven gates: size 3 and size 4 tables meet where size 5 just looks up."""
    small = [found_classes(size, silent) for size in (3, 4)]
    random = np.random.default_rng(4)
    seen = set()
    for _ in range(60):
        word = [int(x) for x in range(16)]
        for index in random.integers(0, 32, size=int(random.integers(1, 8))):
            gate = GATES[int(index)]
            mask = sum(1 << (c >> 1) for c in gate.controls)
            word = [x ^ 1 << gate.target if x & mask == mask else x for x in word]
        wanted = checked(word, classes).at_least
        seen.add(wanted)
        assert [checked(word, one).at_least for one in small] == [min(wanted, 7), wanted]
    assert {4, 5, 6} <= seen


def test_of_several_words_the_shortest_is_taken(classes: Classes) -> None:
    words = [pack(images) for images, _ in SIZES[:3]]
    answer = shortest(words, classes, silent)
    assert answer.cascade is not None
    assert permutation(answer.cascade).tolist() == SIZES[2][0]


def test_a_table_goes_on_from_a_smaller_one(classes: Classes) -> None:
    start = found_classes(2, silent)
    for one, other in zip(found_classes(4, silent, start).levels, classes.levels, strict=False):
        assert np.array_equal(one, other)


def test_what_is_not_counted_is_refused(classes: Classes) -> None:
    with pytest.raises(ValueError, match="up to size 7, not 8"):
        found_classes(8, silent)
    with pytest.raises(ValueError, match="needs more than 5 gates"):
        classes.gates(pack(LONG[0][0]))
