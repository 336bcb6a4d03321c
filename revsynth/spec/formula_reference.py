"""A second reading of formulas, on purpose the slow and obvious one: nothing is shared with `formula`.

Innermost brackets first; within brackets one pass for each level of operators, tightest first, as with pencil
and paper. The result is a list of nodes, to be evaluated operation by operation on Python integers or handed
to PyEDA. It expects a formula that `formula` has accepted.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field
from functools import reduce

from revsynth.errors import ExpressionError
from revsynth.spec.layout import Value
from revsynth.spec.model import Word

_SIGNS = ("<=>", "=>", "==", "!=", "&&", "||")
_SAME = {"!": "~", "&&": "and", "||": "or"}
_MOST_BITS = 1 << 28
"""Nodes times inputs that are held at once: 32 MB."""
_NAMED = ("Xor", "Majority", "OneHot0", "OneHot", "ITE", "And", "Or", "Not")


@dataclass(frozen=True)
class Node:
    """An operation on earlier nodes (`parts`), a `constant`, or a `bit` of a word (and `element`)."""

    kind: str
    parts: tuple[int, ...] = ()
    constant: int = 0
    name: str = ""
    element: int | None = None
    bit: int = 0


@dataclass
class SecondReading:
    """The nodes of a formula, each after its parts; the last is the formula itself."""

    nodes: list[Node] = field(default_factory=list)

    def add(self, node: Node) -> int:
        """Append a node and give its number."""
        self.nodes.append(node)
        return len(self.nodes) - 1


def read_again(text: str, words: Sequence[Word]) -> list[Node]:
    """The nodes of a formula that is known to be well formed; ExpressionError where it is not."""
    by_name = {word.name: word for word in words}
    reading = SecondReading()
    open_groups: list[list[str | int]] = [[]]
    tokens = _split(text)
    while tokens:
        token = tokens.pop()
        if token == "(":
            open_groups.append([])
        elif token == ")":
            content = open_groups.pop()
            _expect(bool(open_groups), ")")
            before = open_groups[-1][-1] if open_groups[-1] else ""
            if before in _NAMED:
                arguments = tuple(_flatten(reading, part) for part in _at_commas(content))
                open_groups[-1][-1] = reading.add(Node(str(before), arguments))
            else:
                open_groups[-1].append(_flatten(reading, content))
        elif token in by_name:
            open_groups[-1].append(reading.add(_bit(by_name[token], tokens)))
        elif token in ("0", "1", "true", "false"):
            open_groups[-1].append(reading.add(Node("constant", constant=int(token in ("1", "true")))))
        else:
            open_groups[-1].append(_SAME.get(token, token))
    _expect(len(open_groups) == 1, "(")
    _flatten(reading, open_groups[0])
    return reading.nodes


def value_of(nodes: Sequence[Node], values: Mapping[str, Value]) -> int:
    """The value (0 or 1) of a formula where the words have these values."""
    return values_of(nodes, [values])[0]


def values_of(nodes: Sequence[Node], inputs: Sequence[Mapping[str, Value]]) -> list[int]:
    """The value (0 or 1) of a formula at each input, given by its words' values.

    Bit i of every integer on the way belongs to input i, so that Python works on many inputs at once.
    """
    together = max(_MOST_BITS // max(len(nodes), 1), 1)
    found: list[int] = []
    for start in range(0, len(inputs), together):
        some = inputs[start : start + together]
        column = _column(nodes, some)
        found.extend(column >> place & 1 for place in range(len(some)))
    return found


def _column(nodes: Sequence[Node], inputs: Sequence[Mapping[str, Value]]) -> int:
    everywhere = (1 << len(inputs)) - 1
    known: dict[tuple[str, int, int], int] = {}
    found: list[int] = []
    for node in nodes:
        if node.kind == "constant":
            found.append(everywhere * node.constant)
        elif node.kind == "bit":
            place = (node.name, node.element or 0, node.bit)
            if place not in known:
                known[place] = sum(_bit_at(node, values) << at for at, values in enumerate(inputs))
            found.append(known[place])
        else:
            found.append(_operate(node.kind, [found[part] for part in node.parts], everywhere))
    return found[-1]


def _bit_at(node: Node, values: Mapping[str, Value]) -> int:
    word = values[node.name]
    number = word if isinstance(word, int) else word[node.element or 0]
    return number >> node.bit & 1


def _operate(kind: str, parts: list[int], everywhere: int) -> int:
    if kind in ("~", "not", "Not"):
        return everywhere ^ parts[0]
    if kind in ("&", "and", "And"):
        return reduce(int.__and__, parts)
    if kind in ("|", "or", "Or"):
        return reduce(int.__or__, parts)
    if kind in ("^", "!=", "Xor"):
        return reduce(int.__xor__, parts)
    if kind in ("==", "<=>"):
        return everywhere ^ parts[0] ^ parts[1]
    if kind == "=>":
        return everywhere ^ parts[0] | parts[1]
    if kind == "ITE":
        return parts[0] & parts[1] | (everywhere ^ parts[0]) & parts[2]
    return sum(
        _counted(kind, [part >> at & 1 for part in parts]) << at for at in range(everywhere.bit_length())
    )


def _counted(kind: str, bits: list[int]) -> bool:
    """The functions that count, at one input."""
    if kind == "Majority":
        return sum(bits) > len(bits) - sum(bits)
    return sum(bits) == 1 or (kind == "OneHot0" and sum(bits) == 0)


def _split(text: str) -> list[str]:
    """The tokens, last one first, so that pop() gives the next."""
    tokens: list[str] = []
    for line in text.split("\n"):
        rest = line.partition("#")[0].strip()
        while rest:
            sign = next((sign for sign in _SIGNS if rest.startswith(sign)), rest[0])
            if sign[0].isalnum() or sign == "_":
                length = 1
                while length < len(rest) and (rest[length].isalnum() or rest[length] == "_"):
                    length += 1
                sign = rest[:length]
            tokens.append(sign)
            rest = rest[len(sign) :].lstrip()
    return tokens[::-1]


def _bit(word: Word, tokens: list[str]) -> Node:
    indices = []
    while tokens and tokens[-1] == "[":
        tokens.pop()
        indices.append(int(tokens.pop()))
        _expect(bool(tokens) and tokens.pop() == "]", "[")
    element = indices.pop(0) if word.count is not None else None
    return Node("bit", name=word.name, element=element, bit=indices[0] if indices else 0)


def _at_commas(content: list[str | int]) -> list[list[str | int]]:
    parts: list[list[str | int]] = [[]]
    for item in content:
        if item == ",":
            parts.append([])
        else:
            parts[-1].append(item)
    return parts


def _flatten(reading: SecondReading, content: list[str | int]) -> int:
    """Reduce a flat list of node numbers and operators to one node."""
    items = _prefixes(reading, content, "~")
    for sign in ("&", "^", "|"):
        items = _groups(reading, items, sign)
    items = _pairs(reading, items, ("==", "!="))
    items = _prefixes(reading, items, "not")
    for sign in ("and", "or"):
        items = _groups(reading, items, sign)
    items = _implications(reading, items)
    items = _pairs(reading, items, ("<=>",))
    while len(items) > 1:
        start = _last_choice(items)
        condition, _, chosen, _, other = items[start : start + 5]
        node = reading.add(Node("ITE", (_number(condition), _number(chosen), _number(other))))
        items[start : start + 5] = [node]
    return _number(items[0] if items else "nothing")


def _last_choice(items: list[str | int]) -> int:
    """Where the last `x ? y : z` of three plain numbers begins: no other stands within or behind it."""
    for start in range(len(items) - 5, -1, -1):
        if items[start + 1] == "?" and items[start + 3] == ":":
            return start
    raise ExpressionError("this is not a formula: ? and : do not pair up")


def _prefixes(reading: SecondReading, content: list[str | int], sign: str) -> list[str | int]:
    done: list[str | int] = []
    for item in reversed(content):
        if item == sign:
            _expect(bool(done), sign)
            done[-1] = reading.add(Node(sign, (_number(done[-1]),)))
        else:
            done.append(item)
    return done[::-1]


def _groups(reading: SecondReading, content: list[str | int], sign: str) -> list[str | int]:
    """Join a & b & c ... into one node of all parts."""
    done: list[str | int] = []
    at = 0
    while at < len(content):
        parts = [content[at]]
        while at + 2 < len(content) and content[at + 1] == sign:
            parts.append(content[at + 2])
            at += 2
        at += 1
        if len(parts) == 1:
            done.append(parts[0])
        else:
            done.append(reading.add(Node(sign, tuple(_number(part) for part in parts))))
    return done


def _pairs(reading: SecondReading, content: list[str | int], signs: tuple[str, ...]) -> list[str | int]:
    """Join pairs from the left."""
    done: list[str | int] = []
    for item in content:
        if len(done) >= 2 and done[-1] in signs:
            sign = str(done.pop())
            done[-1] = reading.add(Node(sign, (_number(done[-1]), _number(item))))
        else:
            done.append(item)
    return done


def _implications(reading: SecondReading, content: list[str | int]) -> list[str | int]:
    """Join pairs from the right."""
    done: list[str | int] = []
    for item in reversed(content):
        if len(done) >= 2 and done[-1] == "=>":
            done.pop()
            done[-1] = reading.add(Node("=>", (_number(item), _number(done[-1]))))
        else:
            done.append(item)
    return done[::-1]


def _number(item: str | int) -> int:
    _expect(isinstance(item, int), str(item))
    return int(item)


def _expect(condition: bool, shown: str) -> None:
    if not condition:
        raise ExpressionError(f"this is not a formula near {shown[:20]!r}")
