"""Random specs with random options, from the file to the written text, seen without the project's own eyes.

The spec's meaning comes from Python's eval, the circuit's from the slow simulator on a small reader of the
lines that `build` writes; neither the project's evaluator nor its reader nor its verification is asked.
"""

from __future__ import annotations

import json
from collections import Counter
from dataclasses import dataclass, field
from pathlib import Path
from random import Random
from typing import Any

import pytest

import revsynth
from revsynth.errors import BudgetError, RevsynthError, UsageError
from tests.pipeline.faulty import faults
from tests.pipeline.random_specs import Case, random_case
from tests.pipeline.written import WrongError, check, demands, read_lines

ORACLES: dict[str, tuple[str | None, ...]] = {
    "predicate": (None, "phase", "bit", "fresh", "compute", "embedded"),
    "outputs": (None, "bit", "fresh", "compute", "inplace", "embedded"),
    "permutation": (None, "inplace"),
}
LARGEST = 11
"""Qubits that the slow simulator follows here."""
MOST_MEASURED = 5


def random_options(rng: Random, kind: str) -> dict[str, Any]:
    """Options that go together."""
    file = rng.choice(["openqasm3", "openqasm3", "openqasm2", "plain"])
    gates = rng.choice(["clifford+t", "clifford+t", "toffoli", "cascade"])
    if file == "plain" or (file == "openqasm2" and gates == "cascade"):
        gates = "clifford+t"
    return {
        "oracle": rng.choice(ORACLES[kind]),
        "format": file,
        "gates": gates,
        "uncompute": rng.choice(["unitary", "measured"]) if file == "openqasm3" else "unitary",
        "aim": rng.choice(["t", "t", "qubits", "depth", "gates"]),
        "method": rng.choice(["auto", "auto", "auto", "transform", "products"]),
        "effort": rng.choice(["low", "normal", "normal"]),
        "controls": rng.choice(["mixed", "positive"]),
        "seed": rng.randrange(4),
    }


def random_budget(rng: Random, built: revsynth.Build) -> dict[str, int]:
    """One that the circuit at hand just keeps, or that is tighter, down to no scratch at all."""
    name = rng.choice(["qubits", "t", "depth"])
    most = built.cost[name]
    assert most is not None
    least = most // 2
    if name == "qubits":
        least = sum(len(qubits) for register, qubits in built.qubit_map().items() if register != "work")
    return {name: rng.randint(min(least, most), most)}


@dataclass
class Campaign:
    """Runs seeds one by one and counts what happened."""

    folder: Path
    counts: Counter[str] = field(default_factory=Counter)
    messages: set[str] = field(default_factory=set)

    def run(self, seed: int) -> None:
        """One spec, built without a budget, twice the same, and with budgets."""
        rng = Random(seed)
        case = random_case(rng, rng.choice((3, 4, 5)))
        spec = self.read(case)
        if spec is None:
            return
        options = random_options(rng, case.kind)
        built = self.build(spec, options)
        if built is None:
            return
        self.check(case, built, seed)
        if rng.random() < 0.3:
            again = self.build(spec, options)
            assert again is not None
            assert again.text() == built.text()
            assert {**again.to_json(), "seconds": None} == {**built.to_json(), "seconds": None}
        for _ in range(2):
            budget = random_budget(rng, built)
            tighter = self.build(spec, {**options, **budget})
            if tighter is not None:
                for name, limit in budget.items():
                    assert (tighter.cost[name] or 0) <= limit
                self.check(case, tighter, seed)

    def read(self, case: Case) -> revsynth.Spec | None:
        """The spec as the project reads it, or None where it must be, and was, refused."""
        path = self.folder / f"plan{case.ending}"
        path.write_text(case.text, encoding="utf-8")
        empty = (
            case.ending == ".toml" and "[domain]" in case.text and not any(_cared(row) for row in case.wanted)
        )
        try:
            spec = revsynth.read_spec(path)
            revsynth.inspect(spec)
        except RevsynthError as error:
            if case.refused is None and not (empty and "no input satisfies" in str(error)):
                raise
            self.counts["refused"] += 1
            return None
        assert case.refused is None, case.text
        return spec

    def build(self, spec: revsynth.Spec, options: dict[str, Any]) -> revsynth.Build | None:
        """What came out, None where nothing fits: in one line."""
        try:
            return revsynth.build(spec, **options)
        except (BudgetError, UsageError) as error:
            self.counts[type(error).__name__] += 1
            self.messages.add(str(error))
            return None

    def check(self, case: Case, built: revsynth.Build, seed: int) -> None:
        """The text, its counts, and the JSON against each other and against the spec's meaning."""
        written, found = read_lines(built.text()), json.loads(json.dumps(built.to_json()))
        cost, plain = found["cost"], built.options.format == "plain"
        for name in cost.keys() - {"ands", "cascade", "rotations", *(["work"] if plain else [])}:
            assert cost[name] == written.counts[name], name
        again = revsynth.cost(text=built.text())
        assert {**again, **{name: cost[name] for name in ("ands", "cascade", "work")}} == cost
        _check_trials(found, built.options.aim)
        if case.kind == "predicate":
            assert found["marked"] == sum(row[0] == 1 for row in case.wanted)
        if plain:
            assert not written.comments
        else:
            assert written.comments[-1].startswith(f"made by: revsynth build plan{case.ending} --oracle")
        self.counts["builds"] += 1
        if cost["qubits"] <= LARGEST and cost["measured"] <= MOST_MEASURED:
            check(demands(case, built.oracle, written, found), written.circuit, seed)
            self.counts["followed"] += 1


