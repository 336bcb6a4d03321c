"""Blocks built in place by steps, against the plain evaluation of the spec, exhaustively."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

import revsynth
from revsynth.cascade.simulate import run
from revsynth.choice import and_count
from revsynth.elaborate import elaborate
from revsynth.errors import BudgetError
from revsynth.logic.in_place_program import odd_factors
from revsynth.logic.network_simulation import tabulate
from revsynth.logic.truth_table import unpack_values, variable, words_for
from revsynth.options import Controls
from revsynth.spec.model import Permutation, Spec, Word
from revsynth.spec.understand import understand
from revsynth.synthesis.in_place import in_place_blocks, sheet
from revsynth.synthesis.interface import Block, Task
from tests.step_programs import step_specs


def blocks_of(spec: Spec, controls: Controls = "mixed") -> list[Block]:
    program = elaborate(spec).program
    assert program is not None
    return in_place_blocks(Task(None, "inplace", program=program, effort="low", controls=controls))


def check(spec: Spec, controls: Controls = "mixed", dirty_outside: bool = False) -> list[Block]:
    """Every block does what the spec says, scratch clean; outside the domain too unless `dirty_outside`."""
    function = understand(spec).function
    inputs = function.inputs
    images = unpack_values(function.values, inputs)
    fixed = unpack_values(function.care, inputs) != 0
    blocks = blocks_of(spec, controls)
    for block in blocks:
        columns = np.zeros((block.cascade.lines, words_for(inputs)), dtype=np.uint64)
        for bit in range(inputs):
            columns[bit] = variable(inputs, bit)
        after, signs = run(block.cascade, columns)
        assert np.array_equal(unpack_values(after[:inputs], inputs)[fixed], images[fixed]), block.method
        assert not signs.any()
        where = fixed if dirty_outside else np.ones_like(fixed)
        for line in after[inputs:]:
            assert not unpack_values(line[np.newaxis], inputs)[where].any(), block.method
    return blocks


@given(step_specs(), st.sampled_from(["mixed", "positive"]))
def test_random_steps_in_place_do_what_they_say(spec: Spec, controls: Controls) -> None:
    for block in check(spec, controls):
        assert controls == "mixed" or not (block.cascade.control & 1).any()


@given(step_specs(most=4))
def test_the_composed_network_agrees_with_the_plain_evaluation(spec: Spec) -> None:
    elaboration, function = elaborate(spec), understand(spec).function
    found = tabulate(elaboration.function.values)
    assert np.array_equal(found & function.care, function.values & function.care)
    assert elaboration.checks == ()


SINGLE = [
    "x += y",
    "x -= y",
    "x += 5",
    "x -= 1",
    "x += 16",
    "x += -1",
    "if y > 2: x -= 1",
    "if y[0]: x += y[1:4]",
    "x *= 5",
    "x *= 7",
    "x *= 11",
    "x *= 27",
    "if y[0]: x *= 11",
    "if y > 3: x *= 5",
    "x = -x",
    "if y[3]: x = -x",
    "x = rotate(x, y)",
    "x = rotate(x, 3)",
    "x = rotate(x, z)",
    "if z: x = rotate(x, y[0:2])",
    "x ^= x >> 2",
    "if y[1]: x ^= x << 1",
    "x ^= y * y",
    "if y > 3: x ^= y * y",
    "x += y * y >> 1",
    "x, y = y, x",
    "if z: x, y = y, x",
    "x[1:3] -= y[0:2]",
    "x[4], y[0] = y[0], x[4]",
    "x += z",
    "x -= z * y",
    "x = ~x",
    "if y == 3: x[1:4] = ~x[1:4]",
    "x += 3 * y - 2 * z + 1",
    "y -= x - 7",
    "x += y if z > 0 else z",
]


@pytest.mark.parametrize("step", SINGLE)
def test_each_kind_of_step(step: str) -> None:
    words = (Word("x", 5), Word("y", 5), Word("z", 2, signed=True))
    check(Spec(words, Permutation(steps=(step,))))


@pytest.mark.parametrize("bits", range(1, 7))
def test_every_odd_factor(bits: int) -> None:
    for factor in range(1, 1 << bits, 2):
        negate, subtract, shifts = odd_factors(factor, bits)
        product = -1 if negate else 1
        for shift in shifts:
            product *= 1 - (1 << shift) if subtract else 1 + (1 << shift)
        assert (product - factor) % (1 << bits) == 0
    if bits > 3:
        check(Spec((Word("x", bits),), Permutation(steps=(f"x *= {(1 << bits) - 3}",))))
    with pytest.raises(ValueError, match="6 is even"):
        odd_factors(6, 4)


@pytest.mark.parametrize(
    ("text", "modulus"),
    [
        ("(a + 3) % 11", 11),
        ("(a - 1) % 10", 10),
        ("(a * 5) % 11", 11),
        ("(3 * a + 7) % 13", 13),
        ("(-a) % 9", 9),
        ("(2 * (a + 1) - 7 * a) % 16", 16),
        ("(a + 5) % 8", 8),
        ("(5 * a + 2) % 8", 8),
        ("(a * 14 + 14) % 15", 15),
    ],
)
def test_modular_maps(text: str, modulus: int) -> None:
    domain = None if modulus == 16 else f"a < {modulus}"
    check(Spec((Word("b", 1), Word("a", 4)), Permutation(map={"a": text}), domain=domain), dirty_outside=True)


def test_two_words_of_a_map_at_once_and_a_constant_by_name() -> None:
    spec = revsynth.permutation(
        map={"a": "(a * 2) % n", "c[1]": "(c[1] + 3) % 4"},
        inputs={"a": 3, "c": {"bits": 2, "count": 2}},
        constants={"n": 7},
        domain="c[0] != 2 and a <= 6",
    )
    check(spec, dirty_outside=True)


@pytest.mark.parametrize("text", ["(a + b) % 11", "a | 1", "(a + 3) % 17", "(a * a) % 11", "(0 * a) % 11"])
def test_other_maps_have_no_program(text: str) -> None:
    spec = revsynth.permutation(map={"a": text}, inputs={"a": 4, "b": 30}, domain="a < 11")
    assert elaborate(spec).program is None


@pytest.mark.parametrize(
    "new_values",
    [
        {"a": "(a + b) % 16", "b": "b ^ c[0]", "c[0]": "c[0]"},
        {"b": "c[0] ^ b", "a": "(b * 3 + a) % 16"},
        {"a": "b", "b": "a", "c[0]": "(c[0] - a * b) % 4"},
        {"c[1]": "(c[1] + c[0]) % 4", "c[0]": "c[0] ^ (a & 3)"},
    ],
)
def test_maps_that_are_steps_in_other_words(new_values: dict[str, str]) -> None:
    inputs: dict[str, Any] = {"a": 4, "b": 4, "c": {"bits": 2, "count": 2}}
    check(revsynth.permutation(map=new_values, inputs=inputs))


@pytest.mark.parametrize(
    "new_values",
    [
        {"a": "(a + b) % 16", "b": "(b + a) % 16"},
        {"a": "b", "b": "(a + 1) % 16"},
        {"s": "s ^ 1", "a": "(a + s) % 8"},
        {"s": "s", "a": "15 - a"},
    ],
)
def test_maps_that_go_around_in_a_circle_or_are_of_another_form_have_no_program(
    new_values: dict[str, str],
) -> None:
    inputs: dict[str, Any] = {"a": 4, "b": 4, "s": {"bits": 3, "signed": True}}
    assert elaborate(revsynth.permutation(map=new_values, inputs=inputs)).program is None


def test_a_wide_map_of_another_form_is_refused_with_what_is_possible() -> None:
    spec = revsynth.permutation(map={"a": "(a * a) % 16"}, inputs={"a": 4, "b": 34})
    with pytest.raises(
        revsynth.RevsynthError,
        match=r"oracle 'inplace': network: too wide for a table, a block in place is built from steps, or "
        r"from a map whose new values are \(a \* c \+ d\) % N with a < N all over the domain",
    ):
        revsynth.build(spec)


def test_a_modular_map_that_its_domain_does_not_bound_has_no_program() -> None:
    spec = revsynth.permutation(map={"a": "(a + 3) % 11"}, inputs={"a": 4, "b": 30}, domain="a < 12")
    assert elaborate(spec).program is None


def test_a_factor_that_is_not_coprime_is_refused_with_two_inputs() -> None:
    spec = revsynth.permutation(map={"a": "(a * 6 + 1) % 100"}, inputs={"a": 32}, domain="a < 100")
    with pytest.raises(
        revsynth.RevsynthError,
        match=r"spec: \[permutation\] map a: not one-to-one: the factor 6 and the modulus 100 are both "
        r"multiples of 2, so a = 0 and a = 50 both become 1$",
    ):
        elaborate(spec)


def figures(step: str, bits: int) -> list[tuple[int, int]]:
    """(ANDs, lines) of each block; what is erased again is not counted twice."""
    blocks = blocks_of(Spec((Word("x", bits), Word("y", bits)), Permutation(steps=(step,))))
    return [(and_count(block, "inplace"), block.cascade.lines) for block in blocks]


@pytest.mark.quality
@pytest.mark.parametrize(
    ("step", "bits", "ands", "lines"),
    [
        # n - 1 carries for a sum of n bits: Gidney, Quantum 2, 2018 (4 T each with measured erasure).
        ("x += y", 32, 31, 95),
        ("x -= y", 64, 63, 191),
        # The carry into bit 1 of x + 1 is bit 0 itself; trailing zeros of a constant need no carry.
        ("x += 1", 32, 30, 94),
        ("x += 8", 32, 27, 91),
        ("x = -x", 32, 30, 94),
        # x += x << 2 carries through 29 places: n - 1 - shift of them.
        ("x *= 5", 32, 29, 93),
        ("x ^= x >> 7", 64, 0, 128),
        ("x = rotate(x, 5)", 64, 0, 128),
        ("x, y = y, x", 64, 0, 128),
    ],
)
def test_recorded_figures(step: str, bits: int, ands: int, lines: int) -> None:
    assert figures(step, bits)[0] == (ands, lines)


@pytest.mark.quality
def test_few_lines_take_one_scratch_line_for_a_sum() -> None:
    """Two Toffolis a bit and one line: Cuccaro, Draper, Kutin and Moulton 2004."""
    found = figures("x += y", 32)
    assert found[1] == (62, 65)


def test_a_rotation_by_a_word_takes_what_the_recorded_rotator_takes() -> None:
    """16 bits by 4 bits: 49 controlled swaps, 16 - 2**j for each bit j (common practice)."""
    spec = Spec((Word("x", 16), Word("k", 4)), Permutation(steps=("x = rotate(x, k)",)))
    assert and_count(blocks_of(spec)[0], "inplace") == 49


def test_a_budget_of_lines_is_kept_or_refused_with_what_is_needed() -> None:
    spec = Spec((Word("x", 8), Word("y", 8)), Permutation(steps=("x += y",)))
    program = elaborate(spec).program
    assert [b.cascade.lines for b in in_place_blocks(Task(None, "inplace", program=program, lines=20))] == [
        17
    ]
    with pytest.raises(
        BudgetError, match="the steps need 17 lines with the plans that were tried, 16 allowed"
    ):
        in_place_blocks(Task(None, "inplace", program=program, lines=16))
    narrow = in_place_blocks(Task(None, "inplace", program=program, aim="qubits"))
    assert [block.cascade.lines for block in narrow] == [17, 23]


def test_blocks_that_would_become_too_large_are_refused(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(sheet, "MOST_GATES", 200)
    with pytest.raises(BudgetError, match="the steps need more than 200 gates; narrower words need fewer"):
        blocks_of(Spec((Word("x", 40), Word("y", 40)), Permutation(steps=("x += y",))))
    with pytest.raises(BudgetError, match="more than 200 gates"):
        blocks_of(Spec((Word("a", 20),), Permutation(map={"a": "a * 3 % 1000003"}), domain="a < 1000003"))


def test_a_task_without_a_program_is_a_mistake() -> None:
    with pytest.raises(ValueError, match="no program"):
        in_place_blocks(Task(None, "inplace"))
