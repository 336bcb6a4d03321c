"""One or two controls: no scratch."""

from __future__ import annotations

from revsynth.lowering.construction import Needs, Site
from revsynth.lowering.draft import Draft, Tip


class Direct:
    """CNOT or controlled Z, or the doubly-controlled gate: 7 T, 4 where the target is 0 before or after."""

    name = "direct"
    shape = None

    def needs(self, controls: int) -> Needs | None:
        """Nothing, for one or two controls."""
        return Needs(0, 0) if controls in (1, 2) else None

    def write(self, draft: Draft, tip: Tip, site: Site) -> None:
        """One gate."""
        if len(site.controls) == 1:
            draft.once(tip, site.controls[0], site.target)
        else:
            draft.twice(tip, site.controls[0], site.controls[1], site.target)
