"""A block made shorter: the reduction rules, and what the lines of known value make superfluous."""

from __future__ import annotations

from dataclasses import replace

from revsynth.cascade.model import PHASE, Cascade, Gate
from revsynth.options import BuildOptions, Oracle
from revsynth.reduction import reduce
from revsynth.reduction.known_lines import drop_superfluous
from revsynth.synthesis.interface import Block, Progress, known_lines, silent


def shorten(block: Block, oracle: Oracle, options: BuildOptions, progress: Progress = silent) -> Block:
    """The same block in its oracle form, to the fixed point of both; work lines that are left idle go."""
    known = known_lines(block, oracle)
    cascade = drop_superfluous(block.cascade, known)
    while True:
        reduced = reduce(cascade, controls=options.controls, uncompute=options.uncompute, progress=progress)
        cascade = drop_superfluous(reduced, known)
        if len(cascade) == len(reduced) and len(cascade.control) == len(reduced.control):
            return without_idle_work(replace(block, cascade=cascade))


def without_idle_work(block: Block) -> Block:
    """The block without work lines that no gate touches."""
    touched = {line for gate in block.cascade for line in gate.lines}
    first_work = block.cascade.lines - block.work
    kept = [line for line in range(block.cascade.lines) if line < first_work or line in touched]
    if len(kept) == block.cascade.lines:
        return block
    place = {line: index for index, line in enumerate(kept)}
    moved = (
        Gate(
            PHASE if gate.target == PHASE else place[gate.target],
            tuple(2 * place[c >> 1] + (c & 1) for c in gate.controls),
        )
        for gate in block.cascade
    )
    return replace(block, cascade=Cascade.from_gates(len(kept), moved), work=len(kept) - first_work)
