"""Random specs as the text of their files, with what Python's own eval says of every input.

Nothing here uses the project's readers or evaluators: words are a subclass of int whose bits are digits of
a string, expressions are evaluated by Python, formulas by the closures they were made from.
"""

from __future__ import annotations

import json
from collections.abc import Callable, Iterator
from contextlib import suppress
from dataclasses import dataclass
from random import Random
from typing import Any

Wanted = "tuple[int | None, ...]"
LAMP_WORDS = ("a", "k", "lamp", "x", "q0", "Beam", "t", "v")
MODULI = (3, 5, 7, 11, 13)


class Word(int):
    """A value of a word of `bits` bits: an int whose bits can be asked for."""

    bits: int

    def __new__(cls, pattern: int, bits: int, signed: bool) -> Word:
        """From the bit pattern."""
        negative = signed and pattern >> (bits - 1)
        made = super().__new__(cls, pattern - (1 << bits) if negative else pattern)
        made.bits = bits
        return made

    def digits(self) -> str:
        """Bit 0 first."""
        return format(int(self) % (1 << self.bits), f"0{self.bits}b")[::-1]

    def __getitem__(self, place: int | slice) -> int:
        if isinstance(place, slice):
            lo = 0 if place.start is None else place.start
            hi = self.bits if place.stop is None else place.stop
            if not 0 <= lo <= hi <= self.bits:
                raise IndexError(place)
            return int(self.digits()[lo:hi][::-1] or "0", 2)
        if not 0 <= place < self.bits:
            raise IndexError(place)
        return int(self.digits()[place])


def popcount(x: int) -> int:
    """Ones of a word's pattern, or of a number from 0 on."""
    if isinstance(x, Word):
        return x.digits().count("1")
    if x < 0:
        raise ValueError(x)
    return bin(x).count("1")


HELPERS: dict[str, Any] = {
    "popcount": popcount,
    "parity": lambda x: popcount(x) & 1,
    "distinct": lambda *values: len(set(values)) == len(values),
}


@dataclass(frozen=True)
class Declared:
    """An input word as declared."""

    name: str
    bits: int
    signed: bool = False
    count: int | None = None

    @property
    def total(self) -> int:
        """Bits in all."""
        return self.bits * (self.count or 1)

    def toml(self) -> str:
        """Its line in a spec file."""
        if not self.signed and self.count is None:
            return f"{self.name} = {self.bits}"
        keys = [f"bits = {self.bits}"]
        keys += ["signed = true"] if self.signed else []
        keys += [] if self.count is None else [f"count = {self.count}"]
        return f"{self.name} = {{ {', '.join(keys)} }}"

    def registers(self) -> Iterator[tuple[str, int]]:
        """Name in the spec and width of each register."""
        if self.count is None:
            yield self.name, self.bits
        else:
            for index in range(self.count):
                yield f"{self.name}[{index}]", self.bits


@dataclass(frozen=True)
class Case:
    """A spec file and what it means.

    `wanted[x]`: the output bits wanted at input x, None where free; whole rows outside the domain are free.
    `refused`: the spec must be refused instead.
    """

    text: str
    ending: str
    kind: str
    inputs: tuple[Declared, ...]
    outputs: tuple[tuple[str, int], ...]
    wanted: tuple[tuple[int | None, ...], ...]
    refused: str | None = None

    @property
    def bits(self) -> int:
        """Input bits."""
        return sum(word.total for word in self.inputs)


def values_at(words: tuple[Declared, ...], x: int) -> dict[str, Any]:
    """The words at combined index x, first word lowest."""
    found: dict[str, Any] = {}
    for word in words:
        parts = []
        for _ in range(word.count or 1):
            parts.append(Word(x & ((1 << word.bits) - 1), word.bits, word.signed))
            x >>= word.bits
        found[word.name] = parts[0] if word.count is None else parts
    return found


def bits_of(value: int, width: int) -> tuple[int, ...]:
    """Low bits, bit 0 first."""
    return tuple((value >> bit) & 1 for bit in range(width))


