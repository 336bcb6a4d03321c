"""Runs of gates that touch at most three or four lines, replaced by the optimal ones of a table.

A run ends at a gate and takes up earlier ones on the same lines, however far apart they are: each gate
between either moves out behind the run, or stays before it and lets pass what is taken up later (the moving
rule of Miller, Maslov, Dueck, DAC 2003). Windows with such tables: Shende, Prasad, Markov, Hayes, "Synthesis
of reversible logic circuits", IEEE TCAD 22(6), 2003.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from functools import lru_cache

from revsynth.cascade.model import Cascade
from revsynth.optimal.packed import pack
from revsynth.optimal.short_circuits import short_circuits
from revsynth.optimal.small_tables import MOST_LINES, First, small_table
from revsynth.options import Controls, Uncompute
from revsynth.reduction.masks import Masked, Masks, commute, masked, weigh
from revsynth.reduction.reel import Reel

SHORTEST = 3
"""Gates that a whole cascade has at least: of two the rules know all."""


@dataclass(frozen=True)
class Runs:
    """How far runs go.

    lines: three, where every circuit is known, or four, where those of up to five gates are; reach: gates
    looked at; shortest, longest: gates in a run; choices: of so many lines, for each last gate.
    """

    lines: int
    reach: int
    shortest: int
    longest: int
    choices: int


def replace_runs(
    gates: list[Masks], fresh: Sequence[bool], runs: Runs, controls: Controls, uncompute: Uncompute
) -> tuple[list[Masks], list[bool]]:
    """The gates once no run can be replaced by a cheaper one; and which of them this pass has changed.

    Cheaper is (gates, T, literals) in this order, with no more gates and no more T; so it ends. Phase gates
    are in no run. Time is proportional to the gates and changes, times reach and choices.
    """
    reel = Reel(gates, fresh)
    while reel.advance():
        if reel.is_settled(runs.reach):
            continue
        found = _cheaper(reel.done, runs, controls, uncompute)
        if found is not None:
            reel.replace(*found)
    return reel.done, reel.changed()


def whole_optimum(
    gates: list[Masks], lines: int, controls: Controls, uncompute: Uncompute
) -> list[Masks] | None:
    """The cheapest gates of a whole cascade on few lines, the same list where it is as cheap.

    None where the table cannot tell: for more than three lines, less gates than a run has, phase gates, what
    may not be turned but waits for 0, or where the fewest gates take more T.
    """
    if lines > MOST_LINES or len(gates) < SHORTEST:
        return None
    if not all(gate[0] and (controls == "mixed" or not gate[2]) for gate in gates):
        return None
    better = _from_table(tuple(gates), lines, controls, "gates")
    before, after = weigh(gates, uncompute), weigh(better, uncompute)
    if after.t > before.t:
        return None
    return list(better) if after < before else gates


def _cheaper(
    done: list[Masks], runs: Runs, controls: Controls, uncompute: Uncompute
) -> tuple[int, list[Masks]] | None:
    """From which gate on to replace, and by what, so that a run with the last gate gets cheaper."""
    if not done[-1][0]:
        return None
    for lines in _line_choices(done, runs):
        start, before, run, behind = _run(done, lines, runs)
        if len(run) < runs.shortest:
            continue
        better = _on_lines(run, lines, controls, uncompute)
        if better is not None:
            return start, [*before, *better, *behind]
    return None


def _line_choices(done: list[Masks], runs: Runs) -> list[int]:
    """Masks of lines, few enough, that the last gate and gates before it are on, nearest ones first."""
    own = _lines(done[-1])
    if own.bit_count() > runs.lines:
        return []
    found: list[int] = []
    open_ = own
    for index in range(len(done) - 2, max(len(done) - 2 - runs.reach, -1), -1):
        gate = done[index]
        lines = _lines(gate)
        if not gate[0] or not lines & own:
            continue
        if (open_ | lines).bit_count() <= runs.lines:
            open_ |= lines
        joined = own | lines
        if joined.bit_count() == runs.lines and joined not in found:
            found.append(joined)
            if len(found) == runs.choices:
                break
    if open_ not in found:
        found.insert(0, open_)
    return found[: runs.choices]


def _lines(gate: Masks) -> int:
    return gate[0] | gate[1] | gate[2]


def _run(done: list[Masks], lines: int, runs: Runs) -> tuple[int, list[Masks], Masked, list[Masks]]:
    """The first gate's index, the gates before the run, the run, and the gates behind it.

    All that the gates of `done` from that index on do is done by these three in turn.
    """
    run = [done[-1]]
    before: list[Masks] = []
    behind: list[Masks] = []
    start, kept = len(done) - 1, (0, 0)
    for index in range(start - 1, max(start - 1 - runs.reach, -1), -1):
        gate = done[index]
        is_free = all(commute(gate, other) for other in before)
        if gate[0] and not _lines(gate) & ~lines:
            if is_free:
                run.append(gate)
                start, kept = index, (len(before), len(behind))
                if len(run) == runs.longest:
                    break
                continue
            before.append(gate)
        elif is_free and all(commute(gate, other) for other in run):
            behind.append(gate)
        else:
            before.append(gate)
    # What was looked at before the run's first gate stays where it is.
    return start, before[: kept[0]][::-1], tuple(reversed(run)), behind[: kept[1]][::-1]


def _on_lines(run: Masked, lines: int, controls: Controls, uncompute: Uncompute) -> list[Masks] | None:
    """The cheaper form of a run on its lines; the same run on other lines has the same answer."""
    bits = []
    while lines:
        bits.append(lines & -lines)
        lines &= lines - 1
    narrow = tuple(
        (_narrowed(target, bits), _narrowed(positive, bits), _narrowed(negative, bits))
        for target, positive, negative in run
    )
    better = _optimum(narrow, len(bits), controls, uncompute)
    if better is None:
        return None
    return [
        (_widened(target, bits), _widened(positive, bits), _widened(negative, bits))
        for target, positive, negative in better
    ]


def _narrowed(mask: int, bits: Sequence[int]) -> int:
    return sum(1 << place for place, bit in enumerate(bits) if mask & bit)


def _widened(mask: int, bits: Sequence[int]) -> int:
    return sum(bit for place, bit in enumerate(bits) if mask >> place & 1)


@lru_cache(maxsize=1 << 15)
def _optimum(run: Masked, lines: int, controls: Controls, uncompute: Uncompute) -> Masked | None:
    """The cheapest sequence known that does the same, None where none is cheaper than the run."""
    weight = weigh(run, uncompute)
    if lines > MOST_LINES:
        table = short_circuits(controls, uncompute)
        found = table.cheaper(pack(_images(run, lines)), *weight)
        return None if found is None else tuple(masked(Cascade.from_gates(lines, found)))
    orders: tuple[First, First] = ("gates", "toffolis")
    for first in orders:
        better = _from_table(run, lines, controls, first)
        after = weigh(better, uncompute)
        if after.gates <= weight.gates and after.t <= weight.t:
            return better if after < weight else None
    return None


def _from_table(run: Masked, lines: int, controls: Controls, first: First) -> Masked:
    table = small_table(lines, controls, first)
    return tuple(masked(table.cascade(table.index(_images(run, lines)))))


def _images(run: Masked, lines: int) -> list[int]:
    images = list(range(1 << lines))
    for gate in run:
        acts = _action(gate, lines)
        images = [acts[x] for x in images]
    return images


@lru_cache(maxsize=1 << 10)
def _action(gate: Masks, lines: int) -> tuple[int, ...]:
    target, positive, negative = gate
    return tuple(
        x ^ target if x & positive == positive and not x & negative else x for x in range(1 << lines)
    )
