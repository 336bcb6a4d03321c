"""A block made shorter: the reduction rules, and what the lines of known value make superfluous."""

from __future__ import annotations

from dataclasses import replace

import numpy as np

from revsynth.cascade.model import PHASE, Cascade
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
    cascade = block.cascade
    first_work = cascade.lines - block.work
    touched = np.zeros(cascade.lines, dtype=np.bool_)
    touched[:first_work] = True
    touched[cascade.control >> 1] = True
    touched[cascade.target[cascade.target != PHASE]] = True
    if touched.all():
        return block
    place = np.cumsum(touched, dtype=np.int32) - 1
    target = np.where(cascade.target == PHASE, PHASE, place[cascade.target]).astype(np.int32)
    control = 2 * place[cascade.control >> 1] + (cascade.control & 1)
    kept = int(place[-1]) + 1
    return replace(block, cascade=Cascade(kept, target, cascade.offset, control), work=kept - first_work)