class Writer:
    """Draws expressions over declared words and the constants `table` and `edges`."""

    def __init__(self, rng: Random, words: tuple[Declared, ...], constants: dict[str, Any]) -> None:
        self.rng = rng
        self.words = words
        self.constants = constants
        self.loops: list[str] = []

    def leaf(self) -> str:
        """A word, a bit, an element or a small number."""
        rng = self.rng
        if self.loops and rng.random() < 0.4:
            return rng.choice(self.loops)
        if rng.random() < 0.25:
            return str(rng.choice((0, 1, 2, 3, 5, 7, 12, "True", "(-3)", 2**40, 2**63, 2**64 + 1)))
        word = rng.choice(self.words)
        if word.count is not None:
            return f"{word.name}[{rng.randrange(word.count)}]"
        kind = rng.random()
        if kind < 0.2:
            return f"{word.name}[{rng.randrange(word.bits)}]"
        if kind < 0.3:
            low = rng.randrange(word.bits)
            return f"{word.name}[{low}:{rng.randrange(low, word.bits) + 1}]"
        return word.name

    def number(self, depth: int) -> str:
        """An integer."""
        if depth <= 0:
            return self.leaf()
        rng = self.rng
        x, y = self.number(depth - 1), self.number(depth - 1 - rng.randrange(2))
        modulus = rng.choice(MODULI)
        return rng.choice(
            [
                f"({x} + {y})", f"({x} - {y})", f"({x} * {y})", f"({x} & {y})", f"({x} | {y})",
                f"({x} ^ {y})", f"(~{x})", f"(-{x})", f"({x} % {modulus})", f"({x} // {modulus})",
                f"({x} >> {rng.randrange(4)})",
                f"({x} << ({y} & 3))", f"({x} >> abs({y}) % 5)", f"({x} % 7) ** {rng.randrange(4)}",
                f"({x} // {y} if {y} else {x})", f"({x} if {self.condition(depth - 1)} else {y})",
                f"abs({x})", f"min({x}, {y})", f"max({x}, {y}, 2)", f"pow({x}, 3, {modulus})",
                f"popcount({x} & 255)", f"parity({self.leaf()} & 63)", f"({x} and {y})", f"({x} or {y})",
                f"table[{x} % 5]", f"({x} % {y})" if rng.random() < 0.1 else f"({x} % (abs({y}) + 1))",
                self.loop(depth),
            ]
        )  # fmt: skip

    def loop(self, depth: int) -> str:
        """A sum over a range, a table or an array."""
        rng = self.rng
        arrays = [word.name for word in self.words if word.count is not None]
        over = rng.choice(["range(3)", "table", "range(1, 6, 2)", *arrays])
        name = f"i{len(self.loops)}"
        self.loops.append(name)
        inside = self.number(depth - 1)
        test = f" if {self.condition(0)}" if rng.random() < 0.3 else ""
        self.loops.pop()
        return f"sum({inside} for {name} in {over}{test})"

    def condition(self, depth: int) -> str:
        """A Boolean."""
        rng = self.rng
        x, y = self.number(depth), self.number(depth - 1)
        if depth <= 0:
            return f"{x} {rng.choice(['==', '!=', '<', '>=', '<=', '>'])} {y}"
        c = self.condition(depth - 1)
        return rng.choice(
            [
                f"{x} == {y}", f"({x}) % 8 < 3", f"{x} < {y} <= 9", f"({c} and {x} != {y})",
                f"({c} or {x} > {y})", f"(not {c})", f"{x} in [1, 2, 5, 6]", f"{x} not in table",
                f"distinct({x}, {y}, 3)", f"any({x} == i9 for i9 in table)",
                f"all(({y} + i9) % 3 != 1 for i9 in range(3))", f"bool_{rng.randrange(2)}",
                f"all({y} != i8 + i9 for i8, i9 in edges)",
            ]
        )  # fmt: skip


