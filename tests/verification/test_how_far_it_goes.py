"""How far a verdict reaches: wide outputs, sampling, the second reading of the spec, what is imported."""

from __future__ import annotations

import subprocess
import sys
import time

import numpy as np
import pytest

import revsynth
from revsynth.circuit.model import CircuitBuilder, Kind
from revsynth.logic.function import Function
from revsynth.spec.understand import Understanding, understand
from revsynth.verification import decide as decide_module
from revsynth.verification import verify_program
from revsynth.verification.cross_check import cross_check
from tests.verification.oracles import as_program
from tests.verification.textbook import register_circuit, toffoli


def copies() -> tuple[revsynth.Spec, CircuitBuilder]:
    """y ^= v & (v >> 1) on 14 bits: 28 bits in all."""
    spec = revsynth.outputs({"y": {"value": "v & (v >> 1)", "bits": 14}}, inputs={"v": 14})
    c = register_circuit(("v", 14), ("y", 14))
    for bit in range(13):
        toffoli(c, bit, bit + 1, 14 + bit)
    return spec, c


def test_outputs_that_commute_need_not_be_enumerated() -> None:
    spec, c = copies()
    verdict = verify_program(spec, as_program(c.build()), exact_phase=True)
    assert verdict.holds
    assert verdict.evidence.level == "exhaustive"
    assert verdict.evidence.inputs_checked == 1 << 14
    assert any("commutes with X on 14 outputs" in link for link in verdict.evidence.links)


def test_an_output_that_controls_something_is_enumerated() -> None:
    """Two outputs used as controls, harmlessly: run in both values; then not harmlessly."""
    spec, c = copies()
    for _ in range(2):
        c.x(27, (2 * 14, 2 * 15))
    verdict = verify_program(spec, as_program(c.build()))
    assert verdict.holds
    assert any("2 outputs or lent qubits, all 4 values run" in link for link in verdict.evidence.links)
    c.x(27, (2 * 14, 2 * 15 + 1))
    verdict = verify_program(spec, as_program(c.build()))
    assert verdict.counterexample is not None
    assert verdict.counterexample.inputs != {}
    assert verdict.counterexample.kind == "output"


def test_where_neither_is_possible_the_verdict_is_a_sample_and_undecided() -> None:
    spec, c = copies()
    for _ in range(2):
        for bit in range(14, 27):
            c.add(Kind.P, (bit + 1,), (2 * bit,), (3.141592653589793 / 4,))
            c.add(Kind.P, (bit + 1,), (2 * bit,), (-3.141592653589793 / 4,))
    verdict = verify_program(spec, as_program(c.build()))
    assert verdict.holds is None
    assert verdict.evidence.level == "sampled"
    assert "can only be sampled" in verdict.evidence.detail
    c.z(27, (2 * 26,))
    verdict = verify_program(spec, as_program(c.build()))
    assert verdict.holds is False
    assert verdict.evidence.level == "sampled"


