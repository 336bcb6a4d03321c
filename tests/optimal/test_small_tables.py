"""Complete tables of up to three lines against published averages, breadth-first search and the simulator."""

from __future__ import annotations

import numpy as np
import pytest

from revsynth.cascade.simulate import permutation
from revsynth.optimal.small_tables import First, SmallTable, gates_on, small_table
from revsynth.options import Controls
from tests.slow_simulator import run_cascade


def counts(table: SmallTable, what: str) -> list[int]:
    return np.bincount([getattr(table.cost_of(row), what) for row in range(len(table))]).tolist()


@pytest.mark.parametrize(
    ("controls", "functions", "average"),
    [
        ("positive", [1, 12, 102, 625, 2780, 8921, 17049, 10253, 577], 5.8655),
        ("mixed", [1, 27, 369, 2925, 13282, 20480, 3236], 4.5755),
    ],
)
def test_functions_of_three_lines_by_gates(controls: Controls, functions: list[int], average: float) -> None:
    """Positive: Shende, Prasad, Markov, Hayes, IEEE TCAD 22(6), 2003. Mixed: exhaustive search."""
    found = counts(small_table(3, controls, "gates"), "gates")
    assert found == functions
    mean = sum(size * count for size, count in enumerate(found)) / 40_320
    assert round(mean, 4) == average


@pytest.mark.parametrize("controls", ["positive", "mixed"])
def test_functions_of_three_lines_by_toffolis(controls: Controls) -> None:
    """NOT and CNOT free: exhaustive search; polarity does not matter, as NOTs are free."""
    found = counts(small_table(3, controls, "toffolis"), "toffolis")
    assert found == [1344, 9408, 18816, 10752]
    assert round(sum(size * count for size, count in enumerate(found)) / 40_320, 4) == 1.9667


@pytest.mark.parametrize("lines", [0, 1, 2, 3])
@pytest.mark.parametrize("controls", ["positive", "mixed"])
@pytest.mark.parametrize("first", ["gates", "toffolis"])
def test_circuits_do_what_their_row_says_and_take_what_it_says(
    lines: int, controls: Controls, first: First
) -> None:
    table = small_table(lines, controls, first)
    for row in range(0, len(table), max(1, len(table) // 500)):
        cascade = table.cascade(row)
        wanted = table.images[row].tolist()
        assert permutation(cascade).tolist() == wanted
        assert [run_cascade(cascade, x)[0] for x in range(1 << lines)] == wanted
        assert table.index(wanted) == row
        cost = table.cost_of(row)
        sizes = [len(gate.controls) for gate in cascade]
        assert (cost.gates, cost.toffolis, cost.literals) == (
            len(cascade),
            sizes.count(2),
            sum(sizes),
        )
        assert controls == "mixed" or not np.any(cascade.control & 1)


def test_two_lines_by_a_plain_search() -> None:
    """Breadth first over tuples, one gate at a time."""
    from revsynth.cascade.model import Cascade

    gates = [permutation(Cascade.from_gates(2, [gate])).tolist() for gate in gates_on(2, "mixed")]
    size = {(0, 1, 2, 3): 0}
    queue = list(size)
    for state in queue:
        for gate in gates:
            after = tuple(gate[x] for x in state)
            if after not in size:
                size[after] = size[state] + 1
                queue.append(after)
    table = small_table(2, "mixed", "gates")
    assert len(size) == 24
    assert [table.cost_of(row).gates for row in range(24)] == [
        size[tuple(row)] for row in table.images.tolist()
    ]


def test_relabelling_and_inversion_change_no_cost() -> None:
    table = small_table(3, "mixed", "gates")
    order = [0, 2, 4, 6, 1, 3, 5, 7]
    back = [order.index(x) for x in range(8)]
    for row in range(0, 40_320, 777):
        images = table.images[row].tolist()
        named = [order[images[back[x]]] for x in range(8)]
        inverse = [images.index(x) for x in range(8)]
        assert table.cost_of(table.index(named)) == table.cost_of(row) == table.cost_of(table.index(inverse))


def test_what_has_no_table_is_refused() -> None:
    with pytest.raises(ValueError, match="up to 3 lines, not 4"):
        small_table(4)
    with pytest.raises(ValueError, match="a permutation of 3 lines"):
        small_table(3).index([0, 0, 1, 2, 3, 4, 5, 6])
