"""Random expressions in two spellings: ours, and plain Python for Python's own eval in tests.

Python spells the same tree with helper functions where the language differs: bits of words are calls
(an int has no [ ]), and products, shifts and powers go through functions that know the size limit.
"""

from __future__ import annotations

import itertools
from collections.abc import Callable, Sequence
from dataclasses import dataclass, field
from typing import Any

from hypothesis import strategies as st

from revsynth.spec.expression import Scope
from revsynth.spec.model import Word

Text = tuple[str, str]
"""An expression as we write it, and as Python evaluates it."""

WORDS = (Word("a", 3), Word("k", 2, signed=True), Word("cell", 2, count=2))
CONSTANTS: dict[str, Any] = {
    "edges": [[0, 1], [1, 2], [2, 0]],
    "table": [3, -1, 4, 1, 5, 0],
    "ragged": [[1], [2, 3], []],
    "big": [2**63, -(2**63), 2**64 + 1],
    "flags": [True, False],
}
SCOPE = Scope({word.name: word for word in WORDS}, CONSTANTS)
LIMIT = 4096


class TooLarge(Exception):  # noqa: N818
    """A result beyond the language's size limit."""


class NegativeExponent(Exception):  # noqa: N818
    """Python would go on with a fraction."""


class NoBit(Exception):  # noqa: N818
    """A bit outside the word."""


class NoSlice(Exception):  # noqa: N818
    """Bits outside the word."""


class NegativeOnes(Exception):  # noqa: N818
    """Ones of a negative number without a width."""


def _limited(result: int) -> int:
    if abs(result) >= 2**LIMIT:
        raise TooLarge
    return result


def _product(x: int, y: int) -> int:
    return _limited(x * y)


def _shift(x: int, n: int) -> int:
    if n > LIMIT and x:
        raise TooLarge
    return _limited(x << min(n, LIMIT + 1))


def _power(x: int, k: int) -> int:
    if k < 0:
        raise NegativeExponent
    if abs(x) > 1 and (abs(x).bit_length() - 1) * k > LIMIT:
        raise TooLarge
    return _limited(x**k)


def _bit(x: int, i: int, bits: int) -> int:
    if i not in range(bits):
        raise NoBit
    return int(format(x % (1 << bits), f"0{bits}b")[bits - 1 - i])


def _bits(x: int, lo: int, hi: int, bits: int) -> int:
    if not 0 <= lo <= hi <= bits:
        raise NoSlice
    digits = format(x % (1 << bits), f"0{bits}b")[::-1][lo:hi][::-1]
    return int(digits or "0", 2)


def _ones(x: int, bits: int | None = None) -> int:
    if bits is None and x < 0:
        raise NegativeOnes
    return bin(x % (1 << bits) if bits is not None else x).count("1")


def _distinct(*values: Any) -> bool:
    items = list(values[0] if len(values) == 1 else values)
    return all(x != y for x, y in itertools.combinations(items, 2))


OUTSIDE: dict[str, Any] = {
    "product": _product,
    "shift": _shift,
    "power": _power,
    "bit": _bit,
    "bits": _bits,
    "ones": _ones,
    "distinct": _distinct,
}


