"""What can be said of a function too wide for a table: its network, idle inputs, and some marked inputs."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from typing import Any

from revsynth.elaborate.validity import asked
from revsynth.logic.network import FALSE
from revsynth.logic.network_function import NetworkFunction
from revsynth.one_line import one_line
from revsynth.spec.layout import bit_labels, decode
from revsynth.spec.model import Word
from revsynth.spec.understand import Understanding

SHOWN_INPUTS = 4
CONFLICTS = 200_000
"""Conflicts that the search for each marked input may take."""


@dataclass(frozen=True)
class Overview:
    """What `inspect` shows of a wide spec.

    ands, xors, and_depth: of the network that its expressions become, before any minimisation.
    without_effect: inputs that the network does not read. marked_found: marked inputs of a predicate, found
    by a solver, in words; none_marked: True where it proved that there are none, None where it gave up.
    """

    title: str
    source: str
    kind: str
    inputs: tuple[Word, ...]
    outputs: tuple[Word, ...]
    input_bits: int
    output_bits: int
    condition: str | None
    ands: int
    xors: int
    and_depth: int
    without_effect: tuple[str, ...]
    marked_found: tuple[dict[str, Any], ...]
    none_marked: bool | None
    labels: Mapping[str, str]
    warnings: tuple[str, ...]

    def to_json(self) -> dict[str, Any]:
        """The JSON object of `inspect --json`; counts over all inputs are null."""
        return {
            "title": self.title,
            "kind": self.kind,
            "inputs": {word.name: word.to_json() for word in self.inputs},
            "outputs": {word.name: word.to_json() for word in self.outputs},
            "input_bits": self.input_bits,
            "output_bits": self.output_bits,
            "domain": (1 << self.input_bits) if self.condition is None else None,
            "condition": self.condition,
            "free": None,
            "marked": 0 if self.none_marked else None,
            "marked_found": list(self.marked_found),
            "network": {"ands": self.ands, "xors": self.xors, "and_depth": self.and_depth},
            "affine": self.ands == 0 or None,
            "without_effect": list(self.without_effect),
            "lower_bound": None,
            "labels": dict(self.labels),
            "warnings": list(self.warnings),
        }


def overview(understanding: Understanding, function: NetworkFunction) -> Overview:
    """Look at the network of a wide spec; of predicates, ask a solver for marked inputs."""
    spec = understanding.spec
    network = function.values
    used = network.used()
    names = bit_labels([element for word in spec.inputs for element in word.elements()])
    predicate = spec.kind == "predicate"
    found, none = _marked(understanding, function) if predicate else ((), None)
    return Overview(
        title=spec.title,
        source=spec.source,
        kind=spec.kind,
        inputs=spec.inputs,
        outputs=understanding.outputs if spec.kind == "outputs" else (),
        input_bits=spec.input_bits,
        output_bits=understanding.output_bits,
        condition=spec.domain,
        ands=network.ands,
        xors=network.xors,
        and_depth=int(network.and_depth().max(initial=0)),
        without_effect=tuple(name for i, name in enumerate(names) if not used[i + 1]),
        marked_found=found,
        none_marked=none,
        labels=spec.labels,
        warnings=understanding.warnings,
    )


def _marked(
    understanding: Understanding, function: NetworkFunction
) -> tuple[tuple[dict[str, Any], ...], bool | None]:
    """A few marked inputs, each with another value of some bit; whether there are none at all."""
    if int(function.values.outputs[0]) == FALSE:
        return (), True
    from revsynth.solver import Solver

    found: list[int] = []
    with Solver() as solver:
        inputs = [solver.variable() for _ in range(function.inputs)]
        wanted = [asked(solver, function.values, inputs)]
        if function.care is not None:
            wanted.append(asked(solver, function.care, inputs))
        while len(found) < SHOWN_INPUTS:
            answer = solver.solve(wanted, CONFLICTS)
            if answer is not True:
                none = answer is False and not found
                break
            bits = [solver.value(variable) for variable in inputs]
            found.append(sum(bit << place for place, bit in enumerate(bits)))
            solver.add(-v if bit else v for v, bit in zip(inputs, bits, strict=True))
            none = False
    words = tuple(dict(decode(understanding.spec.inputs, index)) for index in sorted(found))
    return words, True if none else False if found else None


def text(seen: Overview) -> str:
    """The overview laid out for a terminal."""
    return "\n".join(_lines(seen))


def _lines(seen: Overview) -> Iterator[str]:
    kind = {
        "predicate": f"a predicate on {seen.input_bits:,} input bits",
        "outputs": f"{seen.input_bits:,} input bits to {seen.output_bits:,} output bits",
        "permutation": f"a permutation of {seen.input_bits:,} bits",
    }[seen.kind]
    yield f"{one_line(seen.title or seen.source)}: {kind}"
    yield ""
    for head, words in (("Inputs", seen.inputs), ("Outputs", seen.outputs)):
        if words:
            yield head
            yield from (f"  {word.name:<20}{_width(word)}" for word in words)
            yield ""
    yield "Function"
    yield f"  {'too wide for a table':<24}facts about all inputs are not counted"
    yield f"  {'network':<24}{seen.ands:,} ANDs, {seen.xors:,} XORs, {seen.and_depth:,} ANDs deep, as written"
    if seen.condition is not None:
        yield f"  {'domain':<24}{one_line(seen.condition)}"
    if seen.without_effect:
        shown = ", ".join(seen.without_effect[:16])
        more = f" and {len(seen.without_effect) - 16} more" if len(seen.without_effect) > 16 else ""
        yield f"  {'without effect':<24}{shown}{more}"
    if seen.kind == "predicate":
        yield ""
        yield "Marked"
        yield from _marked_lines(seen)


def _marked_lines(seen: Overview) -> Iterator[str]:
    if seen.none_marked:
        yield "  nothing: a solver proved that no input is marked"
    elif not seen.marked_found:
        yield "  unknown: the solver found no marked input within its limit"
    for values in seen.marked_found:
        yield "  " + ", ".join(f"{name} = {value}" for name, value in values.items())
    if seen.marked_found:
        yield "  found by a solver: not how many there are, nor the first ones"


def _width(word: Word) -> str:
    sign = ", signed" if word.signed else ""
    count = f"{word.count} words of " if word.count is not None else ""
    return f"{count}{word.bits} bit{'s' if word.bits != 1 else ''}{sign}"
