"""What is claimed to be 0 is 0 for all inputs, and the usual patterns are seen."""

from __future__ import annotations

from hypothesis import given
from hypothesis import strategies as st

from revsynth.cascade import Cascade, Gate
from revsynth.cascade.line_values import LineValues
from tests.slow_simulator import run_cascade
from tests.strategies import cascades


@given(
    cascade=cascades(max_lines=5, max_gates=15), known=st.dictionaries(st.integers(0, 4), st.integers(0, 1))
)
def test_a_claimed_zero_is_zero_for_all_inputs(cascade, known):
    known = {line: bit for line, bit in known.items() if line < cascade.lines}
    values = LineValues.start(cascade.lines, known)
    for gate in cascade:
        values.apply(gate.controls, (gate.target,))
    for start in range(1 << cascade.lines):
        if any((start >> line) & 1 != bit for line, bit in known.items()):
            continue
        end, _ = run_cascade(cascade, start)
        assert not any(values.is_zero(line) and (end >> line) & 1 for line in range(cascade.lines))


def zeros_after(lines: int, gates: list[Gate], known: dict[int, int]) -> list[int]:
    """The lines that are claimed to be 0 in the end."""
    values = LineValues.start(lines, known)
    for gate in gates:
        values.apply(gate.controls, (gate.target,))
    return [line for line in range(lines) if values.is_zero(line)]


def test_a_product_that_is_computed_and_uncomputed():
    product = Gate(3, (0, 3))
    assert zeros_after(5, [product], {3: 0, 4: 0}) == [4]
    assert zeros_after(5, [product, Gate(2, (6,)), product], {3: 0, 4: 0}) == [3, 4]
    assert zeros_after(5, [product, Gate(0, (4,)), product], {3: 0, 4: 0}) == [4]


def test_factors_may_be_changed_and_changed_back_in_any_order():
    one, two, product = Gate(0, (2,)), Gate(0, (4,)), Gate(3, (0, 2))
    assert zeros_after(4, [one, two, product, two, one, one, two, product, one, two], {3: 0}) == [3]
    assert zeros_after(4, [one, product, two, product], {3: 0}) == []


def test_constants_are_followed():
    assert zeros_after(3, [Gate(2, (0, 2))], {0: 0, 2: 0}) == [0, 2]
    assert zeros_after(3, [Gate(2, (0, 2)), Gate(2, (2,))], {0: 1, 2: 0}) == [2]
    assert zeros_after(3, [Gate(2), Gate(2, (1,))], {0: 0, 2: 0}) == [0, 2]
    assert zeros_after(3, [Gate(1, (0,)), Gate(2, (0, 3))], {1: 0, 2: 0}) == [2]


def test_long_sums_are_followed():
    adds = [Gate(100, (2 * line,)) for line in range(100)]
    assert zeros_after(101, adds, {100: 0}) == []
    assert zeros_after(101, adds + adds[::-1], {100: 0}) == [100]
    assert zeros_after(101, adds[:2] * 2, {100: 0}) == [100]


@given(cascades(max_lines=5, max_gates=8))
def test_a_cascade_and_its_inverse_bring_every_zero_back(cascade):
    known = dict.fromkeys(range(0, cascade.lines, 2), 0)
    both: Cascade = cascade + cascade.inverse()
    assert set(known) <= set(zeros_after(cascade.lines, list(both), known))
