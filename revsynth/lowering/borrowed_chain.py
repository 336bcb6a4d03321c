"""k controls with k - 2 borrowed qubits: 4(k - 2) Toffolis, 8(k - 1) T.

Sources: Barenco, Bennett, Cleve, DiVincenzo, Margolus, Shor, Sleator, Smolin, Weinfurter, "Elementary gates
for quantum computation", Phys. Rev. A 52, 1995, Lemma 7.2; halves of relative-phase gates that cancel across
the chain: Maslov, Phys. Rev. A 93, 2016.
"""

from __future__ import annotations

from collections.abc import Sequence

from revsynth.lowering.construction import Needs, Site
from revsynth.lowering.draft import Draft, Tip


class BorrowedChain:
    """The target takes u c_k, then (u ^ d) c_k: a chain changes the line u by d = c_1 ... c_(k-1)."""

    name = "borrowed chain"
    shape = None

    def needs(self, controls: int) -> Needs | None:
        """k - 2 borrowed qubits from three controls on."""
        return Needs(0, controls - 2) if controls >= 3 else None

    def write(self, draft: Draft, tip: Tip, site: Site) -> None:
        """Tip, chain, tip, chain."""
        lines = site.borrowed[: len(site.controls) - 2]
        for inverse in (False, True):
            draft.half(tip, lines[-1], site.controls[-1], site.target, inverse)
            change_last(draft, site.controls[:-1], lines)


def change_last(draft: Draft, controls: Sequence[int], lines: Sequence[int]) -> None:
    """Change the last line by the product of the controls, up to a relative phase; its own inverse.

    Line i goes with control i + 1. The lines below the last are changed too, so this is for use in pairs.
    """
    levels = range(len(lines) - 1, 0, -1)
    for i in levels:
        draft.open_pair(lines[i - 1], controls[i + 1], lines[i])
    draft.relative(controls[0], controls[1], lines[0])
    for i in reversed(levels):
        draft.close_pair(lines[i - 1], controls[i + 1], lines[i])
