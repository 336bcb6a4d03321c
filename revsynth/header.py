"""The comment lines a circuit file opens with: title, oracle, cost, evidence, options. No path, no time."""

from __future__ import annotations

import json
import shlex
from collections.abc import Iterable
from dataclasses import fields

from revsynth.options import BuildOptions, Oracle
from revsynth.spec.inline import SOURCE as COMMAND_LINE
from revsynth.spec.model import Predicate, Spec
from revsynth.verification.evidence import Evidence

_ACTIONS: dict[Oracle, str] = {
    "phase": "|x>|0> to (-1)^f(x) |x>|0>",
    "bit": "|x>|y>|0> to |x>|y XOR f(x)>|0>",
    "fresh": "|x>|0>|0> to |x>|f(x)>|0>",
    "compute": "|x>|0>|0> to |x>|f(x)>|g(x)>",
    "inplace": "|x>|0> to |p(x)>|0>",
    "embedded": "inputs and presets in, outputs and leftovers out",
}


def canonical_options(spec: Spec, oracle: Oracle, options: BuildOptions) -> str:
    """The command that builds this file again, options in a fixed order, the spec by its base name."""
    defaults = BuildOptions()
    parts = ["revsynth build", *_spec_words(spec), f"--oracle {oracle}"]
    for entry in fields(options):
        value = getattr(options, entry.name)
        if entry.name == "oracle" or value == getattr(defaults, entry.name):
            continue
        name = "--" + entry.name.replace("_", "-")
        parts.append(name if value is True else f"{name} {value}")
    return " ".join(parts)


def _spec_words(spec: Spec) -> list[str]:
    """What stands for the spec on the command line: its base name, or the options that spell it out."""
    if spec.source != COMMAND_LINE or not isinstance(spec.body, Predicate) or spec.body.where is None:
        named = [] if spec.from_format is None else [f"--from {spec.from_format}"]
        if isinstance(spec.body, Predicate) and spec.body.free_of is not None:
            named.append("--free-inputs")
        return ["-" if spec.source == "standard input" else shlex.quote(spec.source), *named]
    words = ["--where", shlex.quote(spec.body.where)]
    for word in spec.inputs:
        count = "" if word.count is None else f"x{word.count}"
        words += ["--input", f"{word.name}={word.bits}{'s' if word.signed else ''}{count}"]
    for name, value in spec.constants.items():
        words += ["--constant", shlex.quote(f"{name}={json.dumps(value)}")]
    if spec.domain is not None:
        words += ["--domain", shlex.quote(spec.domain)]
    return words


def header_lines(
    spec: Spec,
    oracle: Oracle,
    options: BuildOptions,
    *,
    method: str,
    renamed: Iterable[tuple[str, str]],
    placement: Iterable[str],
    cost: dict[str, int | None],
    evidence: Evidence,
    stopped_early: bool,
) -> list[str]:
    """The header of a file, one comment line each; the writer makes them printable."""
    lines = [spec.title] if spec.title else []
    lines.append(f"oracle: {oracle}, {_ACTIONS[oracle]}")
    lines.append("registers: index 0 is the least significant bit")
    lines.extend(f"word {name} is in register {register}" for name, register in renamed if name != register)
    lines.extend(f"bit {bit} is {name}" for bit, name in spec.labels.items())
    lines.extend(placement)
    shown = ("qubits", "work", "t", "toffoli", "cx", "cz", "depth", "t_depth", "measured", "gates")
    lines.append("cost: " + ", ".join(f"{name} {cost[name]}" for name in shown))
    lines.append(
        f"method: {method}" + (" (stopped by the time limit: the best so far)" if stopped_early else "")
    )
    lines.append(f"evidence: {_in_words(evidence)}")
    lines.append(f"made by: {canonical_options(spec, oracle, options)}")
    return lines


def _in_words(evidence: Evidence) -> str:
    words = {
        "exhaustive": f"exhaustive, all {evidence.inputs_checked} inputs checked",
        "proved": "proved by a solver",
        "sampled": f"{evidence.inputs_checked} inputs sampled: not a proof",
        "none": "not verified",
    }
    return words[evidence.level]
