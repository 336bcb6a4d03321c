"""The Young-subgroup decomposition: its splits, and the cascades it gives."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from revsynth.cascade.price import cascade_t
from revsynth.cascade.simulate import permutation
from revsynth.embed.in_place import fewest_lines
from revsynth.synthesis.decompose import DECOMPOSE
from revsynth.synthesis.interface import Task
from revsynth.synthesis.young.colouring import colouring, split
from tests.strategies import permutations
from tests.synthesis.checks import check_block, from_table


@st.composite
def partial_permutations(draw: st.DrawFn, max_lines: int = 5) -> np.ndarray:
    images = np.array(draw(permutations(max_lines=max_lines)), dtype=np.int64)
    free = draw(st.lists(st.integers(0, len(images) - 1), max_size=len(images)))
    images[free] = -1
    return images


@given(partial_permutations(), st.data())
def test_every_colouring_gives_each_pair_both_colours(images: np.ndarray, data: st.DataObject) -> None:
    lines = len(images).bit_length() - 1
    line = data.draw(st.integers(0, lines - 1))
    found = colouring(images, line)
    rows = np.flatnonzero(images >= 0)
    assert set(found.part[rows].tolist()) == set(range(found.parts))
    assert np.all(found.part[images < 0] == -1)
    flips = np.array(data.draw(st.lists(st.booleans(), min_size=found.parts, max_size=found.parts)), bool)
    colour = found.colour.copy()
    colour[rows] ^= flips[found.part[rows]]
    for one in rows.tolist():
        for other in rows.tolist():
            if other == one ^ (1 << line) or images[other] == images[one] ^ (1 << line):
                assert colour[one] != colour[other]
                assert found.part[one] == found.part[other]
    for part in range(found.parts):
        least = int(np.flatnonzero(found.part == part)[0])
        assert found.colour[least] == (least >> line) & 1


@given(partial_permutations(), st.data())
def test_parts_are_as_small_as_can_be(images: np.ndarray, data: st.DataObject) -> None:
    """Two states are in one part only where a chain of pairs links them."""
    lines = len(images).bit_length() - 1
    bit = 1 << data.draw(st.integers(0, lines - 1))
    found = colouring(images, bit.bit_length() - 1)
    rows = [int(row) for row in np.flatnonzero(images >= 0)]
    group = {row: row for row in rows}
    for _ in rows:
        for one in rows:
            for other in rows:
                if other == one ^ bit or images[other] == images[one] ^ bit:
                    group[one] = group[other] = min(group[one], group[other])
    assert found.parts == len(set(group.values()))


@given(partial_permutations(), st.data())
def test_a_split_leaves_a_permutation_that_keeps_the_line(images: np.ndarray, data: st.DataObject) -> None:
    lines = len(images).bit_length() - 1
    line = data.draw(st.integers(0, lines - 1))
    found = colouring(images, line)
    between, before, behind = split(images, line, found.colour)
    there = np.flatnonzero(between >= 0)
    assert np.all(((between[there] ^ there) >> line) & 1 == 0)
    assert len(set(between[there].tolist())) == len(there) == np.count_nonzero(images >= 0)
    for x in np.flatnonzero(images >= 0).tolist():
        middle = int(between[x ^ (int(before[x]) << line)])
        assert middle ^ (int(behind[middle]) << line) == images[x]
    for turned in (before, behind):
        assert np.array_equal(turned, turned[np.arange(len(images)) ^ (1 << line)])


@given(
    partial_permutations(max_lines=4),
    st.sampled_from(("mixed", "positive")),
    st.sampled_from(("low", "normal")),
    st.sampled_from(("t", "gates")),
)
def test_permutations_with_free_images(images: np.ndarray, controls: str, effort: str, aim: str) -> None:
    lines = len(images).bit_length() - 1
    function = from_table(lines, lines, [None if y < 0 else int(y) for y in images])
    task = Task(function, "inplace", controls=controls, effort=effort, aim=aim)
    blocks = DECOMPOSE.synthesise(task)
    assert blocks
    for block in blocks:
        check_block(task, block)
        assert block.cascade.lines == lines


@given(st.integers(1, 3), st.integers(1, 3), st.data())
def test_embedded_blocks_have_the_fewest_lines(inputs: int, outputs: int, data: st.DataObject) -> None:
    full = (1 << outputs) - 1
    values = data.draw(st.lists(st.integers(0, full), min_size=1 << inputs, max_size=1 << inputs))
    task = Task(from_table(inputs, outputs, values), "embedded", effort="low")
    for block in DECOMPOSE.synthesise(task):
        check_block(task, block)
        assert block.cascade.lines == fewest_lines(task.function)


@pytest.mark.parametrize("lines", [6, 7, 8])
def test_larger_permutations(lines: int) -> None:
    table = np.random.default_rng(lines).permutation(1 << lines)
    images: list[int | None] = table.tolist()
    free = 1 << lines - 2
    for values in (images, [None] * free + images[free:]):
        task = Task(from_table(lines, lines, values), "inplace", effort="low")
        for block in DECOMPOSE.synthesise(task):
            after = permutation(block.cascade)
            assert all(y is None or after[x] == y for x, y in enumerate(values))


def test_free_images_save_gates() -> None:
    table: list[int | None] = np.random.default_rng(1).permutation(32).tolist()
    whole = DECOMPOSE.synthesise(Task(from_table(5, 5, table), "inplace"))[0]
    part = DECOMPOSE.synthesise(Task(from_table(5, 5, table[:16] + [None] * 16), "inplace"))[0]
    assert cascade_t(part.cascade, "unitary") < cascade_t(whole.cascade, "unitary")


def test_each_line_is_split_off_once() -> None:
    """Two gates a line, one for the last: 2n - 1 single-target gates (De Vos, Van Rentergem)."""
    table = np.random.default_rng(2).permutation(64)
    cascade = DECOMPOSE.synthesise(Task(from_table(6, 6, table), "inplace", effort="low"))[0].cascade
    targets = cascade.target.tolist()
    runs = [line for index, line in enumerate(targets) if not index or targets[index - 1] != line]
    assert len(runs) <= 11
    assert runs == runs[::-1]


def test_what_it_cannot_do_is_said() -> None:
    four = from_table(2, 2, [0, 1, 2, 3])
    assert "'phase'" in str(DECOMPOSE.unfit(Task(from_table(2, 1, [0, 1, 1, 0]), "phase")))
    assert "not reversible in place" in str(DECOMPOSE.unfit(Task(from_table(2, 1, [0, 1, 1, 0]), "inplace")))
    assert "same image" in str(DECOMPOSE.unfit(Task(from_table(2, 2, [0, 0, 1, 2]), "inplace")))
    assert "2 lines, 1 allowed" in str(DECOMPOSE.unfit(Task(four, "inplace", lines=1)))
    assert "at most 12" in str(DECOMPOSE.unfit(Task(from_table(13, 13, np.arange(1 << 13)), "inplace")))
    with pytest.raises(ValueError, match="same image"):
        DECOMPOSE.synthesise(Task(from_table(2, 2, [0, 0, 1, 2]), "inplace"))


def test_nothing_fixed_takes_no_gates() -> None:
    free: list[int | None] = [None] * 8
    (block, *_) = DECOMPOSE.synthesise(Task(from_table(3, 3, free), "inplace"))
    assert len(block.cascade) == 0
