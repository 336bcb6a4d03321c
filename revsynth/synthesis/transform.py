"""The method `transform`: transformation-based synthesis, for every oracle form.

Source: Miller, Maslov, Dueck, "A transformation based algorithm for reversible logic synthesis", DAC 2003.
Reversible functions are synthesised as they are. Others are embedded with the fewest lines: that is the
`embedded` form, and the other forms compute it, take the outputs from it and undo it.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from revsynth.cascade.model import PHASE, Cascade, Gate
from revsynth.embed.in_place import Lines, embed, fewest_lines, placements, tables
from revsynth.embed.multiplicity import bounded_multiplicity
from revsynth.embed.out_of_place import embed_fresh, embed_xor
from revsynth.embed.target import ReversibleTarget, complete
from revsynth.options import Effort
from revsynth.synthesis import lazy
from revsynth.synthesis.exchanges import exchanged
from revsynth.synthesis.interface import Block, Placement, Progress, Task, silent
from revsynth.synthesis.lazy import Variant, transform_lazily
from revsynth.synthesis.relabelled import MAX_LINES, best_cascades, rank_for

NAME = "transform"

LAZY_ROWS = 1 << 14
"""Targets with more rows that matter are completed first."""
UNDONE_ROWS = 1024
UNDONE_LINES = 12
"""Larger functions are not computed in place and undone: other methods do that far better."""
DIRECT_LINES = 8
"""(x, y XOR f(x)) is also synthesised directly up to so many lines; more where nothing else fits."""
DIRECT_ROWS = 64
"""Where only states with y = 0 matter, targets of so few rows are synthesised directly on any lines."""
MOST_DIRECT_LINES = 12

_TRIES: dict[Effort, int] = {"low": 1, "normal": 20, "high": 100}
_ROWS: dict[Effort, int] = {"low": 1, "normal": 1_000, "high": 40_000}
"""Rows times line placements tried, at most (but three placements up to `FEW_ROWS`)."""
FEW_ROWS = 512
BOTH_WAYS_ROWS = 4096
"""With more rows only one direction is tried lazily."""


@dataclass(frozen=True)
class _Candidate:
    """A cascade that embeds the function, with the lines of inputs and outputs."""

    cascade: Cascade
    variant: str
    before: Lines
    after: Lines


class Transform:
    """Transformation-based synthesis (see the module)."""

    name = NAME

    def unfit(self, task: Task) -> str | None:
        """A reason where the function is not reversible as asked, or has too many lines or rows."""
        if task.oracle == "inplace":
            return _why_not_in_place(task)
        if task.oracle == "phase" and task.function.outputs != 1:
            return f"a phase oracle has one output bit, not {task.function.outputs}"
        if max(task.function.inputs, task.function.outputs) > MAX_LINES:
            return f"more than {MAX_LINES} lines: a table of all their states would be too large"
        lines = fewest_lines(task.function)
        if lines > MAX_LINES:
            return f"in place it needs {lines} lines, at most {MAX_LINES} are possible"
        if task.oracle == "embedded":
            return _over_budget(task, lines)
        rows = int(np.count_nonzero(tables(task.function)[1]))
        if rows > UNDONE_ROWS or lines > UNDONE_LINES:
            return (
                f"computed in place and undone it has {rows} rows on {lines} lines; "
                f"at most {UNDONE_ROWS} rows on {UNDONE_LINES} lines are worth it"
            )
        added = 0 if task.oracle == "phase" else task.function.outputs
        direct = task.function.inputs + added
        if added and direct <= MOST_DIRECT_LINES:
            return _over_budget(task, min(direct, lines + added))
        return _over_budget(task, lines + added)

    def synthesise(self, task: Task, progress: Progress = silent) -> list[Block]:
        """Alternatives, best for the aim first. Raises ValueError where `unfit` has a reason."""
        reason = self.unfit(task)
        if reason is not None:
            raise ValueError(reason)
        if task.oracle == "inplace":
            return _in_place(task, progress)
        if task.oracle == "embedded":
            blocks = [_embedded_block(task, one) for one in _embeddings(task, progress)]
            return exchanged(task, blocks, progress)
        blocks = [*_undone(task, progress), *_direct(task, progress)]
        rank = rank_for(task.aim, task.uncompute)
        if task.aim == "qubits":
            return sorted(blocks, key=lambda block: (block.cascade.lines, *rank(block.cascade)))
        return sorted(blocks, key=lambda block: rank(block.cascade))


TRANSFORM = Transform()


def _over_budget(task: Task, lines: int) -> str | None:
    if task.lines is not None and lines > task.lines:
        return f"it needs {lines} lines, {task.lines} allowed"
    return None


def _why_not_in_place(task: Task) -> str | None:
    function = task.function
    if function.inputs != function.outputs:
        return f"{function.inputs} input bits but {function.outputs} output bits: not reversible in place"
    if function.inputs > MAX_LINES:
        return f"{function.inputs} lines are too many: at most {MAX_LINES}"
    values, care = tables(function)
    full = (1 << function.outputs) - 1
    rows = np.flatnonzero(care == full)
    order = rows[np.argsort(values[rows], kind="stable")]
    same = np.flatnonzero(values[order][1:] == values[order][:-1])
    if same.size:
        one, other = int(order[same[0]]), int(order[same[0] + 1])
        return f"not reversible: inputs {one} and {other} have the same image {int(values[one])}"
    half_free = bool(np.any((care != full) & (care != 0)))
    most, exact = bounded_multiplicity(function) if half_free else (1, True)
    if exact and most > 1:
        return "not reversible: no choice of the free output bits gives every input an image of its own"
    return _over_budget(task, function.inputs)


def _in_place(task: Task, progress: Progress) -> list[Block]:
    """The permutation itself; with free images also lazily, and from the other side."""
    places = tuple(range(task.function.inputs))
    target = embed(task.function, task.function.inputs, places, places)
    blocks = _completed(task, target, task.effort, progress)
    if not target.is_complete:
        found = _lazily(task, target, _tries(task, target))
        if found is not None:
            blocks.append(found)
        full = (1 << target.lines) - 1
        if np.all((target.fixed == 0) | (target.fixed == full)):
            found = _lazily(task, target.inverse(), _tries(task, target))
            if found is not None:
                blocks.append((found[0].inverse(), found[1]))
    rank = rank_for(task.aim, task.uncompute)
    blocks.sort(key=lambda one: rank(one[0]))
    made = [Block(cascade, f"{NAME}, {said}", target.lines) for cascade, said in blocks]
    if not made or (target.is_complete and task.effort != "high"):
        return made[:2]
    return exchanged(task, made, progress)


def _completed(
    task: Task, target: ReversibleTarget, effort: Effort, progress: Progress
) -> list[tuple[Cascade, str]]:
    """Cascades of a completion of the target; none where there is no completion."""
    table = complete(target)
    if table is None:
        return []
    progress(f"{NAME}: {len(table)} rows on {target.lines} lines")
    found = best_cascades(
        table,
        positive=task.controls == "positive",
        aim=task.aim,
        uncompute=task.uncompute,
        effort=effort,
        seed=task.seed,
    )
    return [(one.cascade, one.variant) for one in found]


def _lazily(task: Task, target: ReversibleTarget, tries: int) -> tuple[Cascade, str] | None:
    """The best lazy cascade over both ways and several row orders; None where all run into dead ends."""
    if target.lines > lazy.MAX_LINES or target.cared > LAZY_ROWS:
        return None
    positive = task.controls == "positive"
    rank = rank_for(task.aim, task.uncompute)
    random = np.random.default_rng(task.seed)
    best: tuple[Cascade, str] | None = None
    for attempt in range(max(1, tries // 2)):
        flip = 0 if positive or not attempt else int(random.integers(0, 1 << target.lines))
        for both in _ways(task, target):
            cascade = transform_lazily(target, Variant(both, flip), positive=positive)
            if cascade is not None and (best is None or rank(cascade) < rank(best[0])):
                best = (cascade, _said(both))
    return best


def _said(both: bool) -> str:
    return f"{'both ways' if both else 'one way'}, free values chosen on the way"


def _tries(task: Task, target: ReversibleTarget) -> int:
    least = 3 if target.cared <= FEW_ROWS else 1
    return min(_TRIES[task.effort], max(least, _ROWS[task.effort] // max(target.cared, 1)))


def _ways(task: Task, target: ReversibleTarget) -> tuple[bool, ...]:
    """Whether to work from both sides: both answers are tried, or one where rows are many or effort low."""
    return (False,) if task.effort == "low" or target.cared > BOTH_WAYS_ROWS else (True, False)


def _embeddings(task: Task, progress: Progress) -> list[_Candidate]:
    """All embeddings met with the fewest lines, best for the aim first: several line placements, lazily.

    Where lazy synthesis does not fit or meets only dead ends, a completion is synthesised instead.
    """
    function = task.function
    lines = fewest_lines(function)
    rank = rank_for(task.aim, task.uncompute)
    positive = task.controls == "positive"
    random = np.random.default_rng(task.seed)
    found: list[_Candidate] = []
    places: tuple[Lines, Lines] | None = None
    tries = _TRIES[task.effort]
    for attempt, (before, after) in enumerate(placements(function, lines, tries, task.seed)):
        target = embed(function, lines, before, after)
        places = places or (before, after)
        if lines > lazy.MAX_LINES or target.cared > LAZY_ROWS or attempt >= _tries(task, target):
            break
        if attempt % 8 == 0:
            progress(f"{NAME}: line placement {attempt + 1} of {min(tries, _tries(task, target))}")
        flips = [0] if positive or attempt < 3 else [0, int(random.integers(0, 1 << lines))]
        for flip in flips:
            for both in _ways(task, target):
                cascade = transform_lazily(target, Variant(both, flip), positive=positive)
                if cascade is not None:
                    found.append(_Candidate(cascade, _said(both), before, after))
    if not found and places is not None:
        target = embed(function, lines, *places)
        for cascade, said in _completed(task, target, "low", progress):
            found.append(_Candidate(cascade, said, *places))
    return sorted(found, key=lambda one: rank(one.cascade))


def _embedded_block(task: Task, found: _Candidate) -> Block:
    lines = found.cascade.lines
    preset = tuple((line, 0) for line in range(lines) if line not in found.before)
    placement = Placement(found.before, preset, found.after)
    return Block(found.cascade, f"{NAME}, {found.variant}", lines, placement=placement)


def _undone(task: Task, progress: Progress) -> list[Block]:
    """Compute in place, take the outputs (or their sign) from there, undo."""
    inputs, outputs = task.function.inputs, task.function.outputs
    added = 0 if task.oracle == "phase" else outputs
    extra = fewest_lines(task.function) - inputs
    if task.lines is not None and inputs + added + extra > task.lines:
        return []
    blocks = []
    several = 2 if task.effort == "high" else 1
    for found in _embeddings(task, progress)[:several]:
        width = inputs + added + extra
        place = [0] * found.cascade.lines
        spare = iter(range(inputs + added, width))
        for bit, line in enumerate(found.before):
            place[line] = bit
        for line in range(found.cascade.lines):
            if line not in found.before:
                place[line] = next(spare)
        compute = found.cascade.on_lines(width, tuple(place))
        if task.oracle == "phase":
            act = [Gate(PHASE, (2 * place[found.after[0]],))]
        else:
            act = [Gate(inputs + bit, (2 * place[line],)) for bit, line in enumerate(found.after)]
        whole = compute + Cascade.from_gates(width, act) + compute.inverse()
        name = f"{NAME}, {found.variant}, undone"
        blocks.append(Block(whole, name, inputs, added, work=extra))
    return blocks


def _direct(task: Task, progress: Progress) -> list[Block]:
    """(x, y) to (x, y XOR f(x)) as one reversible target, of few lines or where nothing else fits."""
    function = task.function
    lines = function.inputs + function.outputs
    if task.oracle == "phase" or lines > MOST_DIRECT_LINES:
        return []
    undone = function.outputs + fewest_lines(function)
    few = task.oracle != "bit" and 1 << function.inputs <= DIRECT_ROWS
    if lines > DIRECT_LINES and not few and (task.lines is None or undone <= task.lines):
        return []
    if task.oracle == "bit":
        found = _completed(task, embed_xor(function), task.effort, progress)
    else:
        target = embed_fresh(function)
        lazily = _lazily(task, target, _tries(task, target))
        found = [lazily] if lazily is not None else _completed(task, target, "low", progress)
    return [
        Block(cascade, f"{NAME}, {said}, out of place", function.inputs, function.outputs)
        for cascade, said in found
    ]
