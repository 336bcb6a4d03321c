"""A completely tabulated function with free values: what every synthesis method starts from."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from revsynth.logic.truth_table import Column, Columns, count_ones, last_word_mask, words_for


@dataclass(frozen=True)
class Function:
    """A function of `inputs` bits to `outputs` bits, partly free.

    values: shape (outputs, words); bit x of row j is bit j of f(x), and 0 where free.
    care:   shape (outputs, words); 1 where that bit of f(x) is fixed. Outside the domain it is 0.
    domain: shape (words,); 1 where the input is inside the spec's domain.
    Bit order as in `truth_table`: row 0 is the least significant output bit.
    """

    inputs: int
    outputs: int
    values: Columns
    care: Columns
    domain: Column

    def __post_init__(self) -> None:
        words = words_for(self.inputs)
        for name, array, shape in (
            ("values", self.values, (self.outputs, words)),
            ("care", self.care, (self.outputs, words)),
            ("domain", self.domain, (words,)),
        ):
            if array.shape != shape or array.dtype != np.uint64:
                raise ValueError(f"{name}: uint64 of shape {shape} wanted, not {array.dtype} {array.shape}")
            if np.any(array & ~last_word_mask(self.inputs)):
                raise ValueError(f"{name}: bits beyond input {(1 << self.inputs) - 1} must be 0")
        if np.any(self.values & ~self.care):
            raise ValueError("values must be 0 where they are free")

    @property
    def marked(self) -> int:
        """Inputs certainly marked (of a one-output function)."""
        return count_ones(self.values[0])

    @property
    def free(self) -> int:
        """Inputs inside the domain at which at least one output bit is free."""
        free = np.zeros_like(self.domain)
        for row in self.care:
            free |= ~row
        return count_ones(free & self.domain)

    @property
    def is_complete(self) -> bool:
        """True where nothing is free."""
        return bool(np.all(self.care == last_word_mask(self.inputs)))
