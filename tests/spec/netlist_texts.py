"""Random netlists written out in each format that is read, with their outputs worked out gate by gate."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from random import Random

GATES: dict[str, Callable[[list[int]], int]] = {
    "AND": lambda bits: int(all(bits)),
    "OR": lambda bits: int(any(bits)),
    "NAND": lambda bits: 1 - int(all(bits)),
    "NOR": lambda bits: 1 - int(any(bits)),
    "XOR": lambda bits: sum(bits) % 2,
    "XNOR": lambda bits: 1 - sum(bits) % 2,
    "NOT": lambda bits: 1 - bits[0],
    "BUFF": lambda bits: bits[0],
    "BUF": lambda bits: bits[0],
}


@dataclass(frozen=True)
class Written:
    """A text, and its outputs for each input: values[x][k] is output k at input x, input i in bit i of x."""

    text: str | bytes
    inputs: int
    values: list[tuple[int, ...]]


def _values(
    inputs: int, gates: list[tuple[Callable[[list[int]], int], list[int]]], outputs: list[int]
) -> list[tuple[int, ...]]:
    """Signals 0 ... inputs - 1 are the inputs, gate i is signal inputs + i."""
    found = []
    for x in range(1 << inputs):
        bits = [x >> i & 1 for i in range(inputs)]
        for rule, operands in gates:
            bits.append(rule([bits[operand] for operand in operands]))
        found.append(tuple(bits[output] for output in outputs))
    return found


def _shuffled(rng: Random, lines: list[str]) -> list[str]:
    return rng.sample(lines, len(lines))


def bench(rng: Random) -> Written:
    """A bench text in any order, with comments, any case and any fan-in."""
    inputs, size = rng.randint(1, 5), rng.randint(0, 8)
    names = [f"n{i}.{rng.choice('ab')}" for i in range(inputs + size)]
    outputs = [rng.randrange(inputs + size) for _ in range(rng.randint(1, 3))]
    ports = [f"INPUT({name})" for name in names[:inputs]]
    lines = [f"OUTPUT( {names[output]} )" for output in outputs]
    gates = []
    texts = []
    for place in range(size):
        word = rng.choice(list(GATES))
        fan_in = 1 if word in ("NOT", "BUF", "BUFF") else rng.randint(1, 4)
        operands = [rng.randrange(inputs + place) for _ in range(fan_in)]
        gates.append((GATES[word], operands))
        written = rng.choice((word, word.lower()))
        comma = rng.choice((",", ", ", " , "))
        texts.append(f"{names[inputs + place]} = {written}({comma.join(names[i] for i in operands)}) # x")
    text = "\n".join(["# made by a test", "", *ports, *lines, *_shuffled(rng, texts)])
    return Written(text, inputs, _values(inputs, gates, outputs))


def blif(rng: Random) -> Written:
    """A BLIF text with covers on 1 and on 0, constants, don't-cares and continued lines."""
    inputs, size = rng.randint(1, 5), rng.randint(0, 7)
    names = [f"s{i}" for i in range(inputs + size)]
    outputs = [rng.randrange(inputs + size) for _ in range(rng.randint(1, 3))]
    gates = []
    texts = []
    for place in range(size):
        operands = [rng.randrange(inputs + place) for _ in range(rng.randint(0, 4))]
        rows = ["".join(rng.choice("01-") for _ in operands) for _ in range(rng.randint(0, 3))]
        value = rng.choice("01") if rows else "1"

        def rule(bits: list[int], rows: list[str] = rows, on: int = int(value)) -> int:
            fits = any(all(c == "-" or int(c) == b for c, b in zip(row, bits, strict=True)) for row in rows)
            return on if fits else 1 - on

        gates.append((rule, operands))
        gap = rng.choice((" ", " \\\n  ", "\t"))
        lines = [gap.join([".names", *(names[i] for i in operands), names[inputs + place]])]
        lines += [f"{row} {value}" if row else value for row in rows]
        texts.append("\n".join(lines))
    head = [".model lamps", ".inputs " + " ".join(names[:1]), ".inputs \\", " ".join(names[1:inputs])]
    tail = [".outputs " + " ".join(names[output] for output in outputs), "# a comment"]
    text = "\n".join([*head, *tail, *_shuffled(rng, texts), rng.choice((".end", ""))])
    return Written(text, inputs, _values(inputs, gates, outputs))