@dataclass
class _Writer:
    """Draws expressions; `numbers` are the loop variables in reach, as plain numbers."""

    draw: Callable[..., Any]
    numbers: list[Text] = field(default_factory=list)
    counter: int = 0

    def pick(self, options: Sequence[Any]) -> Any:
        return self.draw(st.sampled_from(options))

    def number(self, depth: int) -> Text:
        """Any number."""
        if depth <= 0:
            return self.leaf()
        return self.pick(
            [
                self.leaf_at,
                self.arithmetic,
                self.arithmetic,
                self.arithmetic,
                self.logic,
                self.comparison,
                self.comparison,
                self.choice,
                self.call,
                self.loop,
                self.loop,
                self.index,
            ]
        )(depth)

    def leaf_at(self, depth: int) -> Text:
        return self.leaf()

    def leaf(self) -> Text:
        words: list[Text] = [("a", "a"), ("k", "k"), ("cell[0]", "cell[0]"), ("cell[-1]", "cell[-1]")]
        words += [("a[0]", "bit(a, 0, 3)"), ("a[2]", "bit(a, 2, 3)"), ("k[1]", "bit(k, 1, 2)")]
        words += [("a[1:3]", "bits(a, 1, 3, 3)"), ("k[:]", "bits(k, 0, 2, 2)")]
        small = [str(value) for value in (0, 1, 2, 3, 5, 7, -1, -2, True, False)]
        large = [str(value) for value in (2**31, 2**62, 2**63 - 1, 2**63, -(2**63), 2**64)]
        kind = self.pick("wwwwnssl")
        if kind == "n" and self.numbers:
            return self.pick(self.numbers)
        text = self.pick(small if kind in "sn" else large) if kind in "nsl" else None
        return self.pick(words) if text is None else (f"({text})", f"({text})")

    def arithmetic(self, depth: int) -> Text:
        x, px = self.number(depth - 1)
        kind = self.pick(["+", "-", "*", "//", "%", "&", "|", "^", "<<", ">>", "**", "~", "-u", "+u"])
        if kind == "~":
            return f"(~{x})", f"(~int({px}))"
        if kind in ("-u", "+u"):
            return f"({kind[0]}{x})", f"({kind[0]}{px})"
        y, py = self.number(depth - 1) if self.draw(st.booleans()) else self.leaf()
        if kind in ("*", "<<", "**"):
            name = {"*": "product", "<<": "shift", "**": "power"}[kind]
            return f"({x} {kind} {y})", f"{name}({px}, {py})"
        if kind == ">>":
            py = f"min({py}, 9999)"
        return f"({x} {kind} {y})", f"({px} {kind} {py})"

    def logic(self, depth: int) -> Text:
        if self.pick("nao") == "n":
            x, px = self.number(depth - 1)
            return f"(not {x})", f"(not {px})"
        word = self.pick([" and ", " or "])
        parts = [self.number(depth - 1) for _ in range(self.draw(st.integers(2, 3)))]
        return f"({word.join(x for x, _ in parts)})", f"({word.join(y for _, y in parts)})"

    def comparison(self, depth: int) -> Text:
        if self.pick("clll") == "c":
            (x, px), (y, py) = self.number(depth - 1), self.list(depth - 1)
            word = self.pick(["in", "not in"])
            return f"({x} {word} {y})", f"({px} {word} {py})"
        left, outside = self.number(depth - 1)
        for _ in range(self.pick([1, 1, 2, 3])):
            op = self.pick(["==", "!=", "<", "<=", ">", ">="])
            right, outside_right = self.number(depth - 1)
            left, outside = f"{left} {op} {right}", f"{outside} {op} {outside_right}"
        return f"({left})", f"({outside})"

    def choice(self, depth: int) -> Text:
        (x, px), (c, pc), (y, py) = (self.number(depth - 1) for _ in range(3))
        return f"({x} if {c} else {y})", f"({px} if {pc} else {py})"

    def call(self, depth: int) -> Text:
        name = self.pick(
            ["abs", "min", "max", "pow3", "pow2", "popcount", "word", "parity", "distinct", "len"]
        )
        x, px = self.number(depth - 1)
        if name == "abs":
            return f"abs({x})", f"abs({px})"
        if name == "popcount":
            return f"popcount({x} + 0)", f"ones({px} + 0)"
        if name == "parity":
            return f"parity({x} + 0)", f"(ones({px} + 0) & 1)"
        if name == "word":
            return self.pick([("popcount(k)", "ones(k, 2)"), ("parity(a)", "(ones(a, 3) & 1)")])
        if name == "len":
            y, py = self.list(depth - 1)
            return f"len({y})", f"len({py})"
        y, py = self.number(depth - 1)
        if name == "pow2":
            return f"pow({x}, {y})", f"power({px}, {py})"
        if name == "pow3":
            z, pz = self.number(depth - 1)
            return f"pow({x}, {y}, {z})", f"pow({px}, {py}, {pz})"
        return f"{name}({x}, {y})", f"{name}({px}, {py})"

    def loop(self, depth: int) -> Text:
        """A function of a list or comprehension."""
        name = self.pick(["sum", "min", "max", "any", "all", "distinct", "start"])
        x, px = self.inside(depth - 1) if self.draw(st.booleans()) else self.list(depth - 1)
        if name == "start":
            y, py = self.number(depth - 1)
            return (f"sum(({x}), {y})", f"sum(({px}), {py})")
        return f"{name}({x})", f"{name}({px})"

    def list(self, depth: int) -> Text:
        """A list of numbers."""
        kind = self.pick(
            ["cell", "table", "big", "flags", "row", "row2", "display", "range", "comp", "comp", "if"]
        )
        if kind in ("cell", "table", "big", "flags") or depth <= 0:
            name = kind if kind in CONSTANTS else "cell"
            return name, name
        if kind in ("row", "row2"):
            x, px = self.near()
            name = "edges" if kind == "row" else "ragged"
            return f"{name}[{x}]", f"{name}[{px}]"
        if kind == "display":
            parts = [self.number(depth - 1) for _ in range(self.draw(st.integers(0, 3)))]
            return f"[{', '.join(x for x, _ in parts)}]", f"[{', '.join(y for _, y in parts)}]"
        if kind == "range":
            parts = [self.near() for _ in range(self.pick([1, 2, 3]))]
            return f"range({', '.join(x for x, _ in parts)})", f"range({', '.join(y for _, y in parts)})"
        if kind == "if":
            (x, px), (c, pc), (y, py) = self.list(depth - 1), self.number(depth - 1), self.list(depth - 1)
            return f"({x} if {c} else {y})", f"({px} if {pc} else {py})"
        x, px = self.inside(depth)
        return f"[{x}]", f"[{px}]"

    def inside(self, depth: int) -> Text:
        """The inside of a comprehension."""
        known = list(self.numbers)
        tail, outside = "", ""
        for _ in range(self.pick([1, 1, 2])):
            self.counter += 1
            if self.pick("lllp") == "p":
                names = f"i{self.counter}, j{self.counter}"
                values = self.pick(
                    [("edges", "edges"), ("[[a, k], [2, a]]", "[[a, k], [2, a]]"), ("ragged", "ragged")]
                )
            else:
                names, values = f"i{self.counter}", self.list(depth - 1)
            self.numbers = [*self.numbers, *((name, name) for name in names.split(", "))]
            tail, outside = f"{tail} for {names} in {values[0]}", f"{outside} for {names} in {values[1]}"
            if self.pick("nny") == "y":
                x, px = self.number(min(depth - 1, 1))
                tail, outside = f"{tail} if {x}", f"{outside} if {px}"
        x, px = self.number(depth - 1)
        self.numbers = known
        return x + tail, px + outside

    def index(self, depth: int) -> Text:
        kind = self.pick(["list", "list", "bit", "bits", "edge"])
        x, px = self.near()
        if kind == "bit":
            return f"a[{x}]", f"bit(a, {px}, 3)"
        if kind == "bits":
            y, py = self.near()
            return f"k[{x}:{y}]", f"bits(k, {px}, {py}, 2)"
        if kind == "edge":
            return f"edges[{x}][a & 1]", f"edges[{px}][a & 1]"
        y, py = self.list(depth - 1)
        return f"({y})[{x}]", f"({py})[{px}]"

    def near(self) -> Text:
        """A small number, which often but not always is a good index."""
        options: list[Text] = [
            (text, text) for text in ("a", "k", "k + 1", "a - 3", "cell[1]", "a % 3", "a & 1")
        ]
        options += [(text, text) for text in ("0", "1", "2", "3", "-1", "-2")]
        return self.pick([*options, *self.numbers])


@st.composite
def expressions(draw: Callable[..., Any], depth: int = 4) -> Text:
    """A random expression over SCOPE, as we write it and as Python evaluates it."""
    return _Writer(draw).number(draw(st.integers(1, depth)))
