"""The passes in several orders, each to a fixed point; the best network wins."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass, replace

from revsynth.logic.and_reduction.common_operands import merge_common_operands
from revsynth.logic.and_reduction.conjuncts import propagate_conjuncts
from revsynth.logic.and_reduction.cut_mapping import map_cuts
from revsynth.logic.and_reduction.form_builder import FormBuilder, fits
from revsynth.logic.and_reduction.resubstitution import EXHAUSTIVE, Work, resubstitute
from revsynth.logic.and_reduction.xor_sharing import share_xors
from revsynth.logic.network import Network
from revsynth.logic.network_builder import NetworkBuilder

Progress = Callable[[str], None]
Pass = Callable[[Network], Network]


@dataclass(frozen=True)
class Effort:
    """How much work: rounds of one order of passes, and of conjunct propagation; cuts kept a node, work of
    resubstitution, gates up to which every order is tried, and up to which cuts of five leaves are used;
    whether sums may come first even where a solver has to prove them; steps of conjunct propagation.
    """

    rounds: int
    conjunctions: int
    keep: int
    work: Work | None
    all_orders: int
    five_leaves: int
    always_sums: bool = False
    steps: int = 400_000


XORS_AN_AND = 400
"""An AND less is not worth more XORs than this: sums over all signals could save one AND for thousands."""
LARGE = 50_000
"""Gates from which on a third of the rounds are made."""
SMALL = 300
"""Gates up to which few cuts are kept: small networks are done in milliseconds."""
EFFORTS = {
    "low": Effort(1, 1, 6, Work(2_000_000_000, 200, 100, 50), 0, 0),
    "normal": Effort(3, 3, 10, Work(), 6_000, 120),
    "high": Effort(8, 8, 16, Work(400_000_000_000, 3000, 5000, 2000), 40_000, 5_000, True, 6_000_000),
}


def fewest_ands(
    network: Network,
    *,
    effort: str = "normal",
    care: Network | None = None,
    by_values: bool = True,
    seed: int = 0,
    progress: Progress | None = None,
) -> Network:
    """A network with never more ANDs and the same outputs wherever `care` is 1.

    care: one output; None: everywhere. effort: `low`, `normal` or `high`, a fixed amount of work. by_values:
    whether sums may be looked for in the values of all signals; together with conjunct propagation that may
    go as far as finding the marked inputs of a small predicate, which comparing structures does not want.

    Every rewrite is proved: see the passes. Of equal numbers of ANDs the fewest XORs, then the least depth in
    ANDs win; an AND is never saved for more than XORS_AN_AND XORs. Raises ValueError for another effort or a
    `care` of another shape.
    """
    if effort not in EFFORTS:
        raise ValueError(f"effort {effort!r}: one of {', '.join(EFFORTS)}")
    if care is not None and (care.inputs, len(care.outputs)) != (network.inputs, 1):
        raise ValueError("care must have the inputs of the network and one output")
    limits = EFFORTS[effort] if by_values else replace(EFFORTS[effort], work=None)
    start = _copied(network)
    best = min(network.reachable(), start, key=_score)
    if best.ands < 2 and best.xors < 2:
        return best
    for name, order in _orders(start, limits, care, seed):
        found = _repeated(start, order, limits.rounds)
        if progress is not None:
            progress(f"{name}: {found.ands} ANDs")
        best = min(best, found, key=_score)
    best = min(best, share_xors(best), key=_score)
    for _ in range(limits.conjunctions):
        found = _assumed(best, limits, care, seed)
        if progress is not None and found is not best:
            progress(f"terms of conjunctions assumed: {found.ands} ANDs")
        if _score(found) >= _score(best):
            break
        best = found
    return best if best.ands <= start.ands else start


def _assumed(network: Network, limits: Effort, care: Network | None, seed: int) -> Network:
    """Conjunct propagation and then all orders of passes; the network itself where no term can assume any."""
    start = propagate_conjuncts(network, care, most_steps=limits.steps)
    if start is network:
        return network
    best = start
    for _, order in _orders(start, limits, care, seed):
        best = min(best, _repeated(start, order, limits.rounds), key=_score)
    return min(best, share_xors(best), key=_score)


def _score(network: Network) -> tuple[int, int, int]:
    """Smaller is better: an AND weighs as much as XORS_AN_AND XORs, and then the depth in ANDs counts."""
    weight = XORS_AN_AND * network.ands + network.xors
    return weight, network.ands, int(network.and_depth().max(initial=0))


def _copied(network: Network) -> Network:
    """The network with equal sums and products merged."""
    builder = FormBuilder(network.inputs) if fits(network) else NetworkBuilder(network.inputs)
    return builder.build(builder.copy(network, [2 * i for i in range(1, network.inputs + 1)]))


def _orders(
    network: Network, limits: Effort, care: Network | None, seed: int
) -> Sequence[tuple[str, list[Pass]]]:
    """Orders of passes worth trying on a network of this size."""

    def linear(given: Network) -> Network:
        return given if limits.work is None else resubstitute(given, care=care, work=limits.work, seed=seed)

    def cuts(k: int) -> Pass:
        keep = limits.keep if network.gates > SMALL else min(limits.keep, 6)
        return lambda given: map_cuts(given, k=k, keep=keep)

    common: Pass = merge_common_operands
    orders: list[tuple[str, list[Pass]]] = [("cuts first", [cuts(4), linear, common])]
    if network.gates <= limits.all_orders and (network.inputs <= EXHAUSTIVE or limits.always_sums):
        orders.append(("sums first", [linear, common, cuts(4)]))
    if network.gates <= limits.five_leaves:
        orders.append(("wide cuts first", [cuts(5), linear, common]))
    return orders


def _repeated(network: Network, order: list[Pass], rounds: int) -> Network:
    """The passes in this order until a round brings nothing; the best network met."""
    best = network
    for _ in range(rounds if network.gates < LARGE else max(rounds // 3, 1)):
        present = best
        before = _score(best)
        for step in order:
            present = step(present)
            best = min(best, present, key=_score)
        if _score(best) >= before:
            break
    return best
