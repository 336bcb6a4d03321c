"""Hypothesis strategies that several rooms share."""

from __future__ import annotations

from hypothesis import strategies as st

from revsynth.cascade import PHASE, Cascade, Gate


@st.composite
def gates(draw: st.DrawFn, lines: int, phase: bool = False) -> Gate:
    """A gate on `lines` lines with controls of both polarities; with `phase`, phase gates too."""
    target = draw(st.integers(PHASE if phase else 0, lines - 1))
    choices = draw(st.lists(st.sampled_from((0, 1, 2)), min_size=lines, max_size=lines))
    controls = tuple(2 * line + (c - 1) for line, c in enumerate(choices) if c and line != target)
    return Gate(target, controls)


@st.composite
def cascades(draw: st.DrawFn, max_lines: int = 6, max_gates: int = 20, phase: bool = False) -> Cascade:
    """A cascade on 1 ... max_lines lines."""
    lines = draw(st.integers(1, max_lines))
    return Cascade.from_gates(lines, draw(st.lists(gates(lines, phase), max_size=max_gates)))


def permutations(min_lines: int = 1, max_lines: int = 4) -> st.SearchStrategy[list[int]]:
    """A permutation of 0 ... 2**n - 1."""
    return st.integers(min_lines, max_lines).flatmap(lambda n: st.permutations(range(1 << n)).map(list))
