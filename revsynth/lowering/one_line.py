"""k controls on a single scratch qubit, by controls that serve as scratch where it cannot matter.

Where the product c0 c1 holds, c0 and c1 are known to be 1: a NOT makes them *conditionally clean*, so they
can take products of further controls, which frees those in turn. Where c0 c1 does not hold, they take
rubbish, but then nothing happens to the target, and all is undone. Source of the idea and of the count 2k -
3: Khattar, Gidney, "Rise of conditionally clean ancillae for efficient quantum circuit constructions", arXiv
2407.17966, 2024. With relative-phase products this is 8k - 9 T: each product is a permutation times a phase
of qubits that the tip leaves alone, so the phases of a product and of its undoing cancel.
"""

from __future__ import annotations

from collections.abc import Sequence

from revsynth.lowering.construction import Needs, Site
from revsynth.lowering.draft import Draft, Tip
from revsynth.lowering.fold import Step


def conditional_steps(controls: Sequence[int]) -> tuple[list[Step], int]:
    """Products that gather c2, c3, ... given that c0 and c1 are 1, and the qubit that holds them in the end.

    Every step acts on a target that must be flipped first: it is 1 where the flags before it hold. Flag j
    (from 1) is the product of c(2j) and c(2j+1) on the qubit of c(2j-2); then, from the last flag down, the
    running product goes to the qubit of c(2j-1), which flags 0 ... j-1 make clean.
    """
    flags = (len(controls) - 2) // 2
    odd = len(controls) % 2 == 1
    steps = [(controls[2 * j], controls[2 * j + 1], controls[2 * j - 2]) for j in range(1, flags + 1)]
    if odd:
        running, first = controls[-1], flags
    else:
        running, first = controls[2 * flags - 2], flags - 1
    for j in range(first, 0, -1):
        steps.append((controls[2 * j - 2], running, controls[2 * j - 1]))
        running = controls[2 * j - 1]
    return steps, running


def gather(draft: Draft, steps: Sequence[Step]) -> None:
    """Write conditional steps."""
    for a, b, target in steps:
        draft.x(target)
        draft.relative(a, b, target)


def release(draft: Draft, steps: Sequence[Step]) -> None:
    """Undo `gather`."""
    for a, b, target in reversed(steps):
        draft.relative(a, b, target)
        draft.x(target)


class OneCleanLine:
    """One clean qubit, which takes c0 c1: 2k - 3 Toffolis, 8k - 9 T."""

    name = "one clean line"
    shape = None

    def needs(self, controls: int) -> Needs | None:
        """One clean qubit from three controls on."""
        return Needs(1, 0) if controls >= 3 else None

    def write(self, draft: Draft, tip: Tip, site: Site) -> None:
        """Take c0 c1, gather the rest under it, act, undo."""
        first, second = site.controls[:2]
        steps, top = conditional_steps(site.controls)
        draft.relative(first, second, site.clean[0])
        gather(draft, steps)
        draft.twice(tip, site.clean[0], top, site.target)
        release(draft, steps)
        draft.relative(first, second, site.clean[0])


class OneBorrowedLine:
    """One borrowed qubit, which is changed by c0 c1 between two gathers: 4k - 8 Toffolis, 16k - 32 T.

    The two tips act as u r and (u ^ c0 c1) r, whose difference is c0 c1 r; each takes 4 T
    (`toffoli.difference`).
    """

    name = "one borrowed line"
    shape = None

    def needs(self, controls: int) -> Needs | None:
        """One borrowed qubit from three controls on."""
        return Needs(0, 1) if controls >= 3 else None

    def write(self, draft: Draft, tip: Tip, site: Site) -> None:
        """Act with the borrowed qubit as it is, change it, act again, change it back."""
        first, second = site.controls[:2]
        line = site.borrowed[0]
        steps, top = conditional_steps(site.controls)
        for inverse in (False, True):
            gather(draft, steps)
            draft.half(tip, line, top, site.target, inverse)
            release(draft, steps)
            draft.relative(first, second, line)
