"""The list of constructions, and the choice of the cheapest that the scratch at hand allows."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from functools import cache
from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from revsynth.circuit.model import Kind
from revsynth.lowering.borrowed_chain import BorrowedChain
from revsynth.lowering.clean_chain import CleanChain
from revsynth.lowering.composites import expansion
from revsynth.lowering.construction import Construction, Needs, Site
from revsynth.lowering.direct import Direct
from revsynth.lowering.draft import Composite, Draft, Template, Tip
from revsynth.lowering.erased_chain import ErasedChain
from revsynth.lowering.fold import Shape
from revsynth.lowering.one_line import OneBorrowedLine, OneCleanLine
from revsynth.options import Aim, GateSet, Uncompute

CONSTRUCTIONS: tuple[Construction, ...] = (
    Direct(),
    CleanChain("tree"),
    CleanChain("ladder"),
    OneCleanLine(),
    BorrowedChain(),
    OneBorrowedLine(),
)
"""Every unitary construction; a new one is a new file and a line here. `ErasedChain` wraps each of them."""


@dataclass(frozen=True)
class Style:
    """What lowering is asked for."""

    gates: GateSet
    uncompute: Uncompute
    aim: Aim
    shape: Shape = "tree"


class Price(NamedTuple):
    """T gates (Toffolis in the gate set `toffoli`), all gates and layers of depth of one template."""

    t: int
    gates: int
    depth: int

    def key(self, aim: Aim) -> tuple[int, int, int]:
        """What to make small first, second and third."""
        if aim == "gates":
            return (self.gates, self.t, self.depth)
        if aim == "depth":
            return (self.depth, self.t, self.gates)
        return (self.t, self.gates, self.depth)


@dataclass(frozen=True)
class Choice:
    """The construction for a gate. The template's qubits: controls, target, clean ones, borrowed ones."""

    construction: Construction
    needs: Needs
    template: Template
    price: Price


@cache
def choose(controls: int, tip: Tip, clean: int, borrowed: int, style: Style) -> Choice | None:
    """The cheapest construction for that many controls and scratch qubits, the first where they tie.

    None where there is none: three or more controls without any scratch.
    """
    best: Choice | None = None
    for construction in _candidates(controls, clean, style):
        needs = construction.needs(controls)
        if needs is None or needs.clean > clean or needs.clean + needs.borrowed > clean + borrowed:
            continue
        price = _price(construction, controls, tip, style)
        if best is None or price.key(style.aim) < best.price.key(style.aim):
            best = Choice(construction, needs, construction_template(construction, controls, tip), price)
    return best


def _candidates(controls: int, clean: int, style: Style) -> Iterator[Construction]:
    """All that can pay. A product more saves T, so for T only the most products, or one less, do."""
    inner = [construction for construction in CONSTRUCTIONS if construction.shape in (None, style.shape)]
    yield from inner
    if style.uncompute == "measured":
        most = min(clean, controls - 1)
        least = 1 if style.aim in ("gates", "depth") else max(most - 1, 1)
        for products in range(most, least - 1, -1):
            yield from (ErasedChain(products, each, style.shape) for each in inner)


@cache
def _price(construction: Construction, controls: int, tip: Tip, style: Style) -> Price:
    return price_of(construction_template(construction, controls, tip), style)


@cache
def construction_template(construction: Construction, controls: int, tip: Tip) -> Template:
    """Write a construction down on local qubits: controls, target, clean, borrowed."""
    needs = construction.needs(controls)
    if needs is None:
        raise ValueError(f"{construction.name} is not made for {controls} controls")
    clean = range(controls + 1, controls + 1 + needs.clean)
    borrowed = range(clean.stop, clean.stop + needs.borrowed)
    draft = Draft()
    construction.write(draft, tip, Site(range(controls), controls, clean, borrowed))
    return draft.template()


@cache
def _gate_price(kind: int, operands: int, style: Style) -> Price:
    """T count (or Toffolis), gates and layers of one gate of a template, written out in the gate set."""
    if operands < 3:
        return Price(int(kind in (Kind.T, Kind.TDG)), 1, 1)
    template = expansion(kind, style.gates, style.uncompute)
    toffoli = style.gates == "toffoli"
    plain = (Kind.X, Kind.Z) if toffoli else (Kind.T, Kind.TDG)
    wanted = [
        k in plain and (n == 3 or not toffoli) for k, n in zip(template.kind, template.count, strict=True)
    ]
    return Price(
        sum(wanted),
        len(template),
        _layers(template.count.tolist(), template.local.tolist(), [1] * len(template)),
    )


def price_of(template: Template, style: Style) -> Price:
    """Count a template; composite gates count as what they stand for, in one block of depth."""
    return price_gates(template.kind, template.count, template.local, style)


def price_gates(
    kind: NDArray[np.uint8], count: NDArray[np.int64], qubit: NDArray[np.integer], style: Style
) -> Price:
    """The same for gates with `count` operands each, on the qubits listed one gate after the other."""
    pairs = zip(kind.tolist(), count.tolist(), strict=True)
    parts = [_gate_price(code, operands, style) for code, operands in pairs]
    return Price(
        sum(part.t for part in parts),
        sum(part.gates for part in parts),
        _layers(count.tolist(), qubit.tolist(), [part.depth for part in parts]),
    )


def _layers(count: list[int], qubit: list[int], duration: list[int]) -> int:
    """Depth as soon as possible, each gate taking that many layers on all its qubits."""
    busy = [0] * (max(qubit, default=0) + 1)
    cursor = 0
    for operands, layers in zip(count, duration, strict=True):
        qubits = qubit[cursor : cursor + operands]
        cursor += operands
        end = max([busy[place] for place in qubits]) + layers
        for place in qubits:
            busy[place] = end
    return max(busy)


def is_composite(kind: int, operands: int) -> bool:
    """Whether a gate is written out by `composites.expansion`."""
    return operands == 3 and (kind in (Kind.X, Kind.Z) or kind >= min(Composite))
