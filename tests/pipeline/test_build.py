"""The whole way, on small specs of every kind, form and gate set, seen again by the slow simulator."""

from __future__ import annotations

import itertools
import os
import subprocess
import sys
from pathlib import Path
from typing import Any

import numpy as np
import pytest

import revsynth
from revsynth.errors import BudgetError, UsageError
from revsynth.qasm import read
from tests.slow_simulator import run_circuit


def a_predicate() -> Any:
    return revsynth.predicate("a * b == 2 or a > 2", inputs={"a": 2, "b": 2})


def marked(x: int) -> int:
    a, b = x & 3, x >> 2
    return int(a * b == 2 or a > 2)


def images(text: str, qubits: list[int], inputs: list[int]) -> list[list[tuple[int, complex]]]:
    """For each basis input: every measurement branch's single basis state and amplitude."""
    circuit = read(text, source="test").circuit
    found = []
    for x in inputs:
        vector = np.zeros(1 << circuit.qubits, dtype=complex)
        vector[sum(((x >> i) & 1) << q for i, q in enumerate(qubits))] = 1
        branches = []
        for _, state in run_circuit(circuit, vector):
            support = np.flatnonzero(np.abs(state) > 1e-9)
            assert len(support) == 1
            branches.append((int(support[0]), complex(state[support[0]])))
        found.append(branches)
    return found


LEVELS = [
    ("cascade", "unitary", "openqasm3"),
    ("toffoli", "unitary", "openqasm3"),
    ("toffoli", "unitary", "openqasm2"),
    ("toffoli", "measured", "openqasm3"),
    ("clifford+t", "unitary", "openqasm3"),
    ("clifford+t", "unitary", "openqasm2"),
    ("clifford+t", "unitary", "plain"),
    ("clifford+t", "measured", "openqasm3"),
]


@pytest.mark.parametrize("method", ["auto", "products", "transform"])
@pytest.mark.parametrize(("gates", "uncompute", "format"), LEVELS)
def test_a_phase_oracle_at_every_level(method: str, gates: str, uncompute: str, format: str) -> None:
    built = revsynth.build(a_predicate(), method=method, gates=gates, uncompute=uncompute, format=format)
    assert built.evidence.level == "exhaustive"
    assert built.evidence.inputs_checked == 16
    for x, branches in enumerate(images(built.text(), [0, 1, 2, 3], list(range(16)))):
        amplitude = len(branches) ** -0.5 * (-1) ** marked(x)
        for state, got in branches:
            assert state == x
            assert got == pytest.approx(amplitude) or uncompute == "measured"
    assert built.cost["rotations"] == built.cost["other"] * (gates != "cascade") == 0


@pytest.mark.parametrize("method", ["auto", "products", "transform"])
@pytest.mark.parametrize(("gates", "uncompute", "format"), LEVELS)
@pytest.mark.parametrize("oracle", ["bit", "fresh", "compute"])
def test_outputs_at_every_level(method: str, gates: str, uncompute: str, format: str, oracle: str) -> None:
    spec = revsynth.outputs({"total": {"value": "a + b", "bits": 2}}, inputs={"a": 1, "b": 2})
    built = revsynth.build(
        spec, oracle=oracle, method=method, gates=gates, uncompute=uncompute, format=format
    )
    assert built.evidence.level == "exhaustive"
    for a, b, y in itertools.product(range(2), range(4), range(4) if oracle == "bit" else [0]):
        start = a | b << 1 | y << 3
        want = a | b << 1 | (y ^ ((a + b) & 3)) << 3
        for state, _ in images(built.text(), [0, 1, 2, 3, 4], [start])[0]:
            assert state & 31 == want
            assert oracle == "compute" or state == want


@pytest.mark.parametrize(("gates", "uncompute", "format"), LEVELS)
def test_a_permutation_in_place_at_every_level(gates: str, uncompute: str, format: str) -> None:
    values = [6, 1, 0, 15, 2, 5, 4, 7, 8, 9, 14, 11, 12, 13, 10, 3]
    spec = revsynth.permutation(values)
    built = revsynth.build(spec, gates=gates, uncompute=uncompute, format=format)
    assert built.evidence.level == "exhaustive"
    for x, branches in enumerate(images(built.text(), [0, 1, 2, 3], list(range(16)))):
        assert {state for state, _ in branches} == {values[x]}


