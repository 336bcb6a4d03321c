"""The look-back pass: every gate is brought next to earlier ones on its target; what gets cheaper is done.

A gate meets an earlier one if each gate between them can get out of the way: either the newer one passes it,
or the earlier one does.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from revsynth.reduction.masks import Masks, apart
from revsynth.reduction.reel import Reel
from revsynth.reduction.rewriting import Rewriter
from revsynth.reduction.rules import MOST_APART
from revsynth.reduction.rules.moving import cross


@dataclass(frozen=True)
class Look:
    """How far a gate looks back: at most so many gates, and so many that stay between."""

    reach: int
    between: int


def look_back(
    gates: list[Masks], fresh: Sequence[bool], look: Look, rewriter: Rewriter
) -> tuple[list[Masks], list[bool]]:
    """The gates once no gate has an earlier one to gain from; and which of them this pass has changed.

    `fresh`: which gates are new since the last such pass; only what is near them is looked at. After a change
    the gates from there on are looked at again, so one pass ends at a fixed point. Time is proportional to
    gates plus changes, times `reach` and `between`. An empty result with a change has no marks to show.
    """
    reel = Reel(gates, fresh)
    while reel.advance():
        if reel.is_settled(look.reach):
            continue
        start, after = _meet(reel.done, look, rewriter)
        if after is not None:
            reel.replace(start, after)
    return reel.done, reel.changed()


def _meet(done: list[Masks], look: Look, rewriter: Rewriter) -> tuple[int, list[Masks] | None]:
    """From which gate on to replace, and by what, so that the last gate gains; None where nothing is gained.

    `between` are the gates that the last one cannot pass, first one first; `passed` those it has passed.
    `flipped` and `read`: the lines that the last gate and those between flip and read.
    """
    gate = done[-1]
    between: list[Masks] = []
    passed: list[Masks] = []
    flipped, read = gate[0], gate[1] | gate[2]
    for index in range(len(done) - 2, max(len(done) - 2 - look.reach, -1), -1):
        earlier = done[index]
        is_free = not (earlier[0] & read or flipped & (earlier[1] | earlier[2]))
        aside, moved = (between, earlier) if is_free else _set_aside(earlier, between, rewriter.may_turn)
        if moved is not None:
            if moved[0] == gate[0] and apart(moved, gate) <= MOST_APART:
                better = rewriter.improvement((moved, gate))
                if better is not None:
                    return index, [*aside, *better, *reversed(passed)]
            crossed = (gate, moved) if is_free else cross(moved, gate, turn=rewriter.may_turn)
            if crossed is not None:
                between = aside
                gate = crossed[0]
                passed.append(crossed[1])
                continue
        if len(between) == look.between:
            break
        between = [earlier, *between]
        flipped |= earlier[0]
        read |= earlier[1] | earlier[2]
    return 0, None


def _set_aside(gate: Masks, others: list[Masks], turn: bool) -> tuple[list[Masks], Masks | None]:
    """The others and the gate after it has passed them all; None for the gate where it cannot."""
    aside: list[Masks] = []
    for other in others:
        crossed = cross(gate, other, turn=turn)
        if crossed is None:
            return others, None
        aside.append(crossed[0])
        gate = crossed[1]
    return aside, gate
