"""Registers against words: what is found by name, which form they mean, and what is refused in one line."""

from __future__ import annotations

from typing import Any

import pytest

import revsynth
from revsynth.circuit.model import Circuit
from revsynth.errors import UsageError
from revsynth.options import Oracle
from revsynth.qasm import Program
from revsynth.spec.model import Spec
from revsynth.spec.understand import understand
from revsynth.verification import verify_program
from revsynth.verification.matching import match
from tests.verification.oracles import as_program, half_adder
from tests.verification.textbook import register_circuit, toffoli

PREDICATE = revsynth.predicate("a == 3", inputs={"a": 2})
SUM = revsynth.outputs({"total": "a + b"}, inputs={"a": 1, "b": 1})
SQUARE = revsynth.outputs({"low": {"value": "a ^ b", "bits": 1}, "high": "b"}, inputs={"a": 1, "b": 1})
PERMUTATION = revsynth.permutation([0, 1, 3, 2])


def empty(*registers: tuple[str, int]) -> Program:
    return as_program(register_circuit(*registers).build())


@pytest.mark.parametrize(
    ("spec", "registers", "form"),
    [
        (PREDICATE, [("a", 2)], "phase"),
        (PREDICATE, [("a", 2), ("mark", 1)], "bit"),
        (PREDICATE, [("a", 2), ("work", 3)], "phase"),
        (SUM, [("a", 1), ("b", 1), ("total", 2)], "bit"),
        (SQUARE, [("a", 1), ("b", 1), ("low", 1), ("high", 1)], "bit"),
        (SQUARE, [("a", 1), ("b", 1)], "inplace"),
        (PERMUTATION, [("v", 2)], "inplace"),
    ],
)
def test_the_form_by_the_registers_present(
    spec: Spec, registers: list[tuple[str, int]], form: Oracle
) -> None:
    assert match(understand(spec), empty(*registers), None, None).oracle == form


def test_lines_mean_embedded() -> None:
    example = half_adder()
    roles = match(understand(example.spec), example.program(), None, None)
    assert roles.oracle == "embedded"
    assert (roles.inputs, roles.outputs, roles.leftover, roles.preset) == ((0, 1), (1, 2), (0,), ((2, 0),))


@pytest.mark.parametrize(
    ("spec", "registers", "oracle", "text"),
    [
        (PREDICATE, [("b", 2)], None, "spec: the circuit has no register a of 2 qubits for the word a; it"),
        (PREDICATE, [], None, "it has no registers"),
        (PREDICATE, [("a", 3)], None, "register a has 3 qubits, the word a has 2 bits; the circuit has a"),
        (PREDICATE, [("a", 2)], "bit", "no register mark of 1 qubit for the predicate's output"),
        (PREDICATE, [("a", 2)], "inplace", "'inplace' does not go with a predicate: use phase, bit"),
        (SUM, [("a", 1), ("b", 1)], "phase", "'phase' does not go with outputs: use bit, fresh"),
        (SUM, [("a", 1), ("total", 2)], None, "no register b of 1 qubit for the word b"),
        (revsynth.outputs({"f": "a"}, inputs={"a": 1, "b": 1}), [("a", 1), ("b", 1)], "inplace",
         "needs as many output bits as input bits, not 1 and 2"),
        (PREDICATE, [("a", 2)], "embedded", "an embedded block needs the register line"),
        (SUM, [("line", 3)], None, "comment lines like `// line 3: a"),
    ],
)  # fmt: skip
def test_missing_and_short_registers_are_refused(
    spec: Spec, registers: list[tuple[str, int]], oracle: Oracle | None, text: str
) -> None:
    with pytest.raises(UsageError, match=text) as caught:
        verify_program(spec, empty(*registers), oracle=oracle)
    assert "\n" not in str(caught.value)


def test_reserved_names_and_capitals_are_found_as_they_are_written() -> None:
    spec = revsynth.predicate("x == 1 and Lamp == 1", inputs={"x": 1, "Lamp": 1})
    c = register_circuit(("x_", 1), ("r_Lamp", 1))
    c.z(0, (2,))
    assert verify_program(spec, Program(c.build(), "2.0", ())).holds
    c = register_circuit(("Lamp", 1), ("x_", 1))
    c.z(0, (2,))
    assert verify_program(spec, as_program(c.build())).holds


