"""The Python side: read or make a spec, build, verify. The command line is a thin skin over the same."""

from __future__ import annotations

import json
from collections.abc import Mapping, Sequence
from dataclasses import replace
from pathlib import Path
from typing import Any

from revsynth.cascade.model import Cascade
from revsynth.choice import by_name
from revsynth.circuit.cost import measure
from revsynth.circuit.model import Circuit
from revsynth.elaborate.free_spec import free_spec
from revsynth.elaborate.overview import Overview, overview
from revsynth.errors import BudgetError, RevsynthError, UndecidedError, UsageError
from revsynth.files import is_regular, write_whole
from revsynth.logic.analysis import Analysis, analyse
from revsynth.logic.lower_bounds import lower_bound
from revsynth.logic.truth_table import count_ones
from revsynth.options import BuildOptions, Format, Oracle
from revsynth.pipeline import Built, Progress
from revsynth.pipeline import build as run_pipeline
from revsynth.placement import describe_placement
from revsynth.qasm import Program, read, read_file
from revsynth.spec.model import Constant, Predicate, Spec, Word
from revsynth.spec.read import read_spec as _read_spec
from revsynth.spec.toml_reader import spec_from_document
from revsynth.spec.understand import understand
from revsynth.structure import structure_of
from revsynth.verification import verify_program
from revsynth.verification.evidence import Counterexample, Evidence, Verdict

__all__ = [
    "BudgetError",
    "Build",
    "Counterexample",
    "Evidence",
    "RevsynthError",
    "UndecidedError",
    "Verdict",
    "build",
    "cost",
    "draw",
    "inspect",
    "outputs",
    "permutation",
    "predicate",
    "read_spec",
    "truth_table",
    "verify",
]

InputWidths = Mapping[str, "int | Mapping[str, Any] | Word"]
"""Words by name: a width in bits, or the table of a spec file such as `{"bits": 3, "signed": True}`."""


def read_spec(path: str | Path, *, from_format: str | None = None, free_inputs: bool = False) -> Spec:
    """Read any spec file the contract lists; `from_format` names the format where the ending does not.

    free_inputs: of a CNF, make only the free variables inputs; the others follow from them. Raises
    RevsynthError (SpecError) with one line that names the file and the place.
    """
    spec = _read_spec(str(path), from_format=from_format)
    return free_spec(spec).spec if free_inputs else spec


def predicate(
    where: str | None = None,
    *,
    inputs: InputWidths,
    constants: Mapping[str, Constant] | None = None,
    domain: str | None = None,
    formula: str | None = None,
    title: str = "",
) -> Spec:
    """A predicate by an expression over integer words, or by `formula` over single bits.

    `inputs` in order: the first word has the lowest bits of the combined index.
    """
    if (where is None) == (formula is None):
        raise UsageError("predicate: give either an expression or formula=, not both")
    body = {"where": where} if formula is None else {"formula": formula}
    return _from_sections("predicate", body, inputs, constants, domain, title)


def outputs(
    values: Mapping[str, str | Mapping[str, Any]],
    *,
    inputs: InputWidths,
    constants: Mapping[str, Constant] | None = None,
    domain: str | None = None,
    title: str = "",
) -> Spec:
    """A classical subroutine: output words by expression, or by the table of a spec file.

    `{"total": "a + b"}` is short for `{"total": {"value": "a + b"}}`.
    """
    body = {name: {"value": value} if isinstance(value, str) else value for name, value in values.items()}
    return _from_sections("outputs", body, inputs, constants, domain, title)


def truth_table(table: str, *, inputs: InputWidths, domain: str | None = None, title: str = "") -> Spec:
    """A predicate by its table, input 0 first; '-' is free, spaces and '_' are ignored."""
    return _from_sections("predicate", {"table": table}, inputs, None, domain, title)


def permutation(
    values: Sequence[int | str] | None = None,
    *,
    inputs: InputWidths | None = None,
    map: Mapping[str, str] | None = None,
    steps: Sequence[str] | None = None,
    constants: Mapping[str, Constant] | None = None,
    domain: str | None = None,
    title: str = "",
) -> Spec:
    """A reversible block by the images of 0, 1, 2, ... ("-" is free), by new values of words, or by steps.

    Without `inputs` the images are of the word `v`.
    """
    given = {"values": values, "map": map, "steps": steps}
    body = {name: value for name, value in given.items() if value is not None}
    if len(body) != 1:
        raise UsageError("permutation: give exactly one of values, map= and steps=")
    return _from_sections("permutation", body, inputs, constants, domain, title)


