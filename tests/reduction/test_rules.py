"""Every rule by itself: what it puts in the place of some gates does the same, signs included."""

from __future__ import annotations

import itertools

import pytest
from hypothesis import given
from hypothesis import strategies as st

from revsynth.cascade import PHASE, Cascade, Gate
from revsynth.reduction.masks import Masks, apart, commute, masked
from revsynth.reduction.rules import MOST_APART, RULES, Rule
from revsynth.reduction.rules.moving import cross
from revsynth.reduction.rules.passing import remainder
from tests.reduction.sameness import difference, of
from tests.strategies import gates

rules = pytest.mark.parametrize("rule", RULES, ids=lambda rule: rule.name)


def every_gate(lines: int) -> list[Masks]:
    """All gates and phase gates on so many lines: 15 on two, 54 on three."""
    found = []
    for target in range(PHASE, lines):
        for literals in itertools.product((None, 0, 1), repeat=lines):
            controls = tuple(2 * i + v for i, v in enumerate(literals) if v is not None)
            if target == PHASE or literals[target] is None:
                found.append(Gate(target, controls))
    return masked(Cascade.from_gates(lines, found))


def as_masks(gate: Gate) -> Masks:
    return masked(Cascade.from_gates(8, [gate]))[0]


def g(target: str, controls: str = "") -> Masks:
    """A gate by letters: a is line 0, a capital letter waits for 0, `-` is the phase."""
    literals = sorted(2 * (ord(c.lower()) - 97) + c.isupper() for c in controls)
    return as_masks(Gate(PHASE if target == "-" else ord(target) - 97, tuple(literals)))


@rules
def test_all_gates_on_two_lines(rule: Rule) -> None:
    fired = 0
    for before in itertools.product(every_gate(2), repeat=rule.size):
        for after in rule.rewrite(before):
            fired += 1
            assert difference(of(2, before), of(2, after)) is None, f"{rule.name}: {before} became {after}"
    assert fired > 10


@pytest.mark.parametrize("rule", [rule for rule in RULES if rule.size == 2], ids=lambda rule: rule.name)
def test_all_pairs_on_three_lines(rule: Rule) -> None:
    for before in itertools.product(every_gate(3), repeat=2):
        for after in rule.rewrite(before):
            assert difference(of(3, before), of(3, after)) is None, f"{rule.name}: {before} became {after}"


@st.composite
def related_gates(draw: st.DrawFn, size: int, lines: int) -> list[Masks]:
    """Gates that look alike: each new, or an earlier one, perhaps with one control or its target changed."""
    found: list[Gate] = []
    for _ in range(size):
        if found and draw(st.integers(0, 3)):
            target, controls = draw(st.sampled_from(found))
            line = draw(st.integers(0, lines - 1))
            rest = [c for c in controls if c >> 1 != line]
            kind = draw(st.integers(0, 4))
            if kind == 0:
                target = line
            elif kind < 4 and line != target:
                rest = sorted([*rest, 2 * line + kind - 1]) if kind < 3 else rest
            else:
                rest = list(controls)
            found.append(Gate(target, tuple(rest)))
        else:
            found.append(draw(gates(lines, phase=True)))
    return [as_masks(gate) for gate in found]


@given(st.data())
def test_no_rule_but_moving_knows_gates_on_one_target_that_are_far_apart(data: st.DataObject) -> None:
    one, other = (as_masks(data.draw(gates(6))) for _ in range(2))
    other = (one[0], other[1] & ~one[0], other[2] & ~one[0])
    results = [after for rule in RULES if rule.size == 2 for after in rule.rewrite((one, other))]
    assert apart(one, other) <= MOST_APART or results == [(other, one)]


@rules
@given(data=st.data())
def test_gates_that_look_alike(rule: Rule, data: st.DataObject) -> None:
    lines = data.draw(st.integers(2, 6))
    before = tuple(data.draw(related_gates(rule.size, lines)))
    for after in rule.rewrite(before):
        assert difference(of(lines, before), of(lines, after)) is None, f"{rule.name}: became {after}"