def test_the_order_of_registers_does_not_matter_but_their_bits_do() -> None:
    spec = revsynth.outputs({"f": "cell[0] + 2 * cell[1]"}, inputs={"cell": {"bits": 2, "count": 2}})
    """f = cell[0] + 2 cell[1] on a fresh f, by half adders."""
    for first, second in ((6, 4), (4, 6)):
        c = register_circuit(("f", 4), ("cell_1", 2), ("cell_0", 2))
        c.cx(first, 0)
        c.cx(first + 1, 1)
        c.x(2, (2 * second, 2 * 1))
        c.cx(second, 1)
        c.x(3, (2 * (second + 1), 2 * 2))
        c.cx(second + 1, 2)
        verdict = verify_program(spec, as_program(c.build()), oracle="fresh")
        assert verdict.holds is (first == 6)


def test_registers_the_spec_does_not_know_count_as_scratch_and_are_named() -> None:
    c = register_circuit(("a", 2), ("helper", 1))
    c.x(2, (0, 2))
    c.z(2)
    c.x(2, (0, 2))
    verdict = verify_program(PREDICATE, as_program(c.build()))
    assert verdict.holds
    assert "registers: helper not in the spec, taken as scratch from 0 to 0" in verdict.evidence.links
    c.x(2)
    verdict = verify_program(PREDICATE, as_program(c.build()))
    assert verdict.counterexample is not None
    assert verdict.counterexample.kind == "scratch"
    assert verdict.counterexample.why.startswith("helper[0] ends in 1")


def test_keep_is_scratch_unless_the_form_is_compute() -> None:
    c = register_circuit(("a", 2), ("mark", 1), ("keep", 1))
    c.x(3, (0, 2))
    c.cx(3, 2)
    program = as_program(c.build())
    assert verify_program(PREDICATE, program, oracle="compute").holds
    assert verify_program(PREDICATE, program).holds is False


def test_lent_qubits_come_back_in_any_state() -> None:
    good, bad = (register_circuit(("a", 2), ("lent", 1)) for _ in range(2))
    for c in (good, bad):
        c.cx(0, 2)
        c.z(1, (4,))
        c.cx(0, 2)
    good.z(1, (4,))
    bad_verdict = verify_program(PREDICATE, as_program(bad.build()))
    assert verify_program(PREDICATE, as_program(good.build())).holds
    assert bad_verdict.counterexample is not None
    assert bad_verdict.counterexample.inputs == {"a": 2, "lent": 1}


PLACEMENT: dict[str, Any] = {
    "before": {"a": [0], "b": [1]},
    "preset": {"2": 0},
    "after": {"total": [1, 2]},
    "leftover": [0],
}


def adder_circuit() -> Circuit:
    return half_adder().circuit


def test_a_placement_given_outranks_the_comments() -> None:
    program = as_program(adder_circuit(), "line 0: nonsense")
    assert verify_program(SUM, program, placement=PLACEMENT).holds
    swapped = {**PLACEMENT, "after": {"total": [2, 1]}}
    assert verify_program(SUM, program, placement=swapped).holds is False
    lifted = {**PLACEMENT, "preset": {"2": 1}}
    assert verify_program(SUM, program, placement=lifted).holds is False


@pytest.mark.parametrize(
    ("change", "text"),
    [
        ({"before": {"a": [0]}}, "'before' must list 1 lines for b, not None"),
        ({"before": {"a": [0], "b": [0]}}, "line 0 is used twice before the block"),
        ({"after": {"total": [1, 7]}}, "line 7 is not in the register line of 3 qubits"),
        ({"after": {"total": [1]}}, "'after' must list 2 lines for total"),
        ({"preset": {}}, "nothing says how line 2 starts"),
        ({"preset": {"2": 5}}, "a line is preset to 0 or 1"),
        ({"preset": {"x": 0}}, "placement: invalid literal"),
    ],
)
def test_placements_that_cannot_be_are_refused(change: dict[str, Any], text: str) -> None:
    with pytest.raises(UsageError, match=text):
        verify_program(SUM, as_program(adder_circuit()), placement={**PLACEMENT, **change})


def test_comment_lines_must_place_every_bit() -> None:
    first, second, third = half_adder().comments
    assert verify_program(SUM, as_program(adder_circuit(), f"// {first}", second, third)).holds
    with pytest.raises(UsageError, match=r"no comment line says where total\[1\] is after the block"):
        verify_program(SUM, as_program(adder_circuit(), first, second))


def test_a_built_embedded_block_verifies_from_its_file_alone() -> None:
    spec = revsynth.outputs({"weight": "popcount(v)"}, inputs={"v": 3})
    built = revsynth.build(spec, oracle="embedded")
    assert revsynth.verify(spec, text=built.text()).holds


def test_an_and_with_toffoli_by_its_words() -> None:
    c = register_circuit(("b", 1), ("total", 2), ("a", 1))
    c.cx(3, 1)
    c.cx(0, 1)
    toffoli(c, 3, 0, 2)
    assert verify_program(SUM, as_program(c.build()), exact_phase=True).holds