def _from_sections(
    section: str,
    body: Mapping[str, Any],
    inputs: InputWidths | None,
    constants: Mapping[str, Constant] | None,
    domain: str | None,
    title: str,
) -> Spec:
    """The same way as a TOML file, so that the same checks and errors hold."""
    document: dict[str, Any] = {section: body}
    if title:
        document["title"] = title
    if inputs is not None:
        if not isinstance(inputs, Mapping):
            raise UsageError("inputs: words by name are wanted, such as {'a': 4}")
        document["inputs"] = {name: _width(width) for name, width in inputs.items()}
    if constants:
        document["constants"] = constants
    if domain is not None:
        document["domain"] = {"where": domain}
    plain: dict[str, Any] = _plain(document)
    return spec_from_document(plain, source="spec")


def _plain(value: Any) -> Any:
    """The value as a TOML reader would give it: NumPy arrays and integers, tuples and mappings made plain."""
    if isinstance(value, Mapping):
        return {name: _plain(part) for name, part in value.items()}
    if hasattr(value, "tolist"):
        value = value.tolist()
    return [_plain(part) for part in value] if isinstance(value, (list, tuple, range)) else value


def _width(width: int | Mapping[str, Any] | Word) -> Any:
    if isinstance(width, Word):
        count = {} if width.count is None else {"count": width.count}
        return {"bits": width.bits, "signed": width.signed, **count}
    return width


class Build:
    """A built and verified circuit: `cost` holds the counts, `evidence` says how far the check reaches."""

    def __init__(self, built: Built) -> None:
        self._built = built

    @property
    def spec(self) -> Spec:
        """The spec it was built from."""
        return self._built.spec

    @property
    def cost(self) -> dict[str, int | None]:
        """Counts by name, taken from the circuit as written."""
        return dict(self._built.cost)

    @property
    def method(self) -> str:
        """The name of the method that gave the circuit."""
        return by_name(self._built.block.method)["method"]

    @property
    def variant(self) -> str:
        """Which of the method's results it is, in words; empty where there is but one."""
        return by_name(self._built.block.method).get("variant", "")

    @property
    def evidence(self) -> Evidence:
        """What verification did."""
        return self._built.evidence

    @property
    def cascade(self) -> Cascade:
        """The reduced cascade before lowering: inputs, outputs, keep, work lines in this order."""
        return self._built.block.cascade

    @property
    def circuit(self) -> Circuit:
        """The circuit as written."""
        return self._built.circuit

    @property
    def oracle(self) -> Oracle:
        """The form of the block."""
        return self._built.oracle

    @property
    def stopped_early(self) -> bool:
        """Whether a time limit ended the search: another run may find better."""
        return self._built.stopped_early

    @property
    def warnings(self) -> tuple[str, ...]:
        """What the spec may not mean as written."""
        return self._built.understanding.warnings

    @property
    def counts(self) -> dict[str, int | None]:
        """Inputs inside the domain, certainly marked (of predicates), and free; None: not counted."""
        function = self._built.understanding.tabulated
        if function is None:
            return {"domain": self._domain(), "marked": None, "free": None}
        return {
            "domain": count_ones(function.domain),
            "marked": function.marked if self.spec.kind == "predicate" else None,
            "free": function.free,
        }

    def _domain(self) -> int | None:
        """Inputs of a wide spec inside its domain, where no condition makes that a matter of counting."""
        return None if self.spec.domain is not None else 1 << self.spec.input_bits

    @property
    def lower_bound(self) -> dict[str, Any] | None:
        """T gates that any circuit of this form takes, `t` with the reason `why`, and the ANDs where known.

        None for gate sets without T gates, for free values and above 16 inputs.
        """
        function = self._built.understanding.tabulated
        if function is None or self._built.options.gates != "clifford+t":
            return None
        bound = lower_bound(function, self._built.oracle, self._built.options.uncompute)
        return None if bound is None else bound.to_json()

    @property
    def options(self) -> BuildOptions:
        """The options it was built with."""
        return self._built.options

    def text(self, format: Format | None = None) -> str:
        """The OpenQASM text, in the format built or another; another is built from the same options again.

        Raises UsageError where the gate set does not go with the format.
        """
        if format is None or format == self._built.options.format:
            return self._built.text
        return build(self.spec, options=replace(self._built.options, format=format)).text()

    def write(self, path: str | Path) -> None:
        """Write the file whole or not at all; the bytes on disk are compared with what was verified.

        The format `plain` also writes PATH.json with the map from registers to qubits, and for an embedded
        block its placement, unless PATH is a device or a pipe.
        """
        data = self._built.text.encode()
        if self._built.options.format == "plain" and str(path) and is_regular(path):
            placement = describe_placement(self._built.block, self._built.understanding)
            side = {"qubits": self.qubit_map()} | ({} if placement is None else {"placement": placement})
            write_whole(f"{path}.json", (json.dumps(side, indent=2) + "\n").encode())
        write_whole(path, data, self._compare)

    def _compare(self, data: bytes) -> None:
        from revsynth.pipeline import same_gates

        found = read(data.decode(), source=self.spec.source).circuit
        if not same_gates(found, self._built.circuit):
            raise AssertionError("the bytes on disk are not the circuit that was verified")

    def qubit_map(self) -> dict[str, list[int]]:
        """Qubit numbers of every register, index 0 (least significant) first."""
        return {register.name: list(register.members) for register in self._built.circuit.registers}

    def to_json(self) -> dict[str, Any]:
        """The JSON object of the contract, without the key `circuit`, which names a file."""
        built = self._built
        found: dict[str, Any] = {
            "title": self.spec.title,
            "oracle": built.oracle,
            "gates": built.options.gates,
            **by_name(self._built.block.method),
            "inputs": {word.name: word.to_json() for word in self.spec.inputs},
            "registers": built.registers,
            **self.counts,
            "cost": self.cost,
            "evidence": self.evidence.to_json(),
            "lower_bound": self.lower_bound,
            "tried": [trial.to_json() for trial in built.tried],
            "seconds": built.seconds,
        }
        placement = describe_placement(built.block, built.understanding)
        if placement is not None:
            found["placement"] = placement
        if built.options.format == "plain":
            found["qubits"] = self.qubit_map()
        if isinstance(self.spec.body, Predicate) and self.spec.body.free_of is not None:
            found["v_bits"] = [variable - 1 for variable in self.spec.body.free_of.variables]
        if built.stopped_early:
            found["stopped_early"] = True
        if built.understanding.warnings:
            found["warnings"] = list(built.understanding.warnings)
        return found

    def _repr_svg_(self) -> str | None:
        from revsynth.report.circuit_svg import MOST_DRAWN, draw_svg

        circuit = self._built.circuit
        return draw_svg(circuit, title=self.spec.title) if len(circuit) <= MOST_DRAWN else None

    def __repr__(self) -> str:
        cost = self._built.cost
        return (
            f"<Build of {self.spec.source} by {self.method}: {cost['qubits']} qubits, {cost['t']} T, "
            f"evidence {self.evidence.level}>"
        )


