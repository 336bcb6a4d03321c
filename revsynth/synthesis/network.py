"""Synthesis from an AND-XOR network: every AND on a scratch line, sums in place, a mirror to clean up.

Source: computing, copying out and uncomputing: Bennett, "Logical reversibility of computation", IBM Journal
of Research and Development 17, 1973. An AND on a clean line takes 4 T, and its erasure none where scratch is
measured: Jones 2013; Gidney, Quantum 2, 2018 (see `lowering.and_gate`).
"""

from __future__ import annotations

from dataclasses import replace

from revsynth.embed.multiplicity import bounded_multiplicity
from revsynth.errors import BudgetError
from revsynth.logic.network import Network
from revsynth.options import Aim, Effort, Oracle
from revsynth.synthesis.in_place import in_place_blocks
from revsynth.synthesis.interface import Block, Progress, Task, silent
from revsynth.synthesis.scratch.blocks import cnots
from revsynth.synthesis.scratch.curve import curve
from revsynth.synthesis.scratch.from_table import network_function
from revsynth.synthesis.scratch.planner import SMALL_ANDS, Planner
from revsynth.synthesis.scratch.realise import Point, held, planned
from revsynth.synthesis.there_and_back import MAX_LINES as MOST_LINES_BACK
from revsynth.synthesis.there_and_back import there_and_back, without_idle_lines

MOST_TABLE_INPUTS = 16
"""Tables of more inputs are not turned into networks here."""
SEARCHED_GATES = 6_000
"""Up to so many gates ANDs are reduced by all means, above by mapping cuts alone, which takes seconds."""
XORS_AN_AND = 64
TABLE_INPUTS = 8
"""Tables of up to so many inputs are turned into networks by `logic.tables` too."""


