"""Kept products: the same outputs, fewer T; everything that is kept is undone by the inverse."""

from __future__ import annotations

from hypothesis import given
from hypothesis import strategies as st

from revsynth.cascade import Cascade, Gate
from revsynth.cascade.price import cascade_t
from revsynth.synthesis.interface import Block
from revsynth.synthesis.keeping import keep_products
from tests.slow_simulator import run_cascade


@st.composite
def blocks(draw: st.DrawFn) -> Block:
    inputs, outputs, work = 4, 2, draw(st.integers(0, 1))
    lines = inputs + outputs + work
    gates = []
    for _ in range(draw(st.integers(0, 8))):
        target = draw(st.integers(0, lines - 1))
        others = [line for line in range(lines) if line != target]
        chosen = draw(st.lists(st.sampled_from(others), unique=True, max_size=5))
        gates.append(Gate(target, tuple(sorted(2 * line + draw(st.integers(0, 1)) for line in chosen))))
    return Block(Cascade.from_gates(lines, gates), "made up", inputs, outputs, work=work)


@given(blocks())
def test_inputs_outputs_and_work_end_as_before_and_the_inverse_clears_what_is_kept(block: Block) -> None:
    kept = keep_products(block)
    if kept is None:
        return
    low = block.inputs + block.outputs
    for x in range(1 << block.inputs):
        plain, _ = run_cascade(block.cascade, x)
        state, _ = run_cascade(kept.cascade, x)
        assert state & ((1 << low) - 1) == plain & ((1 << low) - 1)
        assert state >> (low + kept.keep) == plain >> low
        assert run_cascade(kept.cascade.inverse(), state)[0] == x
    assert cascade_t(kept.cascade, "measured") <= cascade_t(block.cascade, "measured")


def test_every_product_onto_a_line_known_to_be_0_and_equal_products_once() -> None:
    gates = [Gate(4, (0, 2, 4, 6)), Gate(5, (0, 2, 4)), Gate(5, (0, 2))]
    kept = keep_products(Block(Cascade.from_gates(6, gates), "made up", 4, 2))
    assert kept is not None
    assert kept.keep == 2
    assert list(kept.cascade) == [
        Gate(6, (0, 2)),
        Gate(7, (4, 12)),
        Gate(4, (6, 14)),
        Gate(5, (14,)),
        Gate(5, (12,)),
    ]


def test_a_product_is_computed_again_after_one_of_its_lines_has_changed() -> None:
    gates = [Gate(4, (0, 2, 4)), Gate(0, (6,)), Gate(5, (0, 2, 4))]
    kept = keep_products(Block(Cascade.from_gates(6, gates), "made up", 4, 2))
    assert kept is not None
    assert [gate.controls for gate in kept.cascade].count((0, 2)) == 2


def test_nothing_to_keep() -> None:
    assert keep_products(Block(Cascade.from_gates(3, [Gate(2, (0, 2))]), "made up", 2, 1)) is None