@given(st.data())
def test_commute_says_exactly_when_the_order_does_not_matter(data: st.DataObject) -> None:
    one, other = data.draw(related_gates(2, 4))
    same = difference(of(4, [one, other]), of(4, [other, one])) is None
    assert commute(one, other) is same


@given(st.data())
def test_crossing_keeps_the_function_and_turns_polarities_only_when_allowed(data: st.DataObject) -> None:
    one, other = data.draw(related_gates(2, 5))
    for turn in (False, True):
        crossed = cross(one, other, turn=turn)
        if crossed is not None:
            assert difference(of(5, [one, other]), of(5, crossed)) is None
            assert turn or crossed == (other, one)
        elif not turn:
            assert not commute(one, other)


@given(st.data())
def test_the_remainder_commutes_with_both(data: st.DataObject) -> None:
    one, other = data.draw(related_gates(2, 5))
    left = remainder(one, other)
    if left is not None:
        assert difference(of(5, [one, other]), of(5, [other, one, left])) is None
        assert commute(left, one)
        assert commute(left, other)


PUBLISHED = [
    # Miller, Maslov, Dueck, DAC 2003: equal gates next to each other go (deletion rule).
    ("merging", [g("c", "ab"), g("c", "ab")], []),
    # Two products of an exclusive sum that differ in one literal (elementary).
    ("merging", [g("c", "ab"), g("c", "aB")], [g("c", "a")]),
    ("merging", [g("c", "ab"), g("c", "a")], [g("c", "aB")]),
    ("merging", [g("-", "ab"), g("-", "aB")], [g("-", "a")]),
    ("merging", [g("a", "b"), g("a")], [g("a", "B")]),
    # Linking of products at distance 2, Song, Perkowski, IEEE TCAD 15(4), 1996: AB XOR ab = A XOR b.
    ("exchange", [g("c", "AB"), g("c", "ab")], [g("c", "A"), g("c", "b")]),
    ("exchange", [g("c", "a"), g("c", "b")], [g("c", "A"), g("c", "B")]),
    # Miller, Maslov, Dueck, DAC 2003: the moving rule; and a NOT that turns the control it passes.
    ("moving", [g("c", "ab"), g("d", "ab")], [g("d", "ab"), g("c", "ab")]),
    ("moving", [g("a"), g("c", "ab")], [g("c", "Ab"), g("a")]),
    ("moving", [g("b", "a"), g("c", "ab")], [g("c", "aB"), g("b", "a")]),
    # Maslov, Dueck, Miller, IEEE TCAD 24(6), 2005: size 5, three CNOTs in a row make two.
    ("passing", [g("b", "a"), g("c", "b"), g("b", "a")], [g("c", "b"), g("c", "a")]),
    ("passing", [g("c", "ab"), g("d", "c"), g("c", "ab")], [g("d", "c"), g("d", "ab")]),
    ("passing", [g("b", "a"), g("c", "b"), g("c", "a")], [g("c", "b"), g("b", "a")]),
    # Same paper, size 6: three CNOTs swap two lines, from either side; with one more control, a Fredkin gate.
    ("swapping", [g("a", "b"), g("b", "a"), g("a", "b")], [g("b", "a"), g("a", "b"), g("b", "a")]),
    ("swapping", [g("a", "bc"), g("b", "ac"), g("a", "bc")], [g("a", "b"), g("b", "ac"), g("a", "b")]),
    ("swapping", [g("a", "bc"), g("b", "a"), g("a", "bc")], [g("b", "ac"), g("a", "bc"), g("b", "a")]),
]


@pytest.mark.parametrize(("name", "before", "after"), PUBLISHED)
def test_published_rules_and_their_textbook_cases(name: str, before: list[Masks], after: list[Masks]) -> None:
    rule = next(rule for rule in RULES if rule.name == name)
    assert tuple(after) in list(rule.rewrite(tuple(before)))


def test_rules_are_named_apart_and_say_where_they_come_from() -> None:
    assert len({rule.name for rule in RULES}) == len(RULES)
    assert all(rule.source for rule in RULES)
