"""The two passes by themselves, the reel they run on, and the masks they work in."""

from __future__ import annotations

import pytest
from hypothesis import given
from hypothesis import strategies as st

from revsynth.cascade import Cascade
from revsynth.cascade.price import cascade_t
from revsynth.reduction.lookback import Look, look_back
from revsynth.reduction.masks import BULK, Masks, masked, negatives, unmasked, weigh
from revsynth.reduction.reel import Reel
from revsynth.reduction.rewriting import KEPT, Rewriter, rewriter
from revsynth.reduction.windows import Search, cheaper_form, search_windows
from tests.reduction.sameness import cost, difference, not_worse, of
from tests.reduction.test_rules import g
from tests.strategies import cascades

LOOKS = [Look(reach=1, between=0), Look(reach=4, between=1), Look(reach=32, between=8)]
SEARCHES = [Search(2, 4, 1, 1), Search(3, 8, 1, 1), Search(4, 6, 20, 2), Search(6, 16, 60, 3)]
RULES = rewriter("mixed", "unitary")


@given(cascades(max_lines=5, max_gates=20, phase=True), st.sampled_from(LOOKS), st.booleans())
def test_looking_back_keeps_the_function(cascade: Cascade, look: Look, mixed: bool) -> None:
    rules = rewriter("mixed" if mixed else "positive", "unitary")
    gates = masked(cascade)
    after, changed = look_back(gates, [True] * len(gates), look, rules)
    assert difference(cascade, of(cascade.lines, after)) is None
    assert not_worse(cascade, of(cascade.lines, after), "unitary")
    assert len(changed) == len(after)
    assert look_back(after, [True] * len(after), look, rules)[0] == after


@given(cascades(max_lines=5, max_gates=20, phase=True), st.sampled_from(SEARCHES), st.booleans())
def test_searching_windows_keeps_the_function(cascade: Cascade, search: Search, mixed: bool) -> None:
    rules = rewriter("mixed" if mixed else "positive", "measured")
    gates = masked(cascade)
    after, changed = search_windows(gates, [True] * len(gates), search, rules)
    assert difference(cascade, of(cascade.lines, after)) is None
    assert not_worse(cascade, of(cascade.lines, after), "measured")
    assert len(changed) == len(after)
    assert search_windows(after, [True] * len(after), search, rules)[0] == after


@given(cascades(max_lines=4, max_gates=20, phase=True), cascades(max_lines=4, max_gates=3, phase=True))
def test_looking_near_new_gates_only_is_enough(old: Cascade, new: Cascade) -> None:
    """New gates in the middle of a cascade at rest: looking near them finds all that a full pass finds."""
    look, search = LOOKS[1], SEARCHES[1]
    settled = look_back(masked(old), [True] * len(old), look, RULES)[0]
    middle = len(settled) // 2
    mixed = [*settled[:middle], *masked(new), *settled[middle:]]
    fresh = [False] * middle + [True] * len(new) + [False] * (len(settled) - middle)
    if not len(new):
        assert look_back(mixed, fresh, look, RULES)[0] == mixed
    else:
        assert look_back(mixed, fresh, look, RULES) == look_back(mixed, [True] * len(mixed), look, RULES)
    settled = search_windows(masked(old), [True] * len(old), search, RULES)[0]
    middle = len(settled) // 2
    mixed = [*settled[:middle], *masked(new), *settled[middle:]]
    fresh = [False] * middle + [True] * len(new) + [False] * (len(settled) - middle)
    if len(new):
        full = search_windows(mixed, [True] * len(mixed), search, RULES)
        assert search_windows(mixed, fresh, search, RULES) == full


def test_gates_meet_although_others_stand_between() -> None:
    """c ^= ab meets its twin past a gate that reads c but not with ab, and one that neither passes."""
    gates = [g("c", "ab"), g("d", "cA"), g("e", "d"), g("c", "ab")]
    after, changed = look_back(gates, [True] * 4, LOOKS[2], RULES)
    assert after == [g("d", "cA"), g("e", "d")]
    assert changed == [True, True]


def test_gates_that_cannot_meet_stay() -> None:
    gates = [g("c", "a"), g("a", "c"), g("c", "a")]
    assert look_back(gates, [True] * 3, LOOKS[2], RULES)[0] == gates