def _cared(row: tuple[int | None, ...]) -> bool:
    return any(bit is not None for bit in row)


def _check_trials(found: dict[str, Any], aim: str) -> None:
    """The circuit is one of those tried, and none of the others that served was better for the aim."""
    served = [trial for trial in found["tried"] if "failed" not in trial and not trial.get("estimated")]
    names = ("t", "qubits", "gates", "depth")
    assert any(
        trial["method"] == found["method"] and all(trial[name] == found["cost"][name] for name in names)
        for trial in served
    )
    if found["gates"] == "clifford+t" or aim != "t":
        assert found["cost"][aim] == min(trial[aim] for trial in served)


def test_random_specs_from_the_file_to_the_written_text(tmp_path: Path) -> None:
    campaign = Campaign(tmp_path)
    for seed in range(150):
        campaign.run(seed)
    assert campaign.counts["builds"] >= 250
    assert campaign.counts["followed"] >= 240
    assert campaign.counts["refused"] >= 5
    assert not any("\n" in message for message in campaign.messages)


@pytest.mark.slow
@pytest.mark.parametrize("start", range(1000, 4000, 500))
def test_thousands_of_random_specs(tmp_path: Path, start: int) -> None:
    campaign = Campaign(tmp_path)
    for seed in range(start, start + 500):
        campaign.run(seed)
    assert campaign.counts["builds"] >= 800


def run_faults(folder: Path, seeds: range, most: int) -> Counter[str]:
    """Verify up to `most` faulty files of each spec, and hold every verdict against the slow simulator's."""
    counts: Counter[str] = Counter()
    campaign = Campaign(folder)
    for seed in seeds:
        rng = Random(seed)
        case = random_case(rng, rng.choice((3, 4)))
        spec = campaign.read(case)
        options = random_options(rng, case.kind)
        if options["format"] == "plain":
            options["format"] = "openqasm2"
        built = None if spec is None else campaign.build(spec, options)
        if spec is None or built is None or built.circuit.qubits > 9 or built.circuit.bits > 4:
            continue
        found = built.to_json()
        drawn = list(faults(built.text(), rng))
        for fault, text in rng.sample(drawn, min(most, len(drawn))):
            written = read_lines(text)
            try:
                check(demands(case, built.oracle, written, found), written.circuit, seed, exact=False)
                same = True
            except WrongError:
                same = False
            verdict = revsynth.verify(spec, text=text, oracle=built.oracle)
            assert verdict.holds is same, (seed, fault, verdict.counterexample)
            assert verdict.evidence.level == "exhaustive"
            assert (verdict.counterexample is None) == same
            counts["mutants"] += 1
            counts["equivalent"] += same
    return counts


def test_faults_in_written_files_are_seen(tmp_path: Path) -> None:
    counts = run_faults(tmp_path, range(150), 20)
    assert counts["mutants"] >= 700
    assert counts["equivalent"] < counts["mutants"] / 8


@pytest.mark.slow
def test_thousands_of_faults_in_written_files(tmp_path: Path) -> None:
    counts = run_faults(tmp_path, range(1000, 1300), 40)
    assert counts["mutants"] >= 3000
    assert counts["equivalent"] < counts["mutants"] / 8
