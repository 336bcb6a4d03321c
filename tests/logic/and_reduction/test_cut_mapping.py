"""Cut mapping: exact rewrites, prices, and the compiled loops against the plain ones."""

from __future__ import annotations

from random import Random

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from revsynth.logic.affine_classes import and_count, classes
from revsynth.logic.and_reduction import cut_mapping, cut_steps
from revsynth.logic.and_reduction.cut_mapping import cover, low_masks, map_cuts
from revsynth.logic.and_reduction.small_circuits import build_function
from revsynth.logic.network import Network
from revsynth.logic.network_builder import NetworkBuilder
from revsynth.logic.network_simulation import tabulate
from tests import naive_networks
from tests.logic.random_networks import networks, random_network


@given(networks, st.sampled_from([3, 4, 5]))
def test_a_mapped_network_computes_the_same(network: Network, k: int) -> None:
    assert np.array_equal(tabulate(map_cuts(network, k=k)), tabulate(network))


@pytest.mark.parametrize("inputs", [0, 1, 2, 3, 4, 5])
def test_small_circuits_have_the_table_and_the_fewest_ands(inputs: int) -> None:
    random = Random(1)
    rows = 1 << (1 << inputs)
    tables = (
        range(rows) if inputs <= 3 else [random.randrange(rows) for _ in range(400 if inputs == 4 else 40)]
    )
    for table in tables:
        builder = NetworkBuilder(inputs)
        network = builder.build([build_function(builder, [2 * i for i in range(1, inputs + 1)], table)])
        assert int(tabulate(network)[0, 0]) == table
        assert network.ands == and_count(inputs, table)


def test_prices_of_four_inputs_are_the_published_counts() -> None:
    # 32; 1,120; 31,616; 32,768 functions with 0 ... 3 ANDs: Turan, Peralta, LightSec 2014.
    found = [0, 0, 0, 0]
    for form in range(1 << 16):
        found[cut_steps.ands_of_four(form)] += 1
    assert found == [32, 1120, 31616, 32768]


def test_the_key_tells_all_48_classes_of_five_inputs_apart() -> None:
    tables = [found.chain.tables()[0] for found in classes().values()]
    keys = {cut_steps.five_key(table, cut_steps.anf_of(table, 5)) for table in tables}
    assert len(keys) == 48


@given(st.integers(0, 2**32 - 1), st.permutations(range(5)), st.integers(0, 63))
def test_the_price_of_five_inputs_is_the_same_all_over_a_class(
    table: int, order: list[int], affine: int
) -> None:
    moved = 0
    for x in range(32):
        y = sum((x >> i & 1) << order[i] for i in range(5)) ^ affine >> 1 & 31
        moved |= ((table >> y ^ (x & affine).bit_count()) & 1) << x
    prices = cut_mapping.five_prices()
    keys = [cut_steps.five_key(t, cut_steps.anf_of(t, 5)) for t in (table, moved)]
    assert keys[0] == keys[1]
    if table and table >> 16 != table & 0xFFFF:
        assert prices[keys[0]] == and_count(5, table)


@pytest.mark.parametrize("k", [3, 4, 5])
def test_compiled_and_plain_loops_choose_the_same_cover(k: int, monkeypatch: pytest.MonkeyPatch) -> None:
    cases = [random_network(seed, 20, 300, 5) for seed in range(3)]
    cases += [naive_networks.adder(12), naive_networks.product(5)]
    for network in cases:
        plain = cover(network, k=k, keep=7, passes=3)
        monkeypatch.setattr(cut_mapping, "COMPILED_FROM", 0)
        assert cover(network, k=k, keep=7, passes=3) == plain
        monkeypatch.undo()


def test_compiled_steps_equal_their_plain_bodies_on_edge_words() -> None:
    from revsynth.logic.and_reduction.cut_kernels import COMPILED

    words = [0, 1, 0xFFFF, 0x8000, 0xFFFFFFFF, 0x80000000, 0xDEADBEEF, 0x96696996, 0xAAAAAAAA]
    for word in words:
        assert COMPILED.ones_of(word) == cut_steps.ones_of(word) == word.bit_count()
        for k in (3, 4, 5):
            table = word & ((1 << (1 << k)) - 1)
            form = cut_steps.anf_of(table, k)
            assert COMPILED.anf_of(table, k) == form
            assert cut_steps.anf_of(form, k) == table
            assert COMPILED.five_key(table, form) == cut_steps.five_key(table, form)
            lows = low_masks(k)
            for i in range(k):
                assert COMPILED.depends(table, i, lows[i]) == cut_steps.depends(table, i, lows[i])
        assert COMPILED.ands_of_four(word & 0xFFFF) == cut_steps.ands_of_four(word & 0xFFFF)


def test_the_support_cut_of_a_small_node_is_kept() -> None:
    # Five inputs, any function: at most 4 ANDs (Turan, Peralta 2014), however the network is written.
    random = Random(3)
    for _ in range(5):
        table = [random.getrandbits(1) for _ in range(32)]
        network = naive_networks.table(5, [table])
        assert map_cuts(network, k=5, keep=4).ands <= 4


def test_other_cut_sizes_are_refused() -> None:
    with pytest.raises(ValueError, match="cuts of 3, 4 or 5 leaves, not 6"):
        cover(naive_networks.adder(2), k=6, keep=4, passes=1)
