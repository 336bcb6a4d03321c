"""PLA files: types, layouts, free values, against a row-by-row look-up written apart."""

from __future__ import annotations

import pytest
from hypothesis import given
from hypothesis import strategies as st

from revsynth.logic.truth_table import unpack
from revsynth.spec.model import Cover, Outputs, Predicate, Word
from revsynth.spec.pla import parse_pla
from revsynth.spec.understand import Understanding, understand


def entries(understanding: Understanding) -> list[str]:
    """Each output as a string over all inputs, input 0 first: 0, 1, or - where free."""
    function = understanding.function
    found = []
    for values, care in zip(function.values, function.care, strict=True):
        pairs = zip(unpack(values, function.inputs), unpack(care, function.inputs), strict=True)
        found.append("".join(str(value) if fixed else "-" for value, fixed in pairs))
    return found


def table(text: str) -> list[str]:
    return entries(understand(parse_pla(text, "test.pla")))


def test_the_leftmost_column_is_bit_0() -> None:
    # changes under bit reversal: columns 1 0 0 are the input 1, columns 0 1 1 the input 6
    assert table(".i 3\n.o 2\n100 10\n011 01\n.e\n") == ["01000000", "00000010"]
    spec = parse_pla(".i 3\n.o 2\n100 10\n011 01\n.e\n", "test.pla")
    assert spec.inputs == (Word("v", 3),)
    assert isinstance(spec.body, Outputs)
    assert understand(spec).outputs == (Word("f", 2),)


def test_one_output_is_a_predicate() -> None:
    spec = parse_pla(".i 2\n.o 1\n1- 1\n.e\n")
    assert isinstance(spec.body, Predicate)
    assert spec.kind == "predicate"
    assert understand(spec).outputs == ()


@pytest.mark.parametrize(
    ("kind", "wanted"), [("f", "01000110"), ("fd", "01-00110"), ("fr", "01---11-"), ("fdr", "01---11-")]
)
def test_what_the_types_mean(kind: str, wanted: str) -> None:
    # inputs 1, 5, 6 on; 2 free or nothing; 0 off or nothing; 7 said to mean nothing; 3 and 4 not listed
    rows = "100 1\n101 1\n011 1\n010 -\n000 0\n111 ~\n"
    assert table(f".i 3\n.o 1\n.type {kind}\n{rows}.e\n") == [wanted]


def test_fd_is_what_a_file_without_type_means() -> None:
    rows = "1- 1\n01 -\n00 0\n"
    assert table(f".i 2\n.o 1\n{rows}") == table(f".i 2\n.o 1\n.type fd\n{rows}") == ["01-1"]


def test_whoever_asks_for_a_value_gets_it_where_rows_overlap() -> None:
    assert table(".i 2\n.o 1\n1- 1\n11 -\n") == ["0101"]
    assert table(".i 2\n.o 1\n.type fdr\n1- 0\n11 -\n01 1\n") == ["-010"]
    assert table(".i 2\n.o 1\n.type f\n1- 1\n11 0\n") == ["0101"]


@pytest.mark.parametrize(
    "text",
    [
        ".i 3\n.o 2\n1-0 10\n011 01\n.e\n",
        ".i 3\r\n.o 2\r\n1-0 10\r\n011 01\r\n.e\r\n",
        ".i 3\n.o 2\n1-010\n01101\n",
        ".i 3\n.o 2\n1 - 0 | 1 0\n0 1 1 | 0 1\n.end\n",
        "# a panel\n.i 3 # inputs\n.o 2\n.p 2\n\n1-0\t10 # first\n# between\n011 01\n.e\n",
        ".o 2\n.i 3\n1-0\n10\n01\n1 01\n.e\n",
        ".i 3\n.o 2\n120 10\n011 04\n.e\n",
        ".i 3\n.o 2\n.ilb p q r\n.ob s t\n.type f\n.p 9\n1-0 10\n011 01\n.e\n\n# done\n",
    ],
)
def test_layouts_of_one_table(text: str) -> None:
    assert table(text) == ["01010000", "00000010"]


def test_names_label_the_bits() -> None:
    spec = parse_pla(".i 2\n.o 2\n.ilb door lamp\n.ob red green\n11 11\n.e\n")
    assert spec.labels == {"v[0]": "door", "v[1]": "lamp", "f[0]": "red", "f[1]": "green"}
    assert parse_pla(".i 2\n.o 1\n.ilb door lamp\n.ob red\n11 1\n.e\n").labels == {
        "v[0]": "door",
        "v[1]": "lamp",
    }


def test_no_rows() -> None:
    assert table(".i 2\n.o 1\n.e\n") == ["0000"]
    assert table(".i 2\n.o 1\n.type fr\n.e\n") == ["----"]


def test_the_rows_as_read() -> None:
    spec = parse_pla(".i 2\n.o 2\n.type fdr\n2- 4~\n01 -0\n.e\n")
    assert spec.body == Outputs(cover=Cover(2, 2, "fdr", (("--", "1~"), ("01", "-0"))))


@st.composite
def pla_texts(draw: st.DrawFn) -> tuple[str, list[str] | None]:
    """A PLA in some layout, and what each output is (None where on meets off), row by row."""
    inputs, outputs = draw(st.integers(1, 5)), draw(st.integers(1, 3))
    kind = draw(st.sampled_from(("f", "fd", "fr", "fdr")))
    row = st.tuples(
        st.text("01-", min_size=inputs, max_size=inputs), st.text("01-~", min_size=outputs, max_size=outputs)
    )
    rows = draw(st.lists(row, max_size=8))
    gap = draw(st.sampled_from(("", " ", " | ", "\t", "\n")))
    within = draw(st.sampled_from(("", " ")))
    text = f".i {inputs}\n.o {outputs}\n.type {kind}\n"
    for left, right in rows:
        text += within.join(left) + gap + within.join(right) + draw(st.sampled_from(("\n", " # x\n", "\n\n")))
    return text + draw(st.sampled_from(("", ".e\n", ".end"))), look_up(inputs, outputs, kind, rows)


def look_up(inputs: int, outputs: int, kind: str, rows: list[tuple[str, str]]) -> list[str] | None:
    """The outputs at each input, from every row that matches it."""
    found = [""] * outputs
    for index in range(1 << inputs):
        bits = f"{index:0{inputs}b}"[::-1]
        said = [right for left, right in rows if all(a in ("-", b) for a, b in zip(left, bits, strict=True))]
        for output in range(outputs):
            here = {right[output] for right in said}
            on, off, free = "1" in here, "0" in here and "r" in kind, "-" in here and "d" in kind
            if on and off:
                return None
            found[output] += "1" if on else "0" if off else "-" if free or "r" in kind else "0"
    return found


@given(pla_texts())
def test_any_layout(case: tuple[str, list[str] | None]) -> None:
    text, wanted = case
    if wanted is None:
        with pytest.raises(ValueError, match=r"is both 1 .* and 0"):
            table(text)
    else:
        assert table(text) == wanted