def words_for(rng: Random, most: int, arrays: bool = True) -> tuple[Declared, ...]:
    """Words of `most` bits at most in all."""
    names = rng.sample(LAMP_WORDS, 4)
    found: list[Declared] = []
    left = rng.randint(1, most)
    while left and len(found) < 4:
        bits = rng.randint(1, left)
        count = rng.randint(1, left // bits) if arrays and rng.random() < 0.25 else None
        found.append(Declared(names[len(found)], bits, rng.random() < 0.25, count))
        left -= found[-1].total
    return tuple(found)


CONSTANTS: dict[str, Any] = {
    "table": [3, 0, 6, 1, 2],
    "edges": [[0, 1], [1, 2], [2, 4]],
    "bool_0": False,
    "bool_1": True,
}


def head(rng: Random, words: tuple[Declared, ...], constants: bool) -> str:
    """The sections before the main one, but the domain."""
    title = f"title = {json.dumps('Lamp plan ' + str(rng.randrange(100)))}\n\n" if rng.random() < 0.7 else ""
    text = title + "[inputs]\n" + "".join(word.toml() + "\n" for word in words)
    if constants:
        named = ((name, json.dumps(value)) for name, value in CONSTANTS.items())
        text += "\n[constants]\n" + "".join(f"{name} = {value}\n" for name, value in named)
    return text


def evaluated(text: str, words: tuple[Declared, ...], x: int) -> Any:
    """What Python says."""
    return eval(text, {**HELPERS, **CONSTANTS, **values_at(words, x)})


class Refused(Exception):  # noqa: N818
    """What must be refused, and why."""


def domain_of(rng: Random, words: tuple[Declared, ...]) -> tuple[str, list[bool]]:
    """A [domain] section (often none) and the inputs inside."""
    size = 1 << sum(word.total for word in words)
    if rng.random() < 0.65:
        return "", [True] * size
    text = Writer(rng, words, CONSTANTS).condition(rng.randrange(3))
    section = f"\n[domain]\nwhere = {json.dumps(text)}\n"
    inside = []
    for x in range(size):
        try:
            inside.append(bool(evaluated(text, words, x)))
        except (ArithmeticError, ValueError, IndexError) as error:
            raise Refused(f"{error!r} in the domain at {x}", section) from None
    return section, inside


def results(text: str, words: tuple[Declared, ...], inside: list[bool]) -> list[Any]:
    """The value at each input inside, None outside."""
    found = []
    for x, here in enumerate(inside):
        try:
            found.append(evaluated(text, words, x) if here else None)
        except (ArithmeticError, ValueError, IndexError) as error:
            raise Refused(f"{error!r} at {x}") from None
    return found


def where_case(rng: Random, most: int) -> Case:
    """A predicate by expression."""
    words = words_for(rng, most)
    start = head(rng, words, constants=True)
    writer = Writer(rng, words, CONSTANTS)
    text = writer.condition(rng.randrange(1, 4)) if rng.random() < 0.9 else writer.number(2)
    section = ""
    try:
        section, inside = domain_of(rng, words)
        values = results(text, words, inside)
        if any(value is not None and value not in (0, 1) for value in values):
            raise Refused("not Boolean")
        wanted = tuple((None,) if value is None else (int(value),) for value in values)
        refused = None
    except Refused as error:
        section = error.args[1] if len(error.args) > 1 else section
        wanted, refused = (), str(error.args[0])
    whole = f"{start}{section}\n[predicate]\nwhere = {json.dumps(text)}\n"
    return Case(whole, ".toml", "predicate", words, (("mark", 1),), wanted, refused)


LEVELS: dict[str, int] = {
    "?:": 0, "<=>": 1, "=>": 2, "||": 3, "or": 3, "&&": 4, "and": 4, "not": 5, "==": 6, "!=": 6, "|": 7,
    "^": 8, "&": 9, "~": 10, "!": 10, "leaf": 11,
}  # fmt: skip
Bits = dict[str, int]
Node = tuple[str, int, Callable[[Bits], int]]
TWO: dict[str, Callable[[int, int], int]] = {
    "<=>": lambda x, y: int(x == y), "=>": lambda x, y: int(not x or y), "||": lambda x, y: x | y,
    "or": lambda x, y: x | y, "&&": lambda x, y: x & y, "and": lambda x, y: x & y,
    "==": lambda x, y: int(x == y), "!=": lambda x, y: x ^ y, "|": lambda x, y: x | y,
    "^": lambda x, y: x ^ y, "&": lambda x, y: x & y,
}  # fmt: skip
MANY: dict[str, Callable[[list[int]], int]] = {
    "Xor": lambda v: sum(v) % 2, "Majority": lambda v: int(2 * sum(v) > len(v)),
    "OneHot": lambda v: int(sum(v) == 1), "OneHot0": lambda v: int(sum(v) < 2),
    "And": lambda v: int(all(v)), "Or": lambda v: int(any(v)),
}  # fmt: skip


def formula(rng: Random, names: list[str], depth: int) -> Node:
    """A formula's text, how tightly it binds, and what it means; brackets only where they are needed."""
    if depth <= 0 or rng.random() < 0.1:
        if rng.random() < 0.06:
            value = rng.randrange(2)
            return str(value), LEVELS["leaf"], lambda _: value
        name = rng.choice(names)
        return name, LEVELS["leaf"], lambda bits: bits[name]

    def operand(level: int) -> tuple[str, Callable[[Bits], int]]:
        text, own, meaning = formula(rng, names, depth - 1)
        return (text if own > level else f"({text})"), meaning

    kind = rng.choice([*TWO, *MANY, "~", "!", "not", "?:", "ITE", "Not"])
    if kind in TWO:
        (x, f), (y, g) = operand(LEVELS[kind]), operand(LEVELS[kind])
        return f"{x} {kind} {y}", LEVELS[kind], lambda bits: TWO[kind](f(bits), g(bits))
    if kind in MANY:
        parts = [operand(-1) for _ in range(rng.choice((1, 3, 5)))]
        text = f"{kind}({', '.join(part for part, _ in parts)})"
        return text, LEVELS["leaf"], lambda bits: MANY[kind]([g(bits) for _, g in parts])
    if kind in ("?:", "ITE"):
        (c, f), (x, g), (y, h) = (operand(0 if kind == "?:" else -1) for _ in range(3))
        text = f"{c} ? {x} : {y}" if kind == "?:" else f"ITE({c}, {x}, {y})"
        return text, LEVELS["?:" if kind == "?:" else "leaf"], lambda b: g(b) if f(b) else h(b)
    x, f = operand(-1 if kind == "Not" else LEVELS[kind] - 1)
    text = {"Not": f"Not({x})", "not": f"not {x}"}.get(kind, f"{kind}{x}")
    return text, LEVELS["leaf" if kind == "Not" else kind], lambda bits: 1 - f(bits)


def formula_case(rng: Random, most: int) -> Case:
    """A predicate by formula."""
    words = words_for(rng, most)
    places: dict[str, tuple[str, int, int]] = {}
    for word in words:
        for element in range(word.count or 1):
            stem = word.name if word.count is None else f"{word.name}[{element}]"
            for bit in range(word.bits):
                places[stem if word.bits == 1 and rng.random() < 0.5 else f"{stem}[{bit}]"] = (
                    word.name,
                    element,
                    bit,
                )
    text, _, meaning = formula(rng, list(places), rng.randint(1, 4))
    wanted = []
    for x in range(1 << sum(word.total for word in words)):
        values = values_at(words, x)
        bits = {}
        for place, (name, element, bit) in places.items():
            value = values[name]
            bits[place] = (value[element] if isinstance(value, list) else value)[bit]
        wanted.append((meaning(bits),))
    whole = f"{head(rng, words, False)}\n[predicate]\nformula = {json.dumps(text)}\n"
    return Case(whole, ".toml", "predicate", words, (("mark", 1),), tuple(wanted))


def table_case(rng: Random, most: int) -> Case:
    """A predicate by table."""
    words = words_for(rng, most)
    size = 1 << sum(word.total for word in words)
    signs = rng.choice(["01", "0001", "0111", "01-", "01----", "0", "1", "-"])
    table = "".join(rng.choice(signs) for _ in range(size))
    section, inside = "", [True] * size
    with suppress(Refused):
        section, inside = domain_of(rng, words)
    shown = "".join(sign + rng.choice(["", "", " ", "_"]) for sign in table)
    constants = bool(section)
    whole = f"{head(rng, words, constants)}{section}\n[predicate]\ntable = {json.dumps(shown)}\n"
    wanted = tuple(
        ((None if sign == "-" or not here else int(sign)),) for sign, here in zip(table, inside, strict=True)
    )
    return Case(whole, ".toml", "predicate", words, (("mark", 1),), wanted)


def cnf_case(rng: Random, most: int) -> Case:
    """A CNF."""
    n = rng.randint(1, most)
    clauses = [
        [rng.randint(1, n) * rng.choice((1, -1)) for _ in range(rng.randint(1, 4))]
        for _ in range(rng.randint(0, 2 * n))
    ]
    if rng.random() < 0.05:
        clauses.append([])
    words = (Declared("v", n),)
    wanted = tuple(
        (int(all(any((x >> (abs(v) - 1) & 1) == (v > 0) for v in clause) for clause in clauses)),)
        for x in range(1 << n)
    )
    lines = "".join(" ".join(map(str, [*clause, 0])) + "\n" for clause in clauses)
    text = f"c lamps\np cnf {n} {len(clauses)}\n{lines}"
    return Case(text, ".cnf", "predicate", words, (("mark", 1),), wanted)


def pla_case(rng: Random, most: int) -> Case:
    """A PLA whose rows do not overlap but in type f."""
    n, m = rng.randint(1, most), rng.randint(1, 3)
    kind = rng.choice(["f", "fd", "fr", "fdr", None])
    rows: list[str] = []
    parts = [""]
    while parts:
        part = parts.pop()
        if len(part) == n:
            rows.append(part)
        elif rng.random() < 0.35:
            parts.append(part + "-")
        else:
            parts += [part + "0", part + "1"]
    rows = [row for row in rows if rng.random() < 0.8]
    if kind == "f":
        rows += ["".join(rng.choice("01-") for _ in range(n)) for _ in range(2)]
    signs = {"f": "01", "fd": "01-", "fr": "01~", "fdr": "01-", None: "01"}[kind]
    covers = [(row, "".join(rng.choice(signs) for _ in range(m))) for row in rows]
    rest = {"f": 0, "fd": 0, "fr": None, "fdr": None, None: 0}[kind]
    meaning = {"1": 1, "0": 0 if kind in ("fr", "fdr") else rest, "-": None, "~": rest}
    wanted = []
    for x in range(1 << n):
        row: list[int | None] = [rest] * m
        for part, out in covers:
            if all(sign == "-" or int(sign) == x >> bit & 1 for bit, sign in enumerate(part)):
                for bit, sign in enumerate(out):
                    row[bit] = 1 if kind == "f" and row[bit] else meaning[sign]
        wanted.append(tuple(row))
    text = f".i {n}\n.o {m}\n" + (f".type {kind}\n" if kind else "")
    text += "".join(f"{part} {out}\n" for part, out in covers) + ".e\n"
    names = (("mark", 1),) if m == 1 else (("f", m),)
    return Case(text, ".pla", "predicate" if m == 1 else "outputs", (Declared("v", n),), names, tuple(wanted))


def outputs_case(rng: Random, most: int) -> Case:
    """One to three output words, by expression or table."""
    words = words_for(rng, most)
    size = 1 << sum(word.total for word in words)
    start = head(rng, words, constants=True)
    body, rows, names = "", [()] * size, []
    refused, section = None, ""
    try:
        section, inside = domain_of(rng, words)
    except Refused as error:
        section, inside, refused = error.args[1], [True] * size, str(error.args[0])
    for index in range(rng.choice((1, 1, 1, 2, 3))):
        name = ("total", "code", "y")[index]
        signed, given = rng.random() < 0.3, rng.randint(1, 4)
        stated = rng.random() < 0.7
        try:
            if rng.random() < 0.7:
                text = Writer(rng, words, CONSTANTS).number(rng.randint(1, 3))
                key = f"value = {json.dumps(text)}"
                values = results(text, words, inside)
            else:
                low = -(1 << (given - 1)) if signed else 0
                free = rng.choice((0.0, 0.3))
                numbers = [rng.randrange(low, low + (1 << given)) for _ in range(size)]
                listed = ["-" if rng.random() < free else number for number in numbers]
                key = f"table = {json.dumps(listed)}"
                values = [
                    None if entry == "-" or not here else entry
                    for entry, here in zip(listed, inside, strict=True)
                ]
            known = [int(value) for value in values if value is not None]
            width = given if stated else width_of(known, signed)
        except Refused as error:
            refused, values, width = str(error.args[0]), [None] * size, 1
        names.append((name, width))
        key += f", bits = {given}" if stated else ""
        body += f"{name} = {{ {key}{', signed = true' if signed else ''} }}\n"
        rows = [
            (*row, *((None,) * width if value is None else bits_of(int(value), width)))
            for row, value in zip(rows, values, strict=True)
        ]
    whole = f"{start}{section}\n[outputs]\n{body}"
    return Case(whole, ".toml", "outputs", words, tuple(names), tuple(rows), refused)


def width_of(values: list[int], signed: bool) -> int:
    """Just wide enough for every value."""
    if not signed and any(value < 0 for value in values):
        raise Refused("negative")
    bits = [(value if value >= 0 else ~value).bit_length() + signed for value in values]
    return max([1, *bits])


def values_case(rng: Random, most: int) -> Case:
    """A permutation by images, some free."""
    n = rng.randint(1, min(most, 4))
    images = list(range(1 << n))
    if rng.random() < 0.8:
        rng.shuffle(images)
    else:
        i, j = rng.randrange(1 << n), rng.randrange(1 << n)
        images[i], images[j] = images[j], images[i]
    free = rng.choice((0.0, 0.0, 0.2, 0.7, 1.0))
    shown = [("-" if rng.random() < free else image) for image in images]
    words, start = (Declared("v", n),), ""
    if rng.random() < 0.5:
        words = words_for(rng, n)
        gap = n - sum(word.total for word in words)
        words = (*words, Declared("rest", gap)) if gap else words
        start = head(rng, words, constants=False)
    wanted = tuple((None,) * n if image == "-" else bits_of(image, n) for image in shown)
    text = f"{start}\n[permutation]\nvalues = {json.dumps(shown)}\n"
    return Case(text, ".toml", "permutation", words, (), wanted)


def map_case(rng: Random, most: int) -> Case:
    """A permutation by new values of words."""
    a, b = rng.randint(1, 3), rng.randint(1, max(1, min(2, most - 3)))
    words = (Declared("a", a, rng.random() < 0.2), Declared("k", b, rng.random() < 0.2))
    modulus = rng.randint(1, (1 << a) - 1)
    choices: list[tuple[dict[str, str], str]] = [
        ({"a": f"(a * {rng.choice((1, 3, 5))} + {rng.randrange(9)} * k) % {1 << a}"}, ""),
        ({"a": f"a ^ {rng.randrange(1 << a)}", "k": f"~k & {(1 << b) - 1}"}, ""),
        ({"k": f"(k + popcount(a)) % {1 << b}"}, ""),
        ({"a": f"(a + {rng.randrange(5)}) % {modulus}"}, f"0 <= a < {modulus}"),
        ({"a": f"(a + k) % {modulus} if a < {modulus} else a"}, ""),
        ({"a": f"pow(a, 3, {1 << a})"}, ""),
    ]
    new, domain = rng.choice(choices)
    section = f"\n[domain]\nwhere = {json.dumps(domain)}\n" if domain else ""
    wanted: list[tuple[int | None, ...]] = []
    refused = None
    for x in range(1 << (a + b)):
        values = values_at(words, x)
        if domain and not eval(domain, {**HELPERS, **values}):
            wanted.append((None,) * (a + b))
            continue
        row: tuple[int, ...] = ()
        for word in words:
            value = int(eval(new.get(word.name, word.name), {**HELPERS, **values}))
            low = -(1 << (word.bits - 1)) if word.signed else 0
            if not low <= value < low + (1 << word.bits):
                refused = f"{value} does not fit {word.name}"
            row += bits_of(value, word.bits)
        wanted.append(row)
    known = [row for row in wanted if None not in row]
    if len(set(known)) != len(known):
        refused = "not one-to-one"
    body = ", ".join(f"{name} = {json.dumps(text)}" for name, text in new.items())
    text = f"{head(rng, words, constants=False)}{section}\n[permutation]\nmap = {{ {body} }}\n"
    return Case(text, ".toml", "permutation", words, (), tuple(wanted), refused)


KINDS: tuple[Callable[[Random, int], Case], ...] = (
    where_case, where_case, formula_case, table_case, cnf_case, pla_case, outputs_case, outputs_case,
    values_case, map_case,
)  # fmt: skip


def random_case(rng: Random, most: int = 5) -> Case:
    """A spec of any kind of at most `most` input bits."""
    return rng.choice(KINDS)(rng, most)
