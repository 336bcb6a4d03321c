"""Random steps over a few words, as texts, and what they do in plain Python written for the tests."""

from __future__ import annotations

from hypothesis import strategies as st

from revsynth.spec.model import Permutation, Spec, Word

WORDS = (Word("x", 4), Word("k", 3, signed=True), Word("y", 3), Word("cell", 2, count=2))
"""14 input bits."""
FEW = (Word("x", 3), Word("k", 2, signed=True), Word("cell", 2, count=2))
"""9 input bits."""


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


def operands(words: tuple[Word, ...], apart: str) -> st.SearchStrategy[str]:
    """Expressions that do not read the word `apart`."""
    names = [name for word in words if word.name != apart for name, _ in word.elements()]
    terms = st.sampled_from([*names, "1", "2", "5", "-3"])
    pair = st.builds("{} {} {}".format, terms, st.sampled_from(["+", "-", "*", "&", "|", "^"]), terms)
    other = st.one_of(
        st.builds("{} // ({} | 1)".format, terms, terms),
        st.builds("({} if {} > {} else {})".format, terms, terms, terms, terms),
        st.builds("{} << ({} & 1)".format, terms, terms),
        st.builds("popcount({})".format, st.sampled_from(names)),
    )
    return st.one_of(terms, pair, other)


@st.composite
def steps(draw: st.DrawFn, words: tuple[Word, ...]) -> str:
    """One step."""
    text, word, bits = draw(st.sampled_from(targets(words)))
    operand = operands(words, word)
    signed = next(one.signed for one in words if one.name == word) and "[" not in text
    forms = [
        st.builds(f"{text} += {{}}".format, operand),
        st.builds(f"{text} -= {{}}".format, operand),
        st.builds(f"{text} ^= {{}}".format, operand),
        st.builds(f"{text} = rotate({text}, {{}})".format, st.one_of(operand, st.integers(-9, 9))),
        st.builds(f"{text} *= {{}}".format, st.integers(-20, 20).map(lambda k: 2 * k + 1)),
        st.sampled_from([f"{text} = -{text}", f"{text} = ~{text}"]),
        st.builds(f"{text} ^= {text} << {{}}".format, st.integers(1, 4)),
    ]
    if not signed:
        forms.append(st.builds(f"{text} ^= {text} >> {{}}".format, st.integers(1, 4)))
    read = {word}
    twins = [one for one in targets(words) if one[2] == bits and one[1] != word]
    if twins:
        other = draw(st.sampled_from(twins))
        if draw(st.integers(0, 5)) == 0:
            forms = [st.just(f"{text}, {other[0]} = {other[0]}, {text}")]
            read.add(other[1])
    step = draw(st.one_of(forms))
    free = [name for one in words if one.name not in read for name, _ in one.elements()]
    if free and draw(st.booleans()):
        condition = draw(st.sampled_from(free))
        relation = draw(st.sampled_from(["", " > 1", " == 2", " != 0", "[0]"]))
        step = f"if {condition}{relation}: {step}"
    return step


@st.composite
def step_specs(draw: st.DrawFn, words: tuple[Word, ...] = FEW, most: int = 3) -> Spec:
    """A spec of up to `most` steps, sometimes with a domain."""
    texts = draw(st.lists(steps(words), min_size=1, max_size=most))
    domain = draw(st.sampled_from([None, None, "x != 0", "k < x"]))
    return Spec(words, Permutation(steps=tuple(texts)), domain=domain)
