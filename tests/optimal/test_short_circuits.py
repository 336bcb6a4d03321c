"""Short circuits of four lines with both polarities: counted, cheapest, and never what costs more."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from revsynth.cascade import Cascade, Gate
from revsynth.cascade.price import cascade_t
from revsynth.cascade.simulate import permutation
from revsynth.optimal.packed import pack
from revsynth.optimal.short_circuits import short_circuits
from revsynth.options import Controls, Uncompute
from tests.strategies import gates

settings = st.tuples(st.sampled_from(("mixed", "positive")), st.sampled_from(("unitary", "measured")))


@pytest.mark.parametrize(
    ("controls", "functions"), [("mixed", [1, 108, 6774, 313_140]), ("positive", [1, 32, 784, 16_204])]
)
def test_functions_by_size(controls: Controls, functions: list[int]) -> None:
    """Positive: Golubitsky, Maslov, IEEE Trans. Computers 61(9), 2012. Mixed: counted here."""
    assert [len(level.words) for level in short_circuits(controls, "unitary").levels] == functions


def test_costs_of_two_gates_by_trying_all_pairs() -> None:
    table = short_circuits("positive", "measured")
    least: dict[int, int] = {}
    for one in table.gates:
        for other in table.gates:
            cascade = Cascade.from_gates(4, [one, other])
            word = pack(permutation(cascade).tolist())
            cost = 64 * cascade_t(cascade, "measured") + len(cascade.control)
            least[word] = min(cost, least.get(word, cost))
    level = table.levels[2]
    assert dict(zip(level.words.tolist(), level.cost.tolist(), strict=True)) == {
        word: cost
        for word, cost in least.items()
        if all(int(earlier.find(np.array([word], dtype=np.uint64))[0]) < 0 for earlier in table.levels[:2])
    }


@given(st.lists(gates(4), max_size=6), settings)
def test_what_is_found_is_the_same_and_cheaper(run: list[Gate], setting: tuple[Controls, Uncompute]) -> None:
    controls, uncompute = setting
    if controls == "positive":
        run = [Gate(target, tuple(c & ~1 for c in literals)) for target, literals in run]
    cascade = Cascade.from_gates(4, run)
    table = short_circuits(controls, uncompute)
    weight = len(cascade), cascade_t(cascade, uncompute), len(cascade.control)
    found = table.cheaper(pack(permutation(cascade).tolist()), *weight)
    if found is None:
        return
    after = Cascade.from_gates(4, found)
    assert np.array_equal(permutation(after), permutation(cascade))
    assert (len(after), cascade_t(after, uncompute), len(after.control)) < weight
    assert cascade_t(after, uncompute) <= weight[1]
    assert controls == "mixed" or not np.any(after.control & 1)
    # The shortest one is the last word but for what it costs.
    again = len(after), cascade_t(after, uncompute), len(after.control)
    assert table.cheaper(pack(permutation(after).tolist()), *again) is None


@given(st.lists(gates(4), min_size=4, max_size=5))
def test_a_detour_is_found_out(run: list[Gate]) -> None:
    """A gate, its inverse and what is between in the other order: at most as long as what is left."""
    cascade = Cascade.from_gates(4, [*run, run[-1]])
    weight = len(cascade), cascade_t(cascade, "unitary"), len(cascade.control)
    found = short_circuits("mixed", "unitary").cheaper(pack(permutation(cascade).tolist()), *weight)
    assert found is None or len(found) <= len(run) - 1
    if len(run) - 1 <= 3:
        assert found is not None
