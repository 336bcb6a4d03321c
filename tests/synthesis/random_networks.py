"""Random networks for the planner's tests."""

from __future__ import annotations

import numpy as np
from hypothesis import strategies as st

from revsynth.logic.function import Function
from revsynth.logic.network import Network
from revsynth.logic.network_builder import NetworkBuilder
from revsynth.logic.network_simulation import tabulate
from revsynth.logic.truth_table import ones


@st.composite
def networks(draw: st.DrawFn, outputs: int | None = None, most_gates: int = 14) -> Network:
    """A network on 1 ... 4 inputs; operands are mostly late gates, so that it is deep and shares much."""
    inputs = draw(st.integers(1, 4))
    b = NetworkBuilder(inputs)
    literals = [b.input(i) for i in range(inputs)]
    for _ in range(draw(st.integers(0, most_gates))):
        one = draw(st.sampled_from(literals[-6:])) ^ draw(st.integers(0, 1))
        other = draw(st.sampled_from(literals)) ^ draw(st.integers(0, 1))
        literals.append(b.xor(one, other) if draw(st.booleans()) else b.and_(one, other))
    count = draw(st.integers(1, 3)) if outputs is None else outputs
    chosen = draw(st.lists(st.sampled_from(literals[-5:]), min_size=count, max_size=count))
    return b.build([literal ^ draw(st.integers(0, 1)) for literal in chosen])


def as_function(network: Network) -> Function:
    """The network's table."""
    table = tabulate(network)
    everything = ones(network.inputs)
    return Function(network.inputs, len(table), table, np.tile(everything, (len(table), 1)), everything)
