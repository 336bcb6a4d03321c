"""Blocks by steps and by modular maps: the translation, proofs of wide blocks, and faults in wide blocks."""

from __future__ import annotations

import random

import pytest
from hypothesis import given

import revsynth
from revsynth.circuit.model import Kind
from revsynth.qasm import Program
from revsynth.spec.expectation import Expectation
from revsynth.spec.layout import decode, encode
from revsynth.spec.model import Permutation, Spec, Word
from revsynth.spec.understand import understand
from revsynth.verification import verify_program
from revsynth.verification.translation import translate
from revsynth.verification.translation.steps import factor_chain
from tests.step_programs import step_specs
from tests.verification.mutants import mutants
from tests.verification.table_gates import TableGates


@given(step_specs(most=3))
def test_the_translation_means_what_the_steps_mean(spec: Spec) -> None:
    gates = TableGates(spec.input_bits)
    understanding = understand(spec)
    translation = translate(spec, understanding.outputs, gates, gates.inputs)
    tables = [gates.table(bit) for bit in translation.bits]
    inside = gates.table(translation.domain)
    for index, bits in enumerate(Expectation(understanding).at(range(1 << spec.input_bits))):
        if bits[0] is None:
            assert not inside >> index & 1
        else:
            assert inside >> index & 1
            assert bits == tuple(table >> index & 1 for table in tables)


@pytest.mark.parametrize("bits", range(1, 8))
def test_every_odd_factor_has_a_chain(bits: int) -> None:
    for factor in range(1, 1 << bits, 2):
        negative, sign, shifts = factor_chain(factor, bits)
        product = -1 if negative else 1
        for shift in shifts:
            product *= 1 + sign * (1 << shift)
        assert (product - factor) % (1 << bits) == 0
        assert shifts == sorted(set(shifts))


def words(**bits: int) -> tuple[Word, ...]:
    return tuple(Word(name, size) for name, size in bits.items())


def permutation(steps: list[str], **bits: int) -> Spec:
    return Spec(words(**bits), Permutation(steps=tuple(steps)))


WIDE = {
    "32-bit sum": permutation(["x += y"], x=32, y=32),
    "64-bit sum": permutation(["x += y"], x=64, y=64),
    "times 5": permutation(["x *= 5"], x=32),
    "step down": permutation(["if y > 2: x -= 1"], x=32, y=4),
    "xorshift": permutation(["x ^= x << 13", "x ^= x >> 7", "x ^= x << 17"], x=64),
    "mixed": permutation(
        ["x ^= x >> 16", "x *= 2654435769", "y -= x ^ 3", "x, y = y, x", "x = rotate(x, k)", "x = -x"],
        x=32,
        y=32,
        k=5,
    ),
    "in slices": permutation(["if y[0]: x[0:16] += y[1:17] & x[16:32]", "y[31] ^= y[0] & x[3]"], x=32, y=32),
    "modulo": Spec(words(a=32), Permutation(map={"a": "(a + 9) % 4294967291"}), domain="a < 4294967291"),
}


def build_and_verify(name: str) -> None:
    build = revsynth.build(WIDE[name], uncompute="measured")
    assert build.evidence.level == "proved"
    if name == "64-bit sum":
        assert build.cost["t"] == 4 * 63
    verdict = revsynth.verify(WIDE[name], text=build.text())
    assert verdict.holds
    assert verdict.evidence.level == "proved"


def test_a_wide_block_is_built_and_proved() -> None:
    build_and_verify("step down")


@pytest.mark.slow
@pytest.mark.parametrize("name", WIDE)
def test_wide_blocks_are_built_and_proved(name: str) -> None:
    build_and_verify(name)


def break_gates(name: str, count: int) -> None:
    """Some faults, every one found; an input that is shown is run through the steps in plain Python."""
    spec = WIDE[name]
    build = revsynth.build(spec, uncompute="measured", gates="toffoli")
    # A Z is the same whichever of its qubits is called the target.
    faults = [one for one in mutants(build.circuit) if one.op.kind != Kind.Z or "exchanged" not in one.fault]
    expectation = Expectation(understand(spec))
    for mutant in random.Random(7).sample(faults, count):
        verdict = verify_program(spec, Program(mutant.circuit, "3.0"), oracle="inplace")
        assert verdict.holds is False, mutant
        found = verdict.counterexample
        assert found is not None
        if found.kind == "output":
            assert isinstance(found.inputs, dict)
            bits = expectation(encode(spec.inputs, found.inputs))
            wanted = decode(spec.inputs, sum(bit << place for place, bit in enumerate(bits) if bit))
            assert {word: wanted[word] for word in found.expected} == found.expected
            assert found.got != found.expected


def test_faults_in_a_wide_block_are_found_and_shown() -> None:
    break_gates("step down", 3)


@pytest.mark.slow
@pytest.mark.parametrize("name", ["32-bit sum", "step down", "modulo"])
def test_faults_in_wide_blocks_are_found_and_shown(name: str) -> None:
    break_gates(name, 15)


def test_a_wide_block_for_other_steps_is_refused_with_an_input() -> None:
    text = revsynth.build(WIDE["step down"], gates="toffoli").text()
    verdict = revsynth.verify(permutation(["if y > 3: x -= 1"], x=32, y=4), text=text)
    assert verdict.holds is False
    assert verdict.counterexample is not None
    assert isinstance(verdict.counterexample.inputs, dict)
    assert verdict.counterexample.inputs["y"] == 3


def test_a_wide_step_that_is_undefined_somewhere_is_refused_with_such_an_input() -> None:
    spec = permutation(["y ^= 5", "x ^= 100 // (y - 77)"], x=20, y=20)
    with pytest.raises(
        revsynth.RevsynthError,
        match=r"\[permutation\] steps 2: .*division by zero at x = \d+, y = 77.*; "
        r"the steps before make this of x = \d+, y = 72$",
    ):
        revsynth.build(spec)


@pytest.mark.slow
def test_a_wide_product_modulo_a_number_is_sampled_and_said_not_to_be_proved() -> None:
    """Every one of a million inputs must be right; a wrong factor is found at once."""
    domain = "a < 1073741789"
    spec = Spec(words(a=30), Permutation(map={"a": "(a * 7 + 1) % 1073741789"}), domain=domain)
    with pytest.raises(revsynth.UndecidedError, match="the new value of a is a product modulo 1073741789"):
        revsynth.build(spec, uncompute="measured")
    build = revsynth.build(spec, uncompute="measured", unverified=True)
    assert build.evidence.level == "sampled"
    assert build.evidence.inputs_checked > 1_000_000
    other = Spec(words(a=30), Permutation(map={"a": "(a * 7 + 2) % 1073741789"}), domain=domain)
    assert revsynth.verify(other, text=build.text()).holds is False
