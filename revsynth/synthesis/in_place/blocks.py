"""From a program to blocks: with the fewest T gates, and on few lines."""

from __future__ import annotations

from dataclasses import replace

from revsynth.errors import BudgetError
from revsynth.logic.in_place_program import Program, ProgramStep, Xor
from revsynth.logic.network import Network
from revsynth.synthesis.in_place.operations import carry_out
from revsynth.synthesis.in_place.sheet import Sheet
from revsynth.synthesis.in_place.sources import Sources, Style, xor_network
from revsynth.synthesis.interface import Block, Progress, Task, silent


def in_place_blocks(task: Task, progress: Progress = silent) -> list[Block]:
    """Blocks of the task's program, the better guess for the aim first.

    Raises BudgetError where none fits `task.lines`, ValueError where the task has no program.
    """
    if task.program is None:
        raise ValueError("the task has no program")
    progress(f"network: reducing the networks of {len(task.program.steps)} steps")
    program = _reduced(task.program, task, progress)
    found: list[Block] = []
    for narrow, name in ((False, "network, in steps"), (True, "network, in steps on few lines")):
        progress(f"{name}: placing on lines")
        block = _block(program, Style(narrow, task.effort, task.seed), name, task.controls == "positive")
        if not any(block.cascade == other.cascade for other in found):
            found.append(block)
    fitting = [block for block in found if task.lines is None or block.cascade.lines <= task.lines]
    if not fitting:
        least = min(block.cascade.lines for block in found)
        raise BudgetError(
            f"the steps need {least} lines with the plans that were tried, {task.lines} allowed"
        )
    if task.aim == "qubits":
        fitting.sort(key=lambda block: block.cascade.lines)
    return fitting


def _reduced(program: Program, task: Task, progress: Progress) -> Program:
    """The same program, its networks with as few ANDs as is known how; equal networks are reduced once."""
    known: dict[bytes, Network] = {}
    steps: list[ProgramStep] = []
    for step in program.steps:
        network = step.sources
        if network.ands:
            arrays = (network.is_xor, network.left, network.right, network.outputs)
            key = b"/".join(array.tobytes() for array in arrays)
            if key not in known:
                known[key] = _fewer(network, task, progress)
            step = replace(step, sources=known[key])
        steps.append(step)
    return replace(program, steps=tuple(steps))


def _fewer(network: Network, task: Task, progress: Progress) -> Network:
    from revsynth.logic.and_reduction import fewest_ands

    return fewest_ands(network, effort=task.effort, seed=task.seed, progress=progress).reachable()


def _block(program: Program, style: Style, name: str, positive: bool) -> Block:
    sheet = Sheet(program.bits)
    for step in program.steps:
        only = step.operations[0] if len(step.operations) == 1 else None
        if isinstance(only, Xor):
            chosen = step.sources.select(only.sources)
            xor_network(sheet, chosen, sheet.lines_of(only.target), style)
            continue
        sources = Sources(sheet, step.sources, style)
        values = sources.enter()
        for operation in step.operations:
            carry_out(operation, sheet, values, style.narrow)
            sheet.check_size()
        sources.leave()
    sheet.bring_home()
    return Block(sheet.cascade(positive), name, inputs=program.bits, work=sheet.lines - program.bits)