class FromNetwork:
    """The method `network`."""

    name = "network"

    def unfit(self, task: Task) -> str | None:
        """Why a network cannot serve the task."""
        if task.oracle == "inplace" and task.program is not None:
            return None
        if task.oracle == "inplace" and task.tabulated is None:
            return (
                "too wide for a table, a block in place is built from steps, or from a map whose new "
                "values are (a * c + d) % N with a < N all over the domain, or sums modulo 2**bits, XORs and "
                "exchanges"
            )
        if task.oracle == "inplace":
            return _why_not_there_and_back(task)
        if task.oracle == "embedded":
            wide = "; 'embedded' goes up to 24 input bits, by table" if task.tabulated is None else ""
            return f"a network leaves its inputs as they are, so nothing can be 'embedded'{wide}"
        if task.oracle == "phase" and task.outputs != 1:
            return f"a phase oracle of a network needs one output bit, not {task.outputs}"
        if task.network is None and task.inputs > MOST_TABLE_INPUTS:
            return f"a table of more than {MOST_TABLE_INPUTS} inputs is not turned into a network"
        least = _bare_lines(task)
        if task.lines is not None and least > task.lines:
            return f"a network needs {least} lines before any scratch, {task.lines} allowed"
        return None

    def synthesise(self, task: Task, progress: Progress = silent) -> list[Block]:
        """Blocks with different numbers of ANDs, lines and CNOTs, the better guess for the aim first.

        Raises BudgetError where no plan was found that fits `task.lines`.
        """
        if task.oracle == "inplace" and task.program is None:
            return there_and_back(task, self._beside, progress)
        if task.oracle == "inplace":
            return in_place_blocks(task, progress)
        positive = task.controls == "positive"
        networks = candidates(task, progress)
        found: list[Block] = []
        for network in networks if task.aim == "gates" else networks[:1]:
            # What is held at once are all ANDs but those that act straight on the outputs.
            if task.lines is None or task.inputs + network.ands - task.outputs <= task.lines:
                progress(f"network: placing {network.ands} ANDs and {network.xors} XORs on lines")
                found.extend(
                    one.block for one in held(network, task.oracle, positive, _thresholds(network, task))
                )
        if task.lines is not None:
            found = [block for block in found if block.cascade.lines <= task.lines]
        misses: list[int] = []
        for network in networks:
            if not found or (task.aim == "qubits" and network is networks[0]):
                found.extend(self._within(network, task, progress, misses))
        if not found:
            raise BudgetError(
                f"{networks[0].ands} ANDs need at least {min(misses)} lines with the plans that were tried, "
                f"{task.lines} allowed"
            )
        return _worth_it(found, task.aim)

    def _beside(self, task: Task, progress: Progress) -> list[Block]:
        """Blocks of the form `fresh` for half of a permutation, quickly: from its table's network alone.

        The long way is taken where that needs too many lines, or where work is no matter.
        """
        if task.inputs <= TABLE_INPUTS and task.effort != "high":
            from revsynth.logic.tables import table_network

            found = table_network(task.function, effort=task.effort, seed=task.seed, progress=progress)
            for _, network in found[:1]:
                positive = task.controls == "positive"
                blocks = [without_idle_lines(one.block) for one in held(network, task.oracle, positive)]
                if task.aim in ("t", "qubits"):
                    blocks.sort(key=lambda block: (block.cascade.lines, len(block.cascade)))
                fit = [block for block in blocks if task.lines is None or block.cascade.lines <= task.lines]
                if fit:
                    return fit
        return self.synthesise(task, progress)

    def _within(self, network: Network, task: Task, progress: Progress, misses: list[int]) -> list[Block]:
        """Blocks of plans for the lines allowed; for the aim `qubits` of the fewest lines.

        misses: gets the lines that would be needed, where there is no plan.
        """
        # Outputs of `compute` start in 0 and its garbage may stay: either no mirror is run, and products are
        # added to outputs, or outputs are landed on and everything is cleaned up, which can do with less.
        forms: tuple[Oracle, ...] = ("compute", "fresh") if task.oracle == "compute" else (task.oracle,)
        bare, positive = _bare_lines(task), task.controls == "positive"
        blocks: list[Block] = []
        for form in forms:
            planner = Planner(network, form, task.effort, task.seed)
            scratch = planner.least_scratch() if task.aim == "qubits" else task.lines or 0
            if task.lines is not None:
                scratch = min(scratch, task.lines - bare)
            progress(f"network: planning {network.ands} ANDs on {scratch} scratch lines")
            plans = planner.best(scratch)[: 2 if network.ands <= SMALL_ANDS else 1]
            for plan in plans:
                blocks.extend(one.block for one in planned(plan, form, positive))
            if plans and task.lines is not None:
                blocks.extend(self._with_spare(planner, blocks[-1], scratch, task))
            if not plans:
                misses.append(bare + planner.least_scratch())
        return [block for block in blocks if task.lines is None or block.cascade.lines <= task.lines]

    def _with_spare(self, planner: Planner, block: Block, scratch: int, task: Task) -> list[Block]:
        """Sums take over lines where they can, which plans do not count: a plan for the lines left over."""
        spare = (task.lines or 0) - block.cascade.lines
        if task.aim == "qubits" or spare < max(2, scratch // 50):
            return []
        plans = planner.best(scratch + spare)[:1]
        return [
            one.block for plan in plans for one in planned(plan, planner.oracle, task.controls == "positive")
        ]


NETWORK = FromNetwork()


def trade_off(task: Task, progress: Progress = silent) -> list[Point]:
    """The curve of qubits against T gates for a task, ANDs reduced as in synthesis (see `scratch.curve`).

    A task with `lines` set to the qubits of a point is given a block as good. `task.lines` plays no part.
    """
    network = candidates(task, progress)[0]
    progress(f"network: plans for {network.ands} ANDs from few lines to many")
    return curve(network, task.oracle, task.effort, task.seed)


def candidates(task: Task, progress: Progress = silent) -> list[Network]:
    """The networks to compile, the cheapest first; this is the one place where ANDs are reduced.

    Small tables give networks of their own, whatever the structure of the spec. The network as given is among
    them: its structure may allow fewer lines. An AND weighs as much as XORS_AN_AND XORs, since fewer ANDs at
    the price of any number of XORs are no gain.
    """
    function = network_function(task.function) if task.network is None else task.network
    given = function.values.reachable()
    progress(f"network: reducing {given.ands} ANDs")
    found = [given, _reduced(given, function.care, task, progress)]
    if task.tabulated is not None and task.tabulated.inputs <= TABLE_INPUTS:
        from revsynth.logic.tables import table_network

        # Up to normal effort without what has to be compiled: small work is done in well under a second.
        effort: Effort = "high" if task.effort == "high" else "low"
        quick = replace(task, effort=effort)
        tables = table_network(task.tabulated, effort=effort, seed=task.seed, progress=progress)
        found.extend(_reduced(network, function.care, quick, progress) for _, network in tables[:2])
    found.sort(key=lambda network: network.ands + network.xors / XORS_AN_AND)
    return [network for i, network in enumerate(found) if network not in found[:i]]


def _reduced(network: Network, care: Network | None, task: Task, progress: Progress) -> Network:
    """With as few ANDs as the effort finds, the same wherever `care` is 1."""
    if network.gates <= SEARCHED_GATES:
        from revsynth.logic.and_reduction import fewest_ands

        return fewest_ands(
            network, effort=task.effort, care=care, seed=task.seed, progress=progress
        ).reachable()
    from revsynth.logic.and_reduction.cut_mapping import map_cuts

    return map_cuts(network).reachable()


def _thresholds(network: Network, task: Task) -> tuple[int, ...]:
    """Ways to place sums: of large networks one, where lines do not matter and CNOTs make the difference."""
    few_cnots = network.gates > SEARCHED_GATES and task.lines is None and task.aim != "qubits"
    return (2,) if few_cnots else (2, 3)


def _why_not_there_and_back(task: Task) -> str | None:
    lines = task.inputs
    if lines != task.outputs:
        return f"{lines} input bits but {task.outputs} output bits: not reversible in place"
    if lines > MOST_LINES_BACK:
        return f"tables of more than {MOST_LINES_BACK} lines have networks of too many ANDs"
    if task.lines is not None and 2 * lines > task.lines:
        return f"images beside their inputs need {2 * lines} lines before any scratch, {task.lines} allowed"
    if bounded_multiplicity(task.function)[0] > 1:
        return "not reversible: some inputs must have the same image"
    return None


def _bare_lines(task: Task) -> int:
    return task.inputs + (0 if task.oracle == "phase" else task.outputs)


def _worth_it(blocks: list[Block], aim: Aim) -> list[Block]:
    """The blocks that no other beats in lines, CNOTs and products all at once, the best for the aim first."""

    def measures(block: Block) -> tuple[int, int, int]:
        gates = len(block.cascade)
        ones = cnots(block)
        return gates - ones, ones, block.cascade.lines

    kept: list[tuple[tuple[int, int, int], Block]] = []
    for block in blocks:
        size = measures(block)
        if any(all(a <= b for a, b in zip(other, size, strict=True)) for other, _ in kept):
            continue
        kept = [row for row in kept if not all(a <= b for a, b in zip(size, row[0], strict=True))]
        kept.append((size, replace(block)))
    if aim == "qubits":
        kept.sort(key=lambda row: (row[0][2], row[0]))
    else:
        kept.sort(key=lambda row: row[0])
    return [block for _, block in kept]
