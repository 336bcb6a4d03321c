"""The sources of a step on lines: a network worked out on clean scratch, and taken away again.

What is constant, or a bit of the block itself, needs no scratch. Source: Bennett, "Logical reversibility of
computation", IBM Journal of Research and Development 17, 1973.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, field

import numpy as np

from revsynth.cascade.model import Line
from revsynth.logic.network import Network
from revsynth.options import Effort, Oracle
from revsynth.synthesis.in_place.sheet import FALSE, Sheet, Value, value_of
from revsynth.synthesis.interface import Block
from revsynth.synthesis.scratch.planner import Planner
from revsynth.synthesis.scratch.realise import held, planned


@dataclass(frozen=True)
class Style:
    """How networks and sums are laid out: on as few lines as plans allow, or with the fewest T gates."""

    narrow: bool
    effort: Effort
    seed: int


@dataclass
class Sources:
    """The values of a network's outputs, at hand between `enter` and `leave`."""

    sheet: Sheet
    network: Network
    style: Style
    _start: int = 0
    _end: int = 0
    _lines: list[Line] = field(default_factory=list)

    def enter(self) -> list[Value]:
        """Work them out; one value an output."""
        inner = _inner_nodes(self.network, self.network.outputs.tolist())
        self._start = len(self.sheet.gates)
        on_line: dict[int, Line] = {}
        if inner:
            core, support = restricted(self.network, [2 * node for node in inner])
            form: Oracle = "fresh" if self.style.narrow else "compute"
            block = _block(core, form, self.style)
            outputs = self.sheet.take(len(inner))
            kept = self.sheet.take(block.keep)
            work = self.sheet.take(block.work)
            lines = [*self.sheet.lines_of(support), *outputs, *kept, *work]
            self.sheet.place(block.cascade, lines)
            self.sheet.give(work)
            self._lines = [*outputs, *kept]
            on_line = dict(zip(inner, outputs, strict=True))
        self._end = len(self.sheet.gates)
        return [self._value(literal, on_line) for literal in self.network.outputs.tolist()]

    def _value(self, literal: int, on_line: dict[int, Line]) -> Value:
        node = literal >> 1
        if node == 0:
            return FALSE ^ (literal & 1)
        line = on_line[node] if node in on_line else self.sheet.at(node - 1)
        return value_of(line, bool(literal & 1))

    def leave(self) -> None:
        """Take them away again. What the network reads must be as it was."""
        self.sheet.undo_from(self._start, self._end)
        self.sheet.give(self._lines)


def xor_network(sheet: Sheet, network: Network, target: Sequence[Line], style: Style) -> None:
    """target[i] ^= output i, the last products written straight to the target."""
    literals = network.outputs.tolist()
    inner = set(_inner_nodes(network, literals))
    places = [place for place, literal in enumerate(literals) if literal >> 1 in inner]
    for place, literal in enumerate(literals):
        if literal >> 1 not in inner:
            plain = literal if literal < 2 else value_of(sheet.at((literal >> 1) - 1), bool(literal & 1))
            sheet.xor(target[place], plain)
    if not places:
        return
    core, support = restricted(network, [literals[place] for place in places])
    block = _block(core, "bit", style)
    work = sheet.take(block.work)
    sheet.place(block.cascade, [*sheet.lines_of(support), *(target[place] for place in places), *work])
    sheet.give(work)


def _inner_nodes(network: Network, literals: Sequence[int]) -> list[int]:
    """The gates among the nodes of some literals, each once, in their order."""
    return sorted({literal >> 1 for literal in literals if literal >> 1 > network.inputs})


def restricted(network: Network, outputs: Sequence[int]) -> tuple[Network, list[int]]:
    """The network of some literals over the inputs that it reads alone, and which inputs those are."""
    whole = Network(
        network.inputs, network.is_xor, network.left, network.right, np.array(outputs, dtype=np.int32)
    ).reachable()
    used = whole.used()
    support = [place for place in range(whole.inputs) if used[1 + place]]
    number = np.zeros(whole.nodes, dtype=np.int32)
    number[[1 + place for place in support]] = np.arange(1, len(support) + 1)
    number[1 + whole.inputs :] = np.arange(len(support) + 1, len(support) + 1 + whole.gates)
    moved = [2 * number[part >> 1] + (part & 1) for part in (whole.left, whole.right, whole.outputs)]
    left, right, ends = (part.astype(np.int32) for part in moved)
    return Network(len(support), whole.is_xor, left, right, ends), support


def _block(network: Network, form: Oracle, style: Style) -> Block:
    if style.narrow and network.ands:
        planner = Planner(network, form, style.effort, style.seed)
        plans = planner.best(planner.least_scratch())
        found = [one.block for plan in plans[:1] for one in planned(plan, form)]
        if found:
            return found[0]
    return held(network, form)[0].block