@pytest.mark.parametrize("gates", ["cascade", "toffoli", "clifford+t"])
def test_an_embedded_block_says_which_line_is_which(gates: str) -> None:
    spec = revsynth.outputs({"weight": "popcount(v)"}, inputs={"v": 3})
    built = revsynth.build(spec, oracle="embedded", gates=gates)
    placement = built.to_json()["placement"]
    assert built.cost["qubits"] - built.cost["work"] == 4  # the full adder needs 4 lines, common practice
    for x in range(8):
        start = sum(value << int(line) for line, value in placement["preset"].items())
        start |= sum(((x >> bit) & 1) << line for bit, line in enumerate(placement["before"]["v"]))
        ((state, _),) = images(built.text(), list(range(4)), [start])[0]
        got = sum(((state >> line) & 1) << bit for bit, line in enumerate(placement["after"]["weight"]))
        assert got == x.bit_count()
    assert set(placement["leftover"]) == set(range(4)) - set(placement["after"]["weight"])


def test_free_values_are_used_and_the_rest_is_still_verified_everywhere() -> None:
    full = revsynth.build(revsynth.truth_table("0100 0001", inputs={"v": 3}))
    free = revsynth.build(revsynth.truth_table("01-- -0-1", inputs={"v": 3}))
    assert free.evidence.inputs_checked == 8
    assert free.cost["cx"] + free.cost["cz"] < full.cost["cx"] + full.cost["cz"]
    assert free.counts == {"domain": 8, "marked": 2, "free": 4}


@pytest.mark.parametrize("table", ["0000", "1111"])
@pytest.mark.parametrize("format", ["openqasm3", "openqasm2", "plain"])
def test_constant_predicates(table: str, format: str) -> None:
    built = revsynth.build(revsynth.truth_table(table, inputs={"v": 2}), format=format)
    for x, ((state, amplitude),) in enumerate(images(built.text(), [0, 1], list(range(4)))):
        assert (state, round(amplitude.real)) == (x, -1 if table == "1111" else 1)


def test_budgets_are_kept_or_refused_in_one_line() -> None:
    spec = revsynth.predicate("v == 63", inputs={"v": 6})
    wide = revsynth.build(spec, uncompute="measured")
    narrow = revsynth.build(spec, uncompute="measured", qubits=7)
    assert narrow.cost["qubits"] <= 7 < wide.cost["qubits"]
    assert wide.cost["t"] < narrow.cost["t"]
    with pytest.raises(BudgetError, match=r"7.*qubits"):
        revsynth.build(spec, qubits=6)
    with pytest.raises(BudgetError, match="T gates"):
        revsynth.build(spec, t=3)
    with pytest.raises(BudgetError, match="layers"):
        revsynth.build(spec, depth=2)


@pytest.mark.parametrize(
    ("options", "text"),
    [
        ({"oracle": "inplace"}, "does not go with a predicate: use phase, bit"),
        ({"gates": "cascade", "format": "openqasm2"}, "needs format 'openqasm3'"),
        ({"uncompute": "measured", "format": "plain"}, "needs format 'openqasm3'"),
        ({"gates": "toffoli", "format": "plain"}, "Clifford"),
        ({"method": "magic"}, "not one of auto"),
        ({"qubits": -1}, "a budget is a whole number"),
        ({"colour": 1}, "colour"),
    ],
)
def test_options_that_do_not_go_together_are_refused(options: dict[str, Any], text: str) -> None:
    with pytest.raises(UsageError, match=text):
        revsynth.build(a_predicate(), **options)


