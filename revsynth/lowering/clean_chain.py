"""k controls with k - 2 clean scratch qubits: 2k - 3 Toffolis, 8k - 9 T.

Relative-phase products fold the controls into two, the exact gate acts, the products unfold; what phases they
leave are functions of qubits that the exact gate does not change, so they cancel. Source of the count:
Maslov, "Advantages of using relative-phase Toffoli gates", Phys. Rev. A 93, 2016.
"""

from __future__ import annotations

from dataclasses import dataclass

from revsynth.lowering.construction import Needs, Site
from revsynth.lowering.draft import Draft, Tip
from revsynth.lowering.fold import Shape, apply, fold


@dataclass(frozen=True)
class CleanChain:
    """Relative-phase products in a tree or a ladder, there and back."""

    shape: Shape = "tree"

    @property
    def name(self) -> str:
        """With the shape."""
        return f"clean {self.shape}"

    def needs(self, controls: int) -> Needs | None:
        """k - 2 clean qubits from three controls on."""
        return Needs(controls - 2, 0) if controls >= 3 else None

    def write(self, draft: Draft, tip: Tip, site: Site) -> None:
        """Fold, act, unfold."""
        steps, left = fold(site.controls, site.clean, len(site.controls) - 2, self.shape)
        apply(steps, draft.relative)
        draft.twice(tip, left[0], left[1], site.target)
        apply(steps, draft.relative, backwards=True)
