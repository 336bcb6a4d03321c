"""From the bits of a netlist to the words of a spec: by their names where they tell, else `v` and `f`.

Where all names are of the form `name[i]`, with every i from 0 on, they become words, in the order in which
the words are first named. Otherwise bit i of the file is bit i of `v` (or of `f`), and its name is a label.
"""

from __future__ import annotations

import re
from collections.abc import Sequence

from revsynth.errors import SpecError
from revsynth.spec.model import Output, Outputs, Predicate, Spec, Word
from revsynth.spec.names import why_not_a_name
from revsynth.spec.netlist import MOST_BITS, Netlist
from revsynth.spec.pla import INPUT_WORD, OUTPUT_WORD

_BIT = re.compile(r"([A-Za-z][A-Za-z0-9_]*)\[(0|[1-9][0-9]{0,6})\]", re.ASCII)
Grouped = dict[str, list[int]]
"""By word, the position in the file of each of its bits, bit 0 first."""


def netlist_spec(
    netlist: Netlist,
    input_names: Sequence[str | None],
    output_names: Sequence[str | None],
    source: str,
) -> Spec:
    """The spec of a netlist whose inputs and outputs the file names (None where it does not).

    One output is a predicate. Raises SpecError where there is no input or no output, or too many.
    """
    check_size(len(input_names), len(output_names), source)
    inputs, outputs = _words(input_names), _words(output_names)
    if len(output_names) == 1:
        outputs = None
    else:
        inputs, outputs = _apart(inputs, outputs)
    labels: dict[str, str] = {}
    if inputs is None:
        labels.update(_labels(INPUT_WORD, input_names))
        words: tuple[Word, ...] = (Word(INPUT_WORD, netlist.inputs),)
    else:
        words = tuple(Word(name, len(bits)) for name, bits in inputs.items())
        netlist = netlist.with_inputs([place for bits in inputs.values() for place in bits])
    if len(output_names) == 1:
        return Spec(words, Predicate(netlist=netlist), source=source, labels=labels)
    if outputs is None:
        labels.update(_labels(OUTPUT_WORD, output_names))
        made: tuple[Output, ...] = (Output(OUTPUT_WORD, bits=len(output_names)),)
    else:
        made = tuple(Output(name, bits=len(bits)) for name, bits in outputs.items())
        order = [netlist.outputs[place] for bits in outputs.values() for place in bits]
        netlist = Netlist(netlist.inputs, netlist.gates, tuple(order))
    return Spec(words, Outputs(made, netlist=netlist), source=source, labels=labels)


def check_size(inputs: int, outputs: int, source: str) -> None:
    """Raise SpecError unless a netlist has inputs and outputs, and not too many."""
    for count, what in ((inputs, "input"), (outputs, "output")):
        if count == 0:
            raise SpecError(f"the netlist has no {what}s: an oracle needs at least one", source=source)
        if count > MOST_BITS:
            raise SpecError(f"{count} {what} bits, and at most {MOST_BITS} are taken", source=source)


def _words(names: Sequence[str | None]) -> Grouped | None:
    """The words that the names make, or None where they make none."""
    found: dict[str, dict[int, int]] = {}
    for place, name in enumerate(names):
        match = _BIT.fullmatch(name or "")
        if match is None or why_not_a_name(match[1]) is not None:
            return None
        bits = found.setdefault(match[1], {})
        if int(match[2]) in bits:
            return None
        bits[int(match[2])] = place
    if any(max(bits) != len(bits) - 1 for bits in found.values()):
        return None
    return {word: [bits[bit] for bit in range(len(bits))] for word, bits in found.items()}


def _apart(inputs: Grouped | None, outputs: Grouped | None) -> tuple[Grouped | None, Grouped | None]:
    """Words of inputs and outputs, given up where a name would stand for two of them."""
    if inputs is not None and outputs is not None and any(name in inputs for name in outputs):
        outputs = None
    if outputs is None and inputs is not None and OUTPUT_WORD in inputs:
        inputs = None
    if inputs is None and outputs is not None and INPUT_WORD in outputs:
        outputs = None
    return inputs, outputs


def _labels(word: str, names: Sequence[str | None]) -> dict[str, str]:
    return {f"{word}[{bit}]": name for bit, name in enumerate(names) if name is not None}
