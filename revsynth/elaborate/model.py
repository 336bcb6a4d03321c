"""What elaboration gives: the function as a network, and where the spec would be invalid."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, field

from revsynth.errors import SpecError
from revsynth.logic.in_place_program import Program
from revsynth.logic.network import Network
from revsynth.logic.network_function import NetworkFunction
from revsynth.spec.model import Word


@dataclass(frozen=True)
class Check:
    """Something that must not happen: an input at which the network's one output is 1 makes the spec invalid.

    `message` says what would be wrong there. `error` is the error for one such input, given by its combined
    index, in the words that a spec small enough for a table gets.
    """

    network: Network
    message: str
    error: Callable[[int], SpecError] = field(repr=False, compare=False)


@dataclass(frozen=True)
class Elaboration:
    """A spec's function as a network.

    function: one output for a predicate; all bits of the output words, the first word lowest; the bits of the
              combined index of the image for a permutation. Its `care` is None where every input counts.
    outputs:  () for a predicate, the output words with their bits, or the input words of a permutation.
    checks:   what must not happen inside the domain; where all are constant 0 there are none.
    warnings: comparisons that are constant, as far as that shows without looking at inputs.
    program:  the same function step by step in place, where the spec says it so or is recognised.
    """

    function: NetworkFunction
    outputs: tuple[Word, ...]
    checks: tuple[Check, ...]
    warnings: tuple[str, ...] = ()
    program: Program | None = None
