"""Outputs of in-place blocks on other lines: placement, file, and verification agree."""

from __future__ import annotations

import json
from pathlib import Path

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

import revsynth
from revsynth.cli.main import main
from revsynth.synthesis.any_order import promising, synthesise
from revsynth.synthesis.decompose import DECOMPOSE
from revsynth.synthesis.interface import Task
from tests.slow_simulator import run_cascade
from tests.strategies import permutations
from tests.synthesis.checks import from_table


@settings(max_examples=15)
@given(permutations(max_lines=3), st.data())
def test_the_placement_says_where_the_outputs_are(values: list[int], data: st.DataObject) -> None:
    lines = len(values).bit_length() - 1
    free = data.draw(st.sets(st.integers(0, len(values) - 1)))
    function = from_table(lines, lines, [None if x in free else y for x, y in enumerate(values)])
    blocks = synthesise(DECOMPOSE, Task(function, "inplace", any_order=True, effort="low"), lambda _: None)
    assert blocks
    for block in blocks:
        place = block.placement
        assert place is not None
        assert place.before == tuple(range(lines))
        assert sorted(place.after) == list(range(lines))
        for x, y in enumerate(values):
            after, _ = run_cascade(block.cascade, x)
            found = sum((after >> line & 1) << bit for bit, line in enumerate(place.after))
            assert x in free or found == y


@pytest.mark.parametrize("lines", [3, 7])
def test_a_permutation_of_wires_takes_no_gates(lines: int) -> None:
    """Only the lines' names change (common practice)."""
    order = np.random.default_rng(lines).permutation(lines)
    x = np.arange(1 << lines)
    table = sum(((x >> int(line)) & 1) << bit for bit, line in enumerate(order))
    task = Task(from_table(lines, lines, table), "inplace", any_order=True)
    assert tuple(int(line) for line in order) in promising(task)
    built = revsynth.build(revsynth.permutation(table.tolist()), outputs_any_order=True)
    assert built.cost["gates"] == 0
    assert built.to_json()["placement"]["after"] == {"v": order.tolist()}


def test_the_file_is_verified_by_its_comments_and_not_without_them(tmp_path: Path) -> None:
    spec = revsynth.permutation([0, 2, 1, 3, 4, 6, 5, 7])
    built = revsynth.build(spec, outputs_any_order=True)
    assert built.to_json()["placement"] == {
        "before": {"v": [0, 1, 2]},
        "preset": {},
        "after": {"v": [1, 0, 2]},
        "leftover": [],
    }
    path = tmp_path / "swap.qasm"
    built.write(path)
    text = path.read_text()
    assert "// line 1: v[1] before, v[0] after\n" in text
    assert "--outputs-any-order" in text
    assert revsynth.verify(spec, path).holds
    bare = "\n".join(line for line in text.splitlines() if not line.startswith("// line "))
    assert revsynth.verify(spec, text=bare).holds is False
    twice = text.replace("v[1] before, v[0] after", "v[1] before, v[1] after")
    with pytest.raises(
        revsynth.RevsynthError, match="no comment line says where v\\[0\\] is after the block"
    ):
        revsynth.verify(spec, text=twice)
    moved = text.replace("line 0: v[0]", "line 0: v[1]").replace("line 1: v[1]", "line 1: v[0]")
    with pytest.raises(revsynth.RevsynthError, match="in their own registers"):
        revsynth.verify(spec, text=moved)


def test_outputs_that_form_a_bijection(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """Two words exchanged and added: the sum may stay where it is cheap."""
    place = tmp_path / "pair.toml"
    place.write_text(
        "[inputs]\na = 2\nb = 2\n[outputs]\n"
        'c = { value = "b", bits = 2 }\nd = { value = "a + b", bits = 2 }\n'
    )
    costs = []
    for words in ([], ["--outputs-any-order"]):
        out = tmp_path / "pair.qasm"
        assert main(["build", str(place), "--oracle", "inplace", "--json", "-o", str(out), *words]) == 0
        found = json.loads(capsys.readouterr().out)
        costs.append(found["cost"]["cx"] + 10 * found["cost"]["t"])
        assert ("placement" in found) == bool(words)
        assert main(["verify", str(place), str(out), "--oracle", "inplace"]) == 0
        capsys.readouterr()
    assert costs[1] <= costs[0]


def test_any_order_never_costs_more() -> None:
    for seed in range(3):
        table = np.random.default_rng(seed).permutation(16).tolist()
        plain = revsynth.build(revsynth.permutation(table), method="decompose", uncompute="measured")
        free = revsynth.build(
            revsynth.permutation(table), method="decompose", uncompute="measured", outputs_any_order=True
        )
        assert free.cost["t"] <= plain.cost["t"]


def test_other_forms_have_their_outputs_where_they_are(capsys: pytest.CaptureFixture[str]) -> None:
    words = ["--where", "a == 3", "--input", "a=2", "--outputs-any-order"]
    assert main(["build", *words]) == 2
    assert "--outputs-any-order is for oracle 'inplace', not 'phase'" in capsys.readouterr().err
