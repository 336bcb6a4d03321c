"""The promises of the Python side: what it takes, what it gives, and how it refuses."""

from __future__ import annotations

from pathlib import Path
from typing import Any

import numpy as np
import pytest

import revsynth
from revsynth.errors import SpecError, UsageError
from revsynth.options import CHOICES


def test_the_package_lists_what_it_loads_later() -> None:
    assert set(revsynth.__all__) <= set(dir(revsynth))
    for name in revsynth.__all__:
        assert getattr(revsynth, name).__doc__


def test_specs_take_numpy_and_tuples_as_they_take_lists() -> None:
    images = [3, 0, 2, 1]
    assert revsynth.permutation(np.array(images)) == revsynth.permutation(images)
    assert revsynth.permutation(tuple(images)) == revsynth.permutation([np.int64(image) for image in images])
    pairs = revsynth.predicate("a == c[1][0]", inputs={"a": np.int64(2)}, constants={"c": ((1, 2), (3, 4))})
    assert pairs == revsynth.predicate("a == c[1][0]", inputs={"a": 2}, constants={"c": [[1, 2], [3, 4]]})
    table = {"f": {"table": np.array([1, 0]), "bits": 1}}
    assert revsynth.outputs(table, inputs={"a": 1}) == revsynth.outputs(
        {"f": {"table": [1, 0], "bits": 1}}, inputs={"a": 1}
    )


A = revsynth.predicate("a == 2", inputs={"a": 2})


@pytest.mark.parametrize(
    ("call", "error", "text"),
    [
        (lambda: revsynth.predicate("a", inputs=[("a", 1)]), UsageError, "words by name are wanted"),
        (lambda: revsynth.outputs({"f": 3}, inputs={"a": 1}), SpecError, "is wanted, not 3"),
        (lambda: revsynth.build("a.toml"), UsageError, "a spec is wanted"),
        (lambda: revsynth.verify("a.toml", text=""), UsageError, "a spec is wanted"),
        (lambda: revsynth.build(A, qubits="9"), UsageError, "qubits '9': a budget is a whole number"),
        (lambda: revsynth.build(A, qubits=True), UsageError, "qubits True: a budget is a whole number"),
        (lambda: revsynth.build(A, t=1.5), UsageError, "t 1.5: a budget is a whole number"),
        (lambda: revsynth.build(A, seed=-1), UsageError, "seed -1: a seed is a whole number"),
        (lambda: revsynth.cost(), UsageError, "either a circuit file or text="),
        (lambda: revsynth.draw("nowhere.qasm"), revsynth.RevsynthError, "nowhere.qasm: cannot be read"),
    ],
)
def test_wrong_arguments_are_refused_in_one_line(call: Any, error: type[Exception], text: str) -> None:
    with pytest.raises(error, match=text) as caught:
        call()
    assert isinstance(caught.value, revsynth.RevsynthError)
    assert "\n" not in str(caught.value)


def test_whole_numbers_of_numpy_are_budgets_too() -> None:
    assert revsynth.build(A, qubits=np.int64(4), seed=np.int64(1)).evidence.level == "exhaustive"


def test_python_can_inspect_count_and_draw_as_the_commands_do(tmp_path: Path) -> None:
    built = revsynth.build(A)
    place = tmp_path / "a.qasm"
    built.write(place)
    assert revsynth.cost(place) == {**built.cost, "ands": None, "cascade": None}
    assert revsynth.cost(text=built.text()) == revsynth.cost(place)
    assert revsynth.draw(place, title="Pairs").startswith("<svg")
    assert revsynth.inspect(A).to_json()["marked"] == 1


def test_a_circuit_shows_itself_in_a_notebook() -> None:
    built = revsynth.build(A)
    assert built.circuit._repr_svg_().startswith("<svg")
    assert built._repr_svg_().startswith("<svg")


def test_every_format_of_a_build_is_the_same_circuit() -> None:
    built = revsynth.build(A, format="plain")
    for format in ("openqasm3", "openqasm2"):
        assert revsynth.verify(A, text=built.text(format)).holds
    assert built.to_json()["qubits"] == {"a": [0, 1]}


@pytest.mark.parametrize("qubits", [0, 2, 4])
@pytest.mark.parametrize("method", ["auto", "products", "transform"])
def test_too_few_qubits_are_a_budget_that_nothing_fits(qubits: int, method: str) -> None:
    spec = revsynth.predicate("a * b == 6", inputs={"a": 3, "b": 2})
    with pytest.raises(revsynth.BudgetError, match=f"nothing fits the budget: .*{qubits} allowed") as caught:
        revsynth.build(spec, qubits=qubits, method=method)
    assert "linear" not in str(caught.value)


def test_in_place_needs_as_many_output_bits_as_input_bits() -> None:
    spec = revsynth.outputs({"f": "a // 2"}, inputs={"a": 3})
    with pytest.raises(UsageError, match="not 2 and 3: use bit, fresh, compute or embedded"):
        revsynth.build(spec, oracle="inplace")
    same = revsynth.outputs({"f": {"value": "a // 2", "bits": 3}}, inputs={"a": 3})
    with pytest.raises(UsageError, match="inputs 0 and 1 have the same image 0"):
        revsynth.build(same, oracle="inplace", qubits=9)


def test_methods_go_by_their_names_alone_and_variants_stand_apart() -> None:
    built = revsynth.build(revsynth.predicate("a * b == 6", inputs={"a": 3, "b": 2}))
    found = built.to_json()
    assert found["method"] == built.method
    assert found["variant"] == built.variant
    names = {"linear", *CHOICES["method"]} - {"auto"}
    assert {found["method"], *(trial["method"] for trial in found["tried"])} <= names
    assert f"// method: {built.method}, {built.variant}\n" in built.text()
