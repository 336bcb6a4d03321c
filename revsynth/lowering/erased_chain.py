"""Products on clean scratch that are erased by measurement: 4 T each, nothing for the way back.

With k - 1 clean qubits all controls fold into one, 4(k - 1) T (Jones, Phys. Rev. A 87, 2013; Gidney, Quantum
2, 2018); with k - 2 an exact doubly-controlled gate is left, 4k - 1 T; with fewer, what is left of the
controls goes to another construction, which may borrow the qubits that have been folded.
"""

from __future__ import annotations

from dataclasses import dataclass

from revsynth.lowering.construction import Construction, Needs, Site
from revsynth.lowering.draft import Draft, Tip
from revsynth.lowering.fold import Shape, apply, fold


@dataclass(frozen=True)
class ErasedChain:
    """`products` products, then `inner` on the controls that are left, then the erasures."""

    products: int
    inner: Construction
    shape: Shape = "tree"

    @property
    def name(self) -> str:
        """The shape, and the inner construction's name."""
        return f"{self.products} erased products in a {self.shape}, {self.inner.name}"

    def needs(self, controls: int) -> Needs | None:
        """One clean qubit a product, and what the inner construction lacks; each product frees two qubits."""
        if not 1 <= self.products < controls:
            return None
        inner = self.inner.needs(controls - self.products)
        if inner is None:
            return None
        return Needs(self.products + inner.clean, max(0, inner.borrowed - 2 * self.products))

    def write(self, draft: Draft, tip: Tip, site: Site) -> None:
        """Fold, act, erase."""
        steps, left = fold(site.controls, site.clean, self.products, self.shape)
        folded = [qubit for a, b, _ in steps for qubit in (a, b)]
        apply(steps, draft.compute_and)
        inner = Site(left, site.target, site.clean[self.products :], [*folded, *site.borrowed])
        self.inner.write(draft, tip, inner)
        apply(steps, draft.erase_and, backwards=True)