def test_a_window_steps_over_gates_that_have_nothing_to_do_with_it() -> None:
    """Twelve gates on other lines lie between the three gates of a template; only the window is four wide."""
    others = [(1 << (40 + i), 1 << (20 + i), 0) for i in range(4)]
    gates = [g("b", "a"), *others, g("c", "b"), *others, g("b", "a")]
    after, _ = search_windows(gates, [True] * len(gates), Search(4, 16, 10, 1), RULES)
    assert (
        difference(of(8, [x for x in gates if x not in others]), of(8, [x for x in after if x not in others]))
        is None
    )
    assert [x for x in after if x not in others] == [g("c", "b"), g("c", "a")]
    assert search_windows(gates, [True] * len(gates), Search(4, 3, 10, 1), RULES)[0] == gates


def test_exchanges_open_what_no_single_rule_sees() -> None:
    """AB + ab + a on one target is B: no two merge until an exchange of the first two."""
    window = (g("d", "ABc"), g("d", "abc"), g("d", "a"))
    assert cheaper_form(window[:2], 100, RULES) is not None
    found = cheaper_form((g("d", "AB"), g("d", "ab"), g("d", "a")), 100, RULES)
    assert found is not None
    assert cost(of(4, found), "unitary") < cost(of(4, window), "unitary")


def test_the_search_gives_up_at_its_number_of_forms() -> None:
    hard = (g("b", "a"), g("a", "b"), g("c", "ab"), g("b", "c"), g("a", "bc"))
    assert cheaper_form(hard, 1, RULES) is None


@given(cascades(max_lines=6, max_gates=12, phase=True))
def test_masks_and_back(cascade: Cascade) -> None:
    assert unmasked(cascade.lines, masked(cascade)) == cascade
    assert weigh(masked(cascade), "measured") == cost(cascade, "measured")
    assert weigh(masked(cascade), "unitary").t == cascade_t(cascade, "unitary")
    assert negatives(masked(cascade)) == int((cascade.control & 1).sum())


@pytest.mark.parametrize("lines", [6, 64, 65])
def test_masks_in_bulk_are_those_of_the_loop(lines: int) -> None:
    line = lines - 1
    pattern = [(1 << line, 1, 2), (0, 1 << line, 4), (2, 0, 1 << line), (0, 0, 0), (1, 0, 0)]
    gates: list[Masks] = pattern * (BULK // 5 + 1)
    cascade = unmasked(lines, gates)
    assert cascade == of(lines, gates)
    assert masked(cascade) == gates
    assert masked(of(lines, pattern)) == pattern


def test_the_rewriter_forgets_rather_than_grow_without_end() -> None:
    rules = Rewriter("mixed", "unitary")
    for i in range(KEPT + 10):
        rules.changes(((1, 2 * i, 0), (1, 0, 0)))
    assert len(rules.known) <= KEPT


def test_changes_are_ranked_and_never_dearer() -> None:
    rules = Rewriter("mixed", "unitary")
    changes = rules.changes((g("c", "AB"), g("c", "ab")))
    assert [change.cheaper for change in changes] == [True, True, False]
    assert [weigh(change.gates, "unitary").t for change in changes] == [0, 0, 14]
    assert Rewriter("mixed", "unitary").improvement((g("c", "ab"), g("c", "a"))) == (g("c", "aB"),)
    assert Rewriter("positive", "unitary").improvement((g("c", "ab"), g("c", "a"))) is None


def test_a_reel_marks_what_changes_and_what_follows_a_gap() -> None:
    first, second, third = g("a"), g("b"), g("c")
    reel = Reel([first, second, third], [False] * 3)
    assert reel.advance()
    assert reel.is_settled(5)
    reel.replace(0, [])
    assert reel.advance()
    assert reel.done == [second]
    assert not reel.is_settled(0)
    assert reel.advance()
    assert reel.is_settled(0)
    assert not reel.is_settled(1)
    reel.step_back(9)
    assert reel.done == []
    while reel.advance():
        pass
    assert reel.done == [second, third]
    assert reel.changed() == [True, False]
