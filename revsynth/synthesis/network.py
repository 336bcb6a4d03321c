"""Synthesis from an AND-XOR network: every AND on a scratch line, sums in place, a mirror to clean up.

Source: computing, copying out and uncomputing: Bennett, "Logical reversibility of computation", IBM Journal
of Research and Development 17, 1973. An AND on a clean line takes 4 T, and its erasure none where scratch is
measured: Jones 2013; Gidney, Quantum 2, 2018 (see `lowering.and_gate`).
"""

from __future__ import annotations

from revsynth.logic.network import Network
from revsynth.options import Oracle
from revsynth.synthesis.interface import Block, Progress, Task, silent
from revsynth.synthesis.scratch import homes, linear_state
from revsynth.synthesis.scratch.blocks import block_of
from revsynth.synthesis.scratch.from_table import network_function
from revsynth.synthesis.scratch.landing import Landing, landed
from revsynth.synthesis.scratch.plan import hold_everything
from revsynth.synthesis.scratch.units import Units, units_of

MOST_TABLE_INPUTS = 16
"""Tables of more inputs are not turned into networks here."""
LAZY_ANDS = 3_000
"""Up to so many ANDs the invertible linear state is tried, whose work grows with their square."""


class FromNetwork:
    """The method `network`."""

    name = "network"

    def unfit(self, task: Task) -> str | None:
        """Why a network cannot serve the task."""
        if task.oracle in ("inplace", "embedded"):
            return f"a network leaves its inputs as they are, so nothing can be '{task.oracle}'"
        if task.oracle == "phase" and task.outputs != 1:
            return f"a phase oracle of a network needs one output bit, not {task.outputs}"
        if task.network is None and task.inputs > MOST_TABLE_INPUTS:
            return f"a table of more than {MOST_TABLE_INPUTS} inputs is not turned into a network"
        least = task.inputs + (0 if task.oracle == "phase" else task.outputs)
        if task.lines is not None and least > task.lines:
            return f"a network needs {least} lines before any scratch, {task.lines} allowed"
        return None

    def synthesise(self, task: Task, progress: Progress = silent) -> list[Block]:
        """Blocks of one network with different numbers of lines and CNOTs, the better guess first."""
        function = network_function(task.function) if task.network is None else task.network
        network = function.values.reachable()
        progress(f"network: placing {network.ands} ANDs and {network.xors} XORs on lines")
        blocks = held_blocks(network, task.oracle, positive=task.controls == "positive")
        return [block for block in blocks if task.lines is None or block.cascade.lines <= task.lines]


NETWORK = FromNetwork()


def held_blocks(network: Network, oracle: Oracle, positive: bool) -> list[Block]:
    """The network with every AND held until the mirror, sums placed in different ways."""
    blocks = []
    for threshold in (2, 3):
        units, landing = _for_oracle(units_of(network, threshold), oracle)
        sheet = homes.carry_out(units, hold_everything(units).operations, landing, oracle == "phase")
        blocks.append(block_of(sheet, units, oracle, "network, hold", positive))
    if network.ands <= LAZY_ANDS:
        units, landing = _for_oracle(units_of(network, None), oracle)
        operations = hold_everything(units).operations
        for hinted in (False, True):
            sheet = linear_state.carry_out(units, operations, landing, oracle == "phase", hinted=hinted)
            blocks.append(block_of(sheet, units, oracle, "network, lazy", positive))
    return blocks


def _for_oracle(units: Units, oracle: Oracle) -> tuple[Units, Landing]:
    if oracle in ("fresh", "compute"):
        return landed(units, keep=oracle == "compute")
    return units, Landing()
