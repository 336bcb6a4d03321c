"""A function given by a network instead of a table: what the network method starts from."""

from __future__ import annotations

from dataclasses import dataclass

from revsynth.logic.network import Network


@dataclass(frozen=True)
class NetworkFunction:
    """values: one output for each bit of f(x), the least significant first; care: one output, 1 where the
    value of f counts (None: everywhere). Both have the same inputs.
    """

    values: Network
    care: Network | None = None

    def __post_init__(self) -> None:
        if self.care is not None and (self.care.inputs, len(self.care.outputs)) != (self.values.inputs, 1):
            raise ValueError("care must have the inputs of values and one output")

    @property
    def inputs(self) -> int:
        """Number of input bits."""
        return self.values.inputs

    @property
    def outputs(self) -> int:
        """Number of output bits."""
        return len(self.values.outputs)
