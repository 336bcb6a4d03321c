"""A network from a bare table, by selections on the highest input bit first; equal parts are built once."""

from __future__ import annotations

import numpy as np

from revsynth.errors import BudgetError
from revsynth.logic.function import Function
from revsynth.logic.network import FALSE, TRUE, Literal
from revsynth.logic.network_builder import NetworkBuilder
from revsynth.logic.network_function import NetworkFunction
from revsynth.logic.structure import halves
from revsynth.logic.truth_table import Column

MOST_PARTS = 200_000
"""Different parts of a table that are looked at, at most."""


def network_function(function: Function) -> NetworkFunction:
    """The function as selections (one AND each), free values chosen so that halves fall together.

    Raises BudgetError where the table has too many different parts.
    """
    builder = NetworkBuilder(function.inputs)
    parts: dict[tuple[int, bytes, bytes], Literal] = {}

    def build(values: Column, care: Column, inputs: int) -> Literal:
        """One level deeper for each input bit, so the depth is at most the number of inputs."""
        if not values.any():
            return FALSE
        if np.array_equal(values, care):
            return TRUE
        key = (inputs, values.tobytes(), care.tobytes())
        found = parts.get(key)
        if found is not None:
            return found
        if len(parts) >= MOST_PARTS:
            raise BudgetError(f"the table has more than {MOST_PARTS} different parts: too many for a network")
        low, high = halves(values, inputs, inputs - 1)
        low_care, high_care = halves(care, inputs, inputs - 1)
        if np.any((low ^ high) & low_care & high_care):
            otherwise = build(low, low_care, inputs - 1)
            literal = builder.mux(builder.input(inputs - 1), build(high, high_care, inputs - 1), otherwise)
        else:
            literal = build(low | high, low_care | high_care, inputs - 1)
        parts[key] = literal
        return literal

    outputs = [
        build(values, care, function.inputs)
        for values, care in zip(function.values, function.care, strict=True)
    ]
    return NetworkFunction(builder.build(outputs))
