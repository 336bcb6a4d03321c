"""Random steps over a few words, as texts, and what they do in plain Python written for the tests."""

from __future__ import annotations

from collections.abc import Sequence
from functools import cache
from typing import Any

from hypothesis import strategies as st

from revsynth.spec.model import Permutation, Spec, Word

WORDS = (Word("x", 4), Word("k", 3, signed=True), Word("y", 3), Word("cell", 2, count=2))
"""14 input bits."""
FEW = (Word("x", 3), Word("k", 2, signed=True), Word("cell", 2, count=2))
"""9 input bits."""

_SMALL = st.integers(0, 59)


@cache
def targets(words: tuple[Word, ...]) -> list[tuple[str, str, int]]:
    """(text, word that it is part of, bits) of everything that a step may change."""
    found = []
    for word in words:
        for name, bits in word.elements():
            found.append((name, word.name, bits))
            found.append((f"{name}[{bits - 1}]", word.name, 1))
            if bits > 2:
                found.append((f"{name}[1:{bits}]", word.name, bits - 1))
    return found


SHAPES = (
    "{}",
    "{} + {}",
    "{} - {}",
    "{} * {}",
    "{} & {}",
    "{} ^ ({} | 1)",
    "{} // ({} | 1)",
    "({} if {} > 1 else 5)",
    "{} << ({} & 1)",
    "{} + popcount({} & 7)",
)
FORMS = (
    "{t} += {e}",
    "{t} -= {e}",
    "{t} ^= {e}",
    "{t} = rotate({t}, {e})",
    "{t} = rotate({t}, {k})",
    "{t} *= 2 * {k} + 1",
    "{t} = -{t}",
    "{t} = ~{t}",
    "{t} ^= {t} << {u}",
    "{t} ^= {t} >> {u}",
)


def names(words: tuple[Word, ...], *apart: str) -> list[str]:
    """Single words and array elements but for those of some words."""
    return [name for word in words if word.name not in apart for name, _ in word.elements()]


@st.composite
def steps(draw: st.DrawFn, words: tuple[Word, ...]) -> str:
    """One step."""

    def pick(items: Sequence[Any]) -> Any:
        return items[draw(_SMALL) % len(items)]

    text, word, bits = pick(targets(words))
    terms = [*names(words, word), "1", "2", "-3"]
    form = pick(FORMS)
    signed = next(one.signed for one in words if one.name == word) and "[" not in text
    if signed and ">>" in form:
        form = FORMS[0]
    operand = pick(SHAPES).format(pick(terms), pick(terms))
    step = form.format(t=text, e=operand, k=draw(_SMALL) - 30, u=1 + draw(_SMALL) % 4)
    changed = {word}
    twins = [one for one in targets(words) if one[2] == bits and one[1] != word]
    if twins and draw(_SMALL) % 6 == 0:
        other, partner, _ = pick(twins)
        step = f"{text}, {other} = {other}, {text}"
        changed.add(partner)
    free = names(words, *changed)
    if free and draw(_SMALL) % 2:
        relation = pick(["", " > 1", " == 2", " != 0", "[0]"])
        step = f"if {pick(free)}{relation}: {step}"
    return step


@st.composite
def step_specs(draw: st.DrawFn, words: tuple[Word, ...] = FEW, most: int = 3) -> Spec:
    """A spec of up to `most` steps, sometimes with a domain."""
    texts = draw(st.lists(steps(words), min_size=1, max_size=most))
    domain = draw(st.sampled_from([None, None, "x != 0", "k < x"]))
    return Spec(words, Permutation(steps=tuple(texts)), domain=domain)