def test_the_file_opens_with_what_it_is_and_holds_no_path_and_no_time(tmp_path: Path) -> None:
    place = tmp_path / "deep" / "pairs.toml"
    place.parent.mkdir()
    place.write_text('title = "Pairs\\n x q[0];"\n[inputs]\nx = 2\n[predicate]\nwhere = "x == 3"\n')
    built = revsynth.build(revsynth.read_spec(place))
    text = built.text()
    comments = [line for line in text.splitlines() if line.startswith("//")]
    assert "pairs.toml" in text
    assert str(tmp_path) not in text
    assert any("evidence: exhaustive, all 4 inputs" in line for line in comments)
    assert any("word x is in register x_" in line for line in comments)
    assert not any(line.strip().startswith("x q[0]") for line in text.splitlines())
    out = tmp_path / "out.qasm"
    built.write(out)
    assert out.read_text() == text
    assert revsynth.verify(built.spec, out).holds


def test_the_same_bytes_under_another_hash_seed() -> None:
    script = (
        "import revsynth; s = revsynth.predicate('(a * 5 + b) % 7 in [1, 2, 4]', inputs={'a': 4, 'b': 3});"
        "print(revsynth.build(s, uncompute='measured').text());"
        "p = revsynth.permutation([3, 1, 4, 5, 9, 2, 6, 8, 7, 0, 10, 12, 11, 13, 15, 14]);"
        "print(revsynth.build(p).text())"
    )
    runs = [
        subprocess.run(
            [sys.executable, "-c", script],
            env={**os.environ, "PYTHONHASHSEED": seed},
            capture_output=True,
            check=True,
        ).stdout
        for seed in ("1", "2")
    ]
    assert runs[0] == runs[1]
    assert runs[0]


def test_json_has_the_keys_of_the_contract() -> None:
    found = revsynth.build(a_predicate(), uncompute="measured").to_json()
    assert set(found) >= {
        "title", "oracle", "gates", "method", "inputs", "registers", "domain", "marked", "free", "cost",
        "evidence", "lower_bound", "tried", "seconds",
    }  # fmt: skip
    assert set(found["cost"]) == {
        "qubits", "work", "ands", "cascade", "gates", "toffoli", "t", "rotations", "other", "cx", "cz",
        "depth", "t_depth", "toffoli_depth", "measured",
    }  # fmt: skip
    assert set(found["evidence"]) == {"level", "inputs_checked", "links", "detail"}
    assert found["inputs"] == {"a": {"bits": 2}, "b": {"bits": 2}}
    assert found["marked"] == sum(map(marked, range(16)))
    assert all("method" in trial for trial in found["tried"])


def test_a_budget_for_t_or_depth_outranks_the_aim_and_the_aim_holds_within_it() -> None:
    spec = revsynth.predicate("v == 200", inputs={"v": 8})
    narrow = revsynth.build(spec, uncompute="measured", aim="qubits")
    wide = revsynth.build(spec, uncompute="measured", aim="t")
    between = (narrow.cost["t"] + wide.cost["t"]) // 2
    found = revsynth.build(spec, uncompute="measured", aim="qubits", t=between)
    assert found.cost["t"] <= between < narrow.cost["t"]
    assert narrow.cost["qubits"] < found.cost["qubits"] < wide.cost["qubits"]
    fewer = found.cost["qubits"] - 1
    with pytest.raises(BudgetError, match="T gates"):
        revsynth.build(spec, uncompute="measured", qubits=fewer, t=between)
    deep = revsynth.build(spec, aim="t", method="products")
    shallow = revsynth.build(spec, aim="t", depth=deep.cost["depth"] - 1)
    assert shallow.cost["depth"] < deep.cost["depth"]


def test_a_time_limit_keeps_the_best_so_far_and_the_file_says_so() -> None:
    spec = revsynth.predicate("(a * b + a) % 23 < 7", inputs={"a": 4, "b": 4})
    built = revsynth.build(spec, effort="high", time_limit=0.001)
    assert built.to_json()["stopped_early"] is True
    assert built.stopped_early
    assert "stopped by the time limit" in built.text()
    assert built.evidence.level == "exhaustive"


def test_high_effort_is_never_worse_than_normal() -> None:
    spec = revsynth.predicate("(a * b + a) % 11 < 4", inputs={"a": 3, "b": 3})
    normal, high = (revsynth.build(spec, effort=effort) for effort in ("normal", "high"))
    assert high.cost["t"] <= normal.cost["t"]
