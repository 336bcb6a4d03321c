"""What a construction of a many-controlled gate is: a file each, a line in `constructions.CONSTRUCTIONS`."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import NamedTuple, Protocol

from revsynth.lowering.draft import Draft, Tip
from revsynth.lowering.fold import Shape


class Needs(NamedTuple):
    """Scratch qubits: `clean` ones start and end in 0, `borrowed` ones in any state, which comes back."""

    clean: int
    borrowed: int


@dataclass(frozen=True)
class Site:
    """Where a construction is to be written: qubits by role, as many of scratch as it needs or more."""

    controls: Sequence[int]
    target: int
    clean: Sequence[int]
    borrowed: Sequence[int]


class Construction(Protocol):
    """A tip (NOT, Z, ...) on a target where all controls are 1."""

    @property
    def name(self) -> str:
        """A few words for people."""

    @property
    def shape(self) -> Shape | None:
        """How it folds controls; None where it does not, so that it goes with either shape."""

    def __hash__(self) -> int:
        """Equal constructions hash alike: templates are kept by construction."""

    def needs(self, controls: int) -> Needs | None:
        """The scratch for that many controls; None where the construction is not made for them."""

    def write(self, draft: Draft, tip: Tip, site: Site) -> None:
        """Write the gates. The tip may be done as a plain NOT where a cheaper form does not fit."""
