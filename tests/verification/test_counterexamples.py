"""Counterexamples in the words of the spec: a real failure, and a sentence that says what is wrong."""

from __future__ import annotations

import json
from pathlib import Path

import pytest

import revsynth
from revsynth.spec.model import Clauses, Predicate, Spec, Word
from revsynth.verification import Counterexample, Verdict, verify_program
from tests.verification.oracles import as_program
from tests.verification.textbook import register_circuit


def found(verdict: Verdict) -> Counterexample:
    assert verdict.holds is False
    assert verdict.counterexample is not None
    return verdict.counterexample


def test_an_output_in_words() -> None:
    spec = revsynth.outputs({"total": {"value": "a + k", "bits": 4, "signed": True}},
                            inputs={"a": 2, "k": {"bits": 3, "signed": True}})  # fmt: skip
    built = revsynth.build(spec, gates="toffoli")
    lines = built.text().splitlines(keepends=True)
    onto_output = [i for i, line in enumerate(lines) if line.startswith("cx") and ", total[" in line]
    gate = onto_output[-1]
    broken = "".join(lines[:gate] + lines[gate + 1 :])
    example = found(revsynth.verify(spec, text=broken))
    assert example.kind == "output"
    a, k = example.inputs["a"], example.inputs["k"]  # type: ignore[call-overload]
    assert 0 <= a < 4
    assert -4 <= k < 4
    start = example.inputs.get("total", 0) if isinstance(example.inputs, dict) else 0
    assert example.expected == {"total": _signed((a + k) ^ start, 4)}
    assert example.got != example.expected
    assert "which is not the value of the spec" in example.why


def _signed(value: int, bits: int) -> int:
    value &= (1 << bits) - 1
    return value - (1 << bits) if value >> (bits - 1) else value


def test_negative_numbers_arrays_and_changed_inputs() -> None:
    spec = revsynth.predicate(
        "k == -3 and cell[1] == 2",
        inputs={"k": {"bits": 3, "signed": True}, "cell": {"bits": 2, "count": 2}},
    )
    c = register_circuit(("k", 3), ("cell_0", 2), ("cell_1", 2))
    literals = (0, 3, 4, 11)
    c.z(6, literals)
    assert verify_program(spec, as_program(c.build())).holds
    wrong = register_circuit(("k", 3), ("cell_0", 2), ("cell_1", 2))
    wrong.z(6, literals)
    wrong.x(2, (12, 10, 6, 8))
    example = found(verify_program(spec, as_program(wrong.build())))
    assert example.inputs == {"k": 0, "cell": [3, 3]}
    assert example.kind == "input"
    assert example.expected == {"k": 0}
    assert example.got == {"k": -4}
    assert example.why == "k[2] ends in 1, but inputs are to stay as they are"


def test_the_first_input_that_fails_and_a_phase_against_the_reference() -> None:
    spec = revsynth.predicate("v == 9", inputs={"v": 4})
    c = register_circuit(("v", 4))
    c.z(3, (0, 3))
    example = found(verify_program(spec, as_program(c.build())))
    assert example.inputs == {"v": 13}
    assert (example.expected, example.got) == ({"phase": 1}, {"phase": -1})
    assert example.why == "the phase is -1 where it must be 1, compared with that of v = 0"


def test_where_the_reference_itself_is_the_odd_one() -> None:
    spec = revsynth.predicate("v == 3", inputs={"v": 2})
    c = register_circuit(("v", 2))
    c.z(1, (0,))
    c.z(1, (1,))
    c.z(1)
    c.add(16, (), (1, 3), (3.141592653589793,))  # type: ignore[arg-type]
    example = found(verify_program(spec, as_program(c.build())))
    assert example.inputs == {"v": 0}
    assert (example.expected, example.got) == ({"phase": 1}, {"phase": -1})


def test_a_cnf_lists_literals() -> None:
    body = Predicate(clauses=Clauses(3, ((1, -2), (2, 3))))
    spec = Spec((Word("v", 3),), body, source="locks.cnf")
    c = register_circuit(("v", 3))
    c.z(0, (3, 4))
    example = found(verify_program(spec, as_program(c.build())))
    assert isinstance(example.inputs, list)
    assert sorted(map(abs, example.inputs)) == [1, 2, 3]
    model = {abs(literal): literal > 0 for literal in example.inputs}
    satisfied = (model[1] or not model[2]) and (model[2] or model[3])
    assert example.expected == {"phase": -1 if satisfied else 1}


def test_long_words_are_strings_in_json() -> None:
    spec = revsynth.outputs({"f": {"value": "a << 59", "bits": 60}}, inputs={"a": 1})
    c = register_circuit(("a", 1), ("f", 60))
    example = found(verify_program(spec, as_program(c.build()), oracle="fresh"))
    assert example.to_json()["expected"] == {"f": str(1 << 59)}
    assert json.loads(json.dumps(example.to_json()))["got"] == {"f": 0}


def test_three_kinds_at_one_input_show_the_output() -> None:
    spec = revsynth.predicate("v == 3", inputs={"v": 2})
    c = register_circuit(("v", 2), ("mark", 1), ("work", 1))
    c.x(3)
    c.x(0)
    c.x(2)
    assert found(verify_program(spec, as_program(c.build()))).kind == "output"


@pytest.mark.parametrize("faulty", [False, True])
def test_a_large_circuit_is_refuted_early_and_says_so(faulty: bool) -> None:
    spec = revsynth.predicate("v == 70000", inputs={"v": 18})
    c = register_circuit(("v", 18))
    literals = [2 * bit + (1 - (70000 >> bit & 1)) for bit in range(17) if bit != 16]
    c.z(16, (*literals, 35))
    if faulty:
        c.z(0, (2, 4, 6))
    verdict = verify_program(spec, as_program(c.build()))
    assert verdict.holds is not faulty
    if faulty:
        assert found(verdict).inputs == {"v": 15}
        assert verdict.evidence.detail == "stopped at the first input that fails"
        assert verdict.evidence.inputs_checked == 1 << 16
    else:
        assert verdict.evidence.inputs_checked == 1 << 18


def test_the_file_of_a_verdict_is_plain_json(tmp_path: Path) -> None:
    spec = revsynth.predicate("v == 3", inputs={"v": 2})
    verdict = verify_program(spec, as_program(register_circuit(("v", 2)).build()))
    path = tmp_path / "verdict.json"
    path.write_text(json.dumps(verdict.to_json()))
    read = json.loads(path.read_text())
    assert set(read) == {"holds", "oracle", "evidence", "global_phase", "counterexample"}
    assert read["counterexample"]["inputs"] == {"v": 3}