def test_too_many_steps_for_superpositions_are_sampled(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(decide_module, "MOST_STEPS", 1000)
    spec = revsynth.predicate("v == 5000", inputs={"v": 13})
    literals = [2 * bit + 1 - (5000 >> bit & 1) for bit in range(13)]
    c = register_circuit(("v", 13))
    c.add(Kind.H, (1,), (0,))
    c.add(Kind.H, (1,), (0,))
    c.add(Kind.GPHASE, (), literals, (3.141592653589793,))
    verdict = verify_program(spec, as_program(c.build()))
    assert verdict.holds is None
    assert "too many for exact simulation" in verdict.evidence.detail
    c.x(2, (0, 2, 6))
    assert verify_program(spec, as_program(c.build())).holds is False


def flipped(understanding: Understanding, index: int) -> Understanding:
    """The same with a wrong entry in the table."""
    function = understanding.function
    values = function.values.copy()
    values[0, index >> 6] ^= np.uint64(1) << np.uint64(index & 63)
    wrong = Function(function.inputs, function.outputs, values, function.care, function.domain)
    return Understanding(understanding.spec, wrong, understanding.outputs, understanding.warnings)


@pytest.mark.parametrize(("bits", "index"), [(4, 7), (14, 5001)])
def test_a_wrong_table_is_noticed(bits: int, index: int) -> None:
    """Beyond 12 bits the marked inputs and their neighbours are among those compared."""
    spec = revsynth.predicate(f"v == {index ^ 1}", inputs={"v": bits})
    understanding = understand(spec)
    (link,) = cross_check(understanding)
    assert link.endswith(f"at {'all 16' if bits == 4 else '4096 of 16384'} inputs")
    with pytest.raises(AssertionError, match=f"a defect of revsynth.*differ at v = {index}"):
        cross_check(flipped(understanding, index))


def test_a_wrong_domain_is_noticed() -> None:
    spec = revsynth.predicate("v == 3", inputs={"v": 2}, domain="v != 0")
    understanding = understand(spec)
    function = understanding.function
    wrong = Function(2, 1, function.values, function.care, function.domain ^ np.uint64(1))
    with pytest.raises(AssertionError, match="differ at v = 0"):
        cross_check(Understanding(spec, wrong, (), ()))


def test_outside_the_domain_blocks_in_place_are_free_and_others_are_not() -> None:
    turn = revsynth.permutation(map={"v": "(v + 1) % 3"}, inputs={"v": 2}, domain="v < 3")
    c = register_circuit(("v", 2))
    c.cx(0, 1)
    c.add(Kind.SWAP, (0, 1))
    c.x(0)
    c.z(1, (0,))
    verdict = verify_program(turn, as_program(c.build()))
    assert verdict.holds
    assert verdict.evidence.inputs_checked == 3
    c.z(1)
    assert verify_program(turn, as_program(c.build())).holds is False
    predicate = revsynth.predicate("v == 1", inputs={"v": 2}, domain="v < 3")
    good = register_circuit(("v", 2))
    good.z(0)
    verdict = verify_program(predicate, as_program(good.build()))
    assert verdict.holds
    assert verdict.evidence.inputs_checked == 4
    good.s(1)
    good.x(0, (2,))
    good.z(0)
    assert verify_program(predicate, as_program(good.build())).holds is False


def test_a_predicate_of_eight_inputs_needs_no_compiler() -> None:
    script = (
        "import sys, revsynth;"
        "from revsynth.circuit.model import CircuitBuilder;"
        "from revsynth.qasm import Program;"
        "from revsynth.verification import verify_program;"
        "s = revsynth.predicate('v == 255', inputs={'v': 8});"
        "c = CircuitBuilder(); c.add_register('v', 8); c.z(0, [2 * q for q in range(1, 8)]);"
        "v = verify_program(s, Program(c.build(), '3.0', ()));"
        "sys.exit(0 if v.holds and not {'numba', 'pyeda'} & set(sys.modules) else 1)"
    )
    assert subprocess.run([sys.executable, "-c", script], check=False).returncode == 0


def test_records_that_never_agree_are_given_up_soon() -> None:
    """Many measured superpositions: every record differs from every other one, and none can be merged."""
    c = register_circuit(("a", 2), ("rest", 40), bits=40)
    for qubit in range(2, 42):
        c.h(qubit)
    for qubit in range(2, 42):
        c.measure(qubit, qubit - 2)
    spec = revsynth.predicate("a == 1", inputs={"a": 2})
    started = time.process_time()
    verdict = verify_program(spec, as_program(c.build()))
    assert time.process_time() - started < 5
    assert verdict.holds is None
    assert "records of measurement outcomes" in verdict.evidence.detail


def test_formulas_are_put_before_pyeda_too(monkeypatch: pytest.MonkeyPatch) -> None:
    spec = revsynth.predicate(formula="a[0] & ~a[1] | (a[2] ^ a[0])", inputs={"a": 3})
    understanding = understand(spec)
    assert cross_check(understanding)[1] == "spec: PyEDA says the same of the formula at 8 of 8 inputs"
    nested = revsynth.predicate(formula="~" * 120 + "a[0]", inputs={"a": 3})
    assert len(cross_check(understand(nested))) == 1
    monkeypatch.setattr(
        "revsynth.verification.cross_check.second_opinion", lambda *_: 1 - np.ones(8, dtype=np.uint8)
    )
    with pytest.raises(AssertionError, match=r"differ at a = 1"):
        cross_check(understanding)