def build(
    spec: Spec, *, options: BuildOptions | None = None, progress: Progress | None = None, **words: Any
) -> Build:
    """Build, lower and verify a circuit for `spec`; keywords are the words of `revsynth build`.

    Raises UsageError, BudgetError, UndecidedError, SpecError: all RevsynthError.
    """
    _check_spec(spec)
    if options is None:
        try:
            options = BuildOptions(**words)
        except TypeError as error:
            raise UsageError(f"build: {str(error).rpartition('() ')[2]}") from None
    elif words:
        raise UsageError("build: give either options= or single options, not both")
    return Build(run_pipeline(spec, options, progress or (lambda _: None)))


def verify(
    spec: Spec,
    path: str | Path | None = None,
    *,
    text: str | None = None,
    oracle: Oracle | None = None,
    exact_phase: bool = False,
    negctrl: Any = None,
) -> Verdict:
    """Check an OpenQASM file (or text) from anywhere against a spec; see `Verdict`.

    Raises CircuitFileError for what the reader does not understand, UsageError for missing registers.
    """
    _check_spec(spec)
    program = _program(path, text, negctrl)
    return verify_program(spec, program, oracle=oracle, exact_phase=exact_phase)


def inspect(spec: Spec) -> Analysis | Overview:
    """What the function of a spec is, as far as its width allows; `to_json()` gives plain data.

    Up to 24 input bits all facts are worked out from the table (`Analysis`); wider ones have an `Overview`.
    """
    _check_spec(spec)
    understanding = understand(spec)
    if understanding.tabulated is not None:
        return analyse(understanding)
    understanding, network, _ = structure_of(understanding, BuildOptions())
    if network is None:
        raise UsageError(f"{spec.source}: {spec.input_bits} input bits: there is no network to look at")
    return overview(understanding, network)


def cost(
    path: str | Path | None = None, *, text: str | None = None, negctrl: Any = None
) -> dict[str, int | None]:
    """What an OpenQASM file (or text) costs, by the names of `Build.cost`; gate definitions expanded."""
    return measure(_program(path, text, negctrl).circuit).to_json(ands=None, cascade=None)


def draw(
    path: str | Path | None = None, *, text: str | None = None, title: str = "", negctrl: Any = None
) -> str:
    """The circuit of an OpenQASM file (or text) as an SVG picture."""
    from revsynth.report.circuit_svg import draw_svg

    return draw_svg(_program(path, text, negctrl).circuit, title=title)


def _program(path: str | Path | None, text: str | None, negctrl: Any) -> Program:
    if (path is None) == (text is None):
        raise UsageError("give either a circuit file or text=, not both")
    if path is not None:
        return read_file(str(path), negctrl=negctrl)
    return read(text or "", source="text", negctrl=negctrl)


def _check_spec(spec: Spec) -> None:
    if not isinstance(spec, Spec):
        raise UsageError(
            "a spec is wanted, from revsynth.read_spec, predicate, outputs, truth_table or permutation"
        )