def _and_graph(rng: Random) -> tuple[int, list[tuple[int, int]], list[int], list[tuple[int, ...]]]:
    """(inputs, operand literals a gate, output literals, values); variable 0 is the constant 0."""
    inputs, size = rng.randint(1, 5), rng.randint(0, 8)
    pairs = []
    for place in range(size):
        most = 2 * (inputs + place) + 1
        left, right = sorted((rng.randint(0, most), rng.randint(0, most)))
        pairs.append((left, right))
    outputs = [rng.randint(0, 2 * (inputs + size) + 1) for _ in range(rng.randint(1, 3))]
    values = []
    for x in range(1 << inputs):
        bits = [0, *(x >> i & 1 for i in range(inputs))]
        for left, right in pairs:
            bits.append((bits[left >> 1] ^ left & 1) & (bits[right >> 1] ^ right & 1))
        values.append(tuple(bits[literal >> 1] ^ literal & 1 for literal in outputs))
    return inputs, pairs, outputs, values


def aag(rng: Random) -> Written:
    """An ascii AIGER with ANDs in any order and numbers left out."""
    inputs, pairs, outputs, values = _and_graph(rng)
    variables = inputs + len(pairs)
    most = variables + rng.randint(0, 5)
    number = [0, *rng.sample(range(1, most + 1), variables)]

    def moved(literal: int) -> int:
        return 2 * number[literal >> 1] + (literal & 1)

    ands = [
        f"{moved(2 * (inputs + 1 + i))} {moved(right)} {moved(left)}" for i, (left, right) in enumerate(pairs)
    ]
    lines = [f"aag {most} {inputs} 0 {len(outputs)} {len(ands)}" + rng.choice(("", " 0", " 0 0 0 0"))]
    lines += [str(moved(2 * (i + 1))) for i in range(inputs)]
    lines += [str(moved(literal)) for literal in outputs]
    lines += _shuffled(rng, ands)
    tail = rng.choice(("", "i0 lamp one\n", "c\nanything 1 2\n", f"o{len(outputs) - 1} mark\nc\n"))
    return Written(("\n".join(lines) + "\n" + tail).encode(), inputs, values)


def _seven_bits(number: int) -> bytes:
    found = bytearray()
    while number >= 0x80:
        found.append(number & 0x7F | 0x80)
        number >>= 7
    return bytes([*found, number])


def aig(rng: Random) -> Written:
    """A binary AIGER."""
    inputs, pairs, outputs, values = _and_graph(rng)
    lines = [f"aig {inputs + len(pairs)} {inputs} 0 {len(outputs)} {len(pairs)}", *map(str, outputs)]
    body = b""
    for place, (left, right) in enumerate(pairs):
        body += _seven_bits(2 * (inputs + 1 + place) - right) + _seven_bits(right - left)
    tail = rng.choice((b"", b"i0 lamp one\n", b"c\n\xff\x00anything"))
    return Written("\n".join(lines).encode() + b"\n" + body + tail, inputs, values)


def bristol(rng: Random) -> Written:
    """A Bristol Fashion text whose outputs are copied to the last wires."""
    widths = [rng.randint(1, 3) for _ in range(rng.randint(1, 3))]
    inputs = sum(widths)
    gates: list[tuple[Callable[[list[int]], int], list[int]]] = []
    lines = []
    for _ in range(rng.randint(0, 6)):
        word = rng.choice(("XOR", "AND", "INV", "EQ", "EQW", "MAND"))
        known = inputs + len(gates)
        if word == "MAND":
            many = rng.randint(1, 3)
            read = [rng.randrange(known) for _ in range(2 * many)]
            gates += [(GATES["AND"], [read[i], read[many + i]]) for i in range(many)]
            made = list(range(known, known + many))
            lines.append(" ".join(map(str, (2 * many, many, *read, *made))) + " MAND")
        elif word == "EQ":
            constant = rng.randint(0, 1)
            gates.append((lambda bits, constant=constant: constant, []))
            lines.append(f"1 1 {constant} {known} EQ")
        elif word in ("INV", "EQW"):
            wire = rng.randrange(known)
            gates.append((GATES["NOT" if word == "INV" else "BUF"], [wire]))
            lines.append(f"1 1 {wire} {known} {word}")
        else:
            pair = [rng.randrange(known) for _ in range(2)]
            gates.append((GATES[word], pair))
            lines.append(f"2 1 {pair[0]} {pair[1]} {known} {word}")
    made_widths = [rng.randint(1, 2) for _ in range(rng.randint(1, 2))]
    first = inputs + len(gates)
    for place in range(sum(made_widths)):
        wire = rng.randrange(first)
        gates.append((GATES["BUF"], [wire]))
        lines.append(f"1 1 {wire} {first + place} EQW")
    outputs = list(range(first, first + sum(made_widths)))
    head = [
        f"{len(lines)} {inputs + len(gates)}",
        f"{len(widths)} {' '.join(map(str, widths))}",
        f"{len(made_widths)} {' '.join(map(str, made_widths))}",
        "",
    ]
    return Written("\n".join(head + lines) + "\n", inputs, _values(inputs, gates, outputs))
