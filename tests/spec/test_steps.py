"""Steps: what they mean, against plain Python, and every refusal."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given

import revsynth
from revsynth.errors import SpecError
from revsynth.logic.truth_table import unpack_values
from revsynth.spec.expectation import Expectation
from revsynth.spec.layout import decode, encode
from revsynth.spec.model import Permutation, Spec, Word
from revsynth.spec.sampled import SampledSpec
from revsynth.spec.understand import understand
from tests.spec.test_sampled import check as check_sampled
from tests.step_programs import WORDS, step_specs

INPUTS = {"x": 4, "y": 3, "s": {"bits": 4, "signed": True}, "cell": {"bits": 2, "count": 2}}


def image(steps: list[str], inputs: dict[str, object], **values: object) -> dict[str, object]:
    spec = revsynth.permutation(steps=steps, inputs=inputs)  # type: ignore[arg-type]
    index = encode(spec.inputs, values)  # type: ignore[arg-type]
    bits = Expectation(understand(spec))(index)
    return dict(decode(spec.inputs, sum(bit << i for i, bit in enumerate(bits) if bit)))


@pytest.mark.parametrize(
    ("step", "after"),
    [
        ("x += 3 * y", (13 + 3 * 5) % 16),
        ("x -= y", 8),
        ("x ^= y << 1", 13 ^ 10),
        ("x ^= x >> 1", 13 ^ 6),
        ("x ^= x << 3", (13 ^ 104) % 16),
        ("x ^= x >> 9", 13),
        ("x = -x", 3),
        ("x = ~x", 2),
        ("x *= 5", 65 % 16),
        ("x *= -1", 3),
        ("x = rotate(x, 1)", 0b1011),
        ("x = rotate(x, -1)", 0b1110),
        ("x = rotate(x, y)", 0b1011),
        ("if y > 4: x += 1", 14),
        ("if y > 5: x += 1", 13),
        ("if y: x[0] ^= 1", 12),
        ("x[1:4] += y", 1 | ((6 + 5) % 8) << 1),
        ("x[2] ^= x[1] | x[0]", 9),
        ("x, s = s, x", 14),
        ("x[0:3], y = y, x[0:3]", 13),
        ("x[0], x[1] = x[1], x[0]", 14),
        ("x += s", 11),
        ("x += cell[1] + len(cell)", 13 + 2 + 2 - 16),
        ("x ^= sum(cell[i] for i in range(2))", 13 ^ 3),
    ],
)
def test_a_step_does_what_python_does(step: str, after: int) -> None:
    assert image([step], INPUTS, x=13, y=5, s=-2, cell=[1, 2])["x"] == after


def test_signed_words_go_by_their_pattern_and_wrap_around() -> None:
    assert image(["s -= 3"], INPUTS, x=0, y=0, s=-7, cell=[0, 0])["s"] == 6
    assert image(["s = -s"], INPUTS, x=0, y=0, s=-8, cell=[0, 0])["s"] == -8
    assert image(["s[0:4] ^= s[0:4] >> 1"], INPUTS, x=0, y=0, s=-8, cell=[0, 0])["s"] == -4
    assert image(["x += s >> 1"], INPUTS, x=9, y=0, s=-3, cell=[0, 0])["x"] == 7


def test_a_slice_of_a_signed_word_is_shifted_without_its_sign() -> None:
    for step in ("s[0:4] ^= s[0:4] >> 1", "s ^= s[0:4] >> 1"):
        assert image([step], INPUTS, x=0, y=0, s=-8, cell=[0, 0])["s"] == -4


def test_steps_follow_one_another_as_in_python() -> None:
    """The example of a spec file: the same lines run as Python, for all inputs."""
    spec = revsynth.permutation(
        steps=["x += 3 * y", "y ^= x >> 1", "x, y = y, x", "if y > 2: x -= 1"], inputs={"x": 4, "y": 4}
    )
    function = understand(spec).function
    images = unpack_values(function.values, 8)
    for index in range(256):
        x, y = index & 15, index >> 4
        x = (x + 3 * y) % 16
        y ^= x >> 1
        x, y = y, x
        if y > 2:
            x = (x - 1) % 16
        assert images[index] == x | y << 4


@given(step_specs(WORDS, 4))
def test_all_inputs_at_once_agree_with_one_by_one_and_none_is_lost(spec: Spec) -> None:
    understanding = understand(spec)
    function, expectation = understanding.function, Expectation(understanding)
    images = unpack_values(function.values, function.inputs)
    fixed = unpack_values(function.care, function.inputs) != 0
    assert len(np.unique(images[fixed])) == np.count_nonzero(fixed)
    for index in range(0, 1 << function.inputs, 401):
        bits = expectation(index)
        if bits[0] is None:
            assert not fixed[index]
        else:
            assert sum(bit << i for i, bit in enumerate(bits) if bit) == images[index]


@given(step_specs(WORDS, 4))
def test_many_chosen_inputs_at_once_agree_too(spec: Spec) -> None:
    check_sampled(understand(spec))


WIDE_STEPS = [
    "x += y",
    "x -= k * y",
    "x ^= y >> 3",
    "x ^= x << 13",
    "x ^= x >> 7",
    "x *= 6364136223846793005",
    "x = -x",
    "x = ~x",
    "x = rotate(x, k)",
    "x = rotate(x, 11)",
    "x, y = y, x",
    "if k < 0: x, y = y, x",
    "if y > 2**63: x += y * y >> 64",
    "x[3:70] -= y",
    "k[0] ^= x[69] & y[1]",
    "if x[0]: k = rotate(k, y)",
    "y *= 3",
    "z = rotate(z, y)",
    "z ^= parity(x)",
]


@pytest.mark.parametrize("domain", [None, "y != 0 and k > -9"])
def test_many_chosen_inputs_of_wide_words_at_once(domain: str | None) -> None:
    wide = (Word("x", 70), Word("y", 70), Word("k", 5, signed=True), Word("z", 1))
    for step in WIDE_STEPS:
        check_sampled(understand(Spec(wide, Permutation(steps=(step,)), domain=domain)))
    check_sampled(understand(Spec(wide, Permutation(steps=tuple(WIDE_STEPS)), domain=domain)))


def test_an_undefined_operation_at_a_chosen_input_names_the_input_from_the_start() -> None:
    wide = (Word("x", 30), Word("y", 1))
    spec = Spec(wide, Permutation(steps=("y ^= 1", "x ^= 1 // y")))
    inputs = np.zeros((31, 1), dtype=np.uint64)
    inputs[30] = 4
    wanted = r"steps 2: .*at x = 0, y = 0.*; the steps before make this of x = 0, y = 1"
    with pytest.raises(SpecError, match=wanted):
        SampledSpec(understand(spec)).wanted(inputs)


REFUSED = [
    ("what is added reads x, which the step changes: x *= k does so for odd constants k", "x += x"),
    ("what is added reads x[1:4], which the step changes", "x[1:4] += x[3]"),
    ("what stands on the right reads x, which the step changes: keep what is needed in another word first",
     "if y: x -= x[0]"),
    ("what stands on the right reads x, which the step changes: only x ^= x << k (or >> k) may",
     "x ^= (x >> 1) ^ (x >> 2)"),
    ("what is added reads cell[0], which the step changes", "cell[0] += sum(cell[i] for i in range(2))"),
    ("what is added reads cell[1], which the step changes", "cell[1] += cell[y & 1]"),
    ("what is added reads cell[1], which the step changes", "cell[1] += len([1 for c in cell if c])"),
    ("the condition reads x, which the step changes: keep what is needed in another word first",
     "if x > 2: x += 1"),
    ("the condition reads y, which the step changes", "if y: x[0:3], y = y, x[0:3]"),
    ("the rotation reads x, which the step changes", "x = rotate(x, x)"),
    ("a shift by 0 is not one-to-one here: 1 or more is wanted", "x ^= x >> 0"),
    ("a shift by -1 is not one-to-one here: 1 or more is wanted", "x ^= x << -1"),
    ("s is signed, so s >> 1 repeats its sign and the step is not one-to-one: write s[0:4] ^= s[0:4] >> 1",
     "s ^= s >> 1"),
    ("s is signed, so s >> 1 repeats its sign and the step is not one-to-one", "s[0:4] ^= s >> 1"),
    ("x[2:2] holds no bits", "x[2:2] += 1"),
    ("an even factor is not one-to-one modulo 2**bits: an odd one is wanted", "x *= 6"),
    ("the factor of *= is an odd constant, not something that depends on the input", "x *= y"),
    ("it cannot be undone: +=, -=, ^= and *= by an odd constant are steps, and x = rotate(x, k)", "x |= y"),
    ("it cannot be undone: +=, -=, ^= and *= by an odd constant are steps, and x = rotate(x, k)", "x <<= 1"),
    ("it cannot be undone: x = -x, x = ~x, x = rotate(x, k) and swaps such as x, y = y, x are steps",
     "x = y"),
    ("write x += 1", "x = x + 1"),
    ("write x ^= y & 3", "x = x ^ (y & 3)"),
    ("write x = rotate(x, k)", "x = rotate(y, 1)"),
    ("write x = rotate(x, k)", "x = rotate(x)"),
    ("write x, s = s, x", "x, s = x, s"),
    ("two words change places in one step: x, y = y, x", "x, y, s = s, y, x"),
    ("x has 4 bits and y has 3: a swap takes two of one width", "x, y = y, x"),
    ("x[0:2] and x[1:3] share bits: a swap takes two that do not", "x[0:2], x[1:3] = x[1:3], x[0:2]"),
    ("this is no step: x += ..., x -= ..., x ^= ..., x *= 3, x = -x, x = ~x, x = rotate(x, k) and "
     "x, y = y, x are, with `if CONDITION:` before any of them", "x + 1"),
    ("this is no step: x += ...", "x = s = 1"),
    ("this is no step: x += ...", "del x"),
    ("this is no step: x += ...", "[x] = [y]"),
    ("one step an entry: give each a text of its own", "x += 1; y += 1"),
    ("one step an entry: give each a text and a condition of its own", "if y: x += 1; s += 1"),
    ("a step has no else: give the other case a step with the opposite condition",
     "if y: x += 1\nelse: x += 2"),
    ("a step has no else", "if y:\n  x += 1\nelif s:\n  x += 2"),
    ("it is empty: a step such as x += 1 is wanted", "  # nothing\n"),
    ("column 5: this is no step (invalid syntax)", "x +="),
    ("column 6: this is no step", "if y x += 1"),
    ("the character '\\xd7' is not allowed: names and operators are ASCII", "x \xd7= 3"),
    ("column 1: there is no name 'q'; the names here are x, y, s, cell", "q += 1"),
    ("column 6: there is no name 'z'", "x += z"),
    ("column 1: bit 4 of x does not exist; it has bits 0 to 3", "x[4] ^= 1"),
    ("an index on the left is a constant: which bits a step changes may not depend on the input",
     "x[y] ^= 1"),
    ("cell is an array: change its words one by one, such as cell[0]", "cell += 1"),
    ("three is not a word, nor bits of one: a step changes words, such as x", "three += 1"),
    ("column 6: division by zero at x = 0, y = 0, s = 0, cell = [0, 0]", "y += 4 // x"),
    ("column 16: negative shift count -8 at x = 0, y = 0, s = -8, cell = [0, 0]", "if s < 0: x += 1 << s"),
]  # fmt: skip


@pytest.mark.parametrize(("message", "step"), REFUSED, ids=range(len(REFUSED)))
def test_refusals_say_where_and_what_would_be_right(message: str, step: str) -> None:
    at_an_input = " at x = 0" in message
    for extra, before in (({}, []), ({"wide": 40}, ["y ^= 1"])):
        if extra and at_an_input:
            continue
        with pytest.raises(SpecError) as caught:
            understand(
                revsynth.permutation(
                    steps=[*before, step],
                    inputs={**INPUTS, **extra},  # type: ignore[dict-item]
                    constants={"three": 3},
                )
            )
        text = str(caught.value)
        assert text.startswith(f"spec: [permutation] steps {len(before) + 1}: ")
        assert message in text
        assert "\n" not in text


def test_an_undefined_operation_names_the_input_from_the_start() -> None:
    spec = revsynth.permutation(steps=["y += 1", "if x > 0: y ^= 8 // (x - 1)"], inputs={"x": 2, "y": 3})
    with pytest.raises(SpecError, match=r"at x = 1, y = 0.*; the steps before make this of x = 1, y = 7$"):
        understand(spec)


def test_an_undefined_operation_outside_the_domain_or_the_condition_is_none() -> None:
    understand(revsynth.permutation(steps=["y += 8 // x"], inputs={"x": 2, "y": 3}, domain="x != 0"))
    understand(revsynth.permutation(steps=["if x: y += 8 // x"], inputs={"x": 2, "y": 3}))


def test_a_step_may_be_written_over_several_lines_with_comments() -> None:
    assert image(["if y > 4:  # high water\n  x += (\n y + 1)\n"], {"x": 4, "y": 3}, x=1, y=5)["x"] == 7


def test_too_many_steps_and_too_wide_factors_are_refused() -> None:
    with pytest.raises(SpecError, match=r"\[permutation\] steps: 10001 steps: up to 10000 are allowed"):
        understand(revsynth.permutation(steps=["x += 1"] * 10_001, inputs={"x": 30}))
    with pytest.raises(SpecError, match=r"steps 1: x has 4097 bits: \*= takes up to 4096"):
        understand(revsynth.permutation(steps=["x *= 3"], inputs={"x": 4097}))
    with pytest.raises(SpecError, match=r"steps 1: 100003 characters: up to 100000 are allowed"):
        understand(revsynth.permutation(steps=["x +=" + " " * 99_998 + "1"], inputs={"x": 4}))
    for operand in ("-" * 150 + "1", "(" * 300 + "1" + ")" * 300, "~" * 90_000 + "1"):
        with pytest.raises(SpecError, match=r"steps 1: .*nested") as caught:
            understand(revsynth.permutation(steps=["x += " + operand], inputs={"x": 4}))
        assert "\n" not in str(caught.value)


def test_wide_steps_are_checked_without_a_table() -> None:
    spec = Spec((Word("x", 64), Word("y", 64)), Permutation(steps=("x += y", "y *= 5")))
    understanding = understand(spec)
    assert understanding.tabulated is None
    assert understanding.outputs == spec.inputs
    x, y = 2**64 - 3, 2**63 + 9
    bits = Expectation(understanding)(x | y << 64)
    wanted = (x + y) % 2**64 | (y * 5 % 2**64) << 64
    assert sum(bit << i for i, bit in enumerate(bits) if bit) == wanted
