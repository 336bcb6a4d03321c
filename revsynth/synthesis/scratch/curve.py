"""The trade of lines against T gates: the best plans found over all budgets."""

from __future__ import annotations

from revsynth.logic.network import Network
from revsynth.options import Effort, Oracle
from revsynth.synthesis.scratch.planner import Planner
from revsynth.synthesis.scratch.realise import LAZY_ANDS, Point, held, planned

STEPS = 24
"""Budgets at which the curve is taken, at most; a third of it for large networks."""


def curve(network: Network, oracle: Oracle, effort: Effort = "normal", seed: int = 0) -> list[Point]:
    """Points of which no other has both fewer qubits and fewer T gates (measured), fewest qubits first.

    Where another plan has fewer CNOTs than the last of these, that of the fewest comes behind.

    oracle: `phase`, `bit`, `fresh` or `compute`. A task with `lines` set to a point's qubits gives a block as
    good.
    """
    planner = Planner(network.reachable(), oracle, effort, seed)
    base = network.inputs + (0 if oracle == "phase" else len(network.outputs))
    found = [one.point(oracle) for one in held(network.reachable(), oracle)]
    most = min(point.qubits for point in found) - base
    least = planner.least_scratch()
    steps = STEPS if network.ands <= LAZY_ANDS else STEPS // 3
    budgets = sorted({round(least + (most - 1 - least) * i / max(1, steps - 1)) for i in range(steps)})
    for scratch in budgets:
        for one in planner.best(scratch)[:1]:
            found.extend(block.point(oracle) for block in planned(one, oracle))
    kept: list[Point] = []
    for point in sorted(found, key=lambda point: (point.qubits, point.t_measured, point.cnots)):
        if not kept or point.t_measured < kept[-1].t_measured:
            kept.append(point)
    last = min(found, key=lambda point: (point.cnots, point.t_measured, point.qubits))
    return kept if last.cnots >= kept[-1].cnots else [*kept, last]
