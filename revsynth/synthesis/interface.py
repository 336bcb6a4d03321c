"""What every synthesis method is given and gives back.

A method is a module in this package with a class that has `name`, `unfit` and `synthesise`, and one line in
`revsynth.synthesis.METHODS`. Methods know nothing of each other, of files, or of lowering.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from typing import Protocol

from revsynth.cascade.model import Cascade, Line
from revsynth.logic.function import Function
from revsynth.logic.in_place_program import Program
from revsynth.logic.network_function import NetworkFunction
from revsynth.options import Aim, Controls, Effort, Oracle, Uncompute

Progress = Callable[[str], None]
"""Called now and then with a short line on how far the work is."""


def silent(_: str) -> None:
    """A progress that says nothing."""


@dataclass(frozen=True)
class Task:
    """What is to be synthesised.

    tabulated: the function as a table, None where it is too wide for one. network: the same function by its
    structure, None where only the table is at hand. program: the same, for a permutation that is given step
    by step, or whose arithmetic is known to work in place. One of the three is there.
    any_order: the outputs of an `inplace` block may be on other lines, as its placement says.
    `lines` is the most lines the cascade may use (None: as many as it likes); lowering may need more.
    """

    tabulated: Function | None
    oracle: Oracle
    controls: Controls = "mixed"
    uncompute: Uncompute = "unitary"
    aim: Aim = "t"
    effort: Effort = "normal"
    seed: int = 0
    lines: int | None = None
    network: NetworkFunction | None = None
    program: Program | None = None
    any_order: bool = False

    @property
    def function(self) -> Function:
        """The function as a table; raises ValueError where it is too wide for one."""
        if self.tabulated is None:
            raise ValueError("the function is too wide for a table")
        return self.tabulated

    @property
    def inputs(self) -> int:
        """Input bits."""
        if self.program is not None:
            return self.program.bits
        return self.function.inputs if self.network is None else self.network.inputs

    @property
    def outputs(self) -> int:
        """Output bits."""
        if self.program is not None:
            return self.program.bits
        return self.function.outputs if self.network is None else self.network.outputs


@dataclass(frozen=True)
class Placement:
    """Which line of an `embedded` block holds what (or of an `inplace` one, outputs in any order).

    before: input bit i of the function sits on line before[i]; preset: lines that must start in 0 or 1;
    after: output bit j of the function is on line after[j] at the end; the other lines hold garbage.
    """

    before: tuple[Line, ...]
    preset: tuple[tuple[Line, int], ...]
    after: tuple[Line, ...]


@dataclass(frozen=True)
class Block:
    """A cascade and what its lines are for, in this order: inputs, outputs, keep, work.

    `phase`: inputs, then work. `bit`, `fresh`, `compute`: inputs 0 ... n-1, outputs n ... n+m-1, then the
    `keep` lines, then work. `inplace`: the n lines, then work. `embedded`: all lines count as inputs, and
    `placement` says which is which. Work lines start and end in 0 (so do outputs in `fresh` and `compute`
    start in 0, and keep lines). `method` names the method and its variant, such as `transform, both ways`.
    """

    cascade: Cascade
    method: str
    inputs: int
    outputs: int = 0
    keep: int = 0
    work: int = 0
    placement: Placement | None = None

    def __post_init__(self) -> None:
        if self.inputs + self.outputs + self.keep + self.work != self.cascade.lines:
            raise ValueError(f"{self.method}: the roles do not add up to {self.cascade.lines} lines")


def known_lines(block: Block, oracle: Oracle) -> dict[Line, int]:
    """The lines that the oracle form promises to start in 0 (or, preset, in 1), with that value."""
    lines = block.cascade.lines
    outputs = range(block.inputs, block.inputs + block.outputs)
    keep = range(outputs.stop, outputs.stop + block.keep)
    known = dict.fromkeys(range(lines - block.work, lines), 0)
    if oracle in ("fresh", "compute"):
        known |= dict.fromkeys((*outputs, *keep), 0)
    if block.placement is not None:
        known |= dict(block.placement.preset)
    return known


class Method(Protocol):
    """One way of synthesis."""

    name: str

    def unfit(self, task: Task) -> str | None:
        """Why the method cannot serve this task, in words for the user; None where it can."""

    def synthesise(self, task: Task, progress: Progress = silent) -> list[Block]:
        """One block or several alternatives, best guess first; deterministic for a task."""
