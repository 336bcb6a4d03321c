"""BLIF, bench, AIGER and Bristol files: what they mean, their words and labels."""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path
from random import Random

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from revsynth.api import build, read_spec, verify
from revsynth.logic.truth_table import unpack
from revsynth.spec import netlist_columns
from revsynth.spec.aiger import parse_aiger
from revsynth.spec.bench import parse_bench
from revsynth.spec.blif import parse_blif
from revsynth.spec.bristol import parse_bristol
from revsynth.spec.expectation import Expectation
from revsynth.spec.model import Output, Outputs, Predicate, Spec, Word
from revsynth.spec.netlist import LoopError, Netlist, NetlistGate, in_order
from revsynth.spec.netlist_reference import netlist_values
from revsynth.spec.read import read_spec as read_by_name
from revsynth.spec.understand import understand
from tests.spec import netlist_texts
from tests.spec.netlist_texts import Written

FORMATS: dict[str, tuple[Callable[[Random], Written], Callable[..., Spec]]] = {
    "bench": (netlist_texts.bench, parse_bench),
    "blif": (netlist_texts.blif, parse_blif),
    "aag": (netlist_texts.aag, parse_aiger),
    "aig": (netlist_texts.aig, parse_aiger),
    "bristol": (netlist_texts.bristol, parse_bristol),
}


def table(spec: Spec) -> list[tuple[int, ...]]:
    """The output bits at each input, input 0 first."""
    function = understand(spec).function
    columns = [unpack(row, function.inputs).tolist() for row in function.values]
    return list(zip(*columns, strict=True))


@pytest.mark.parametrize("name", FORMATS)
@given(st.integers(0, 2**32))
def test_random_netlists_mean_what_their_gates_say(name: str, seed: int) -> None:
    make, parse = FORMATS[name]
    written = make(Random(seed))
    spec = parse(written.text, "test")
    assert spec.input_bits == written.inputs
    assert table(spec) == written.values
    expectation = Expectation(understand(spec))
    assert list(expectation.at(range(1 << written.inputs))) == written.values
    assert [expectation(x) for x in range(1 << written.inputs)] == written.values
    assert (spec.kind == "predicate") == (len(written.values[0]) == 1)


def test_each_format_tells_bit_0_from_the_last() -> None:
    # changes under bit reversal: input 0 and not input 2
    texts: list[Spec] = [
        parse_bench("INPUT(a)\nINPUT(b)\nINPUT(c)\nOUTPUT(f)\nf = AND(a, n)\nn = NOT(c)\n"),
        parse_blif(".inputs a b c\n.outputs f\n.names a c f\n10 1\n"),
        parse_aiger(b"aag 4 3 0 1 1\n2\n4\n6\n8\n8 2 7\n"),
        parse_aiger(b"aig 4 3 0 1 1\n8\n\x01\x05"),
        parse_bristol("2 5\n1 3\n1 1\n1 1 2 3 INV\n2 1 0 3 4 AND\n"),
    ]
    for spec in texts:
        assert [x for x, (value,) in enumerate(table(spec)) if value] == [1, 3]


def test_names_with_an_index_become_words_whatever_their_order() -> None:
    text = (
        "INPUT(k[1])\nINPUT(a[2])\nINPUT(a[0])\nINPUT(k[0])\nINPUT(a[1])\n"
        "OUTPUT(s[1])\nOUTPUT(s[0])\ns[0] = XOR(a[0], k[0])\ns[1] = AND(a[2], k[1])\n"
    )
    spec = parse_bench(text)
    assert spec.inputs == (Word("k", 2), Word("a", 3))
    assert isinstance(spec.body, Outputs)
    assert spec.body.words == (Output("s", bits=2),)
    assert understand(spec).outputs == (Word("s", 2),)
    assert spec.labels == {}
    for x, (low, high) in enumerate(table(spec)):
        k, a = x & 3, x >> 2
        assert (low, high) == ((a ^ k) & 1, (a >> 2) & (k >> 1))


@pytest.mark.parametrize(
    "names", [("a[0]", "b"), ("a[1]", "a[2]"), ("a[0]", "while[0]"), ("a[00]", "a[1]"), ("2a[0]", "2a[1]")]
)
def test_other_names_are_labels(names: tuple[str, str]) -> None:
    one, two = names
    text = f"INPUT({one})\nINPUT({two})\nOUTPUT(p)\nOUTPUT(q)\np = AND({one}, {two})\nq = NOT({one})\n"
    spec = parse_bench(text)
    assert spec.inputs == (Word("v", 2),)
    assert spec.labels == {"v[0]": one, "v[1]": two, "f[0]": "p", "f[1]": "q"}
    assert understand(spec).outputs == (Word("f", 2),)


def test_words_give_way_where_one_name_would_be_two_words() -> None:
    def ports(inputs: str, outputs: str) -> tuple[list[str], list[str]]:
        text = f".inputs {inputs}\n.outputs {outputs}\n"
        made = [name for name in outputs.split() if name not in inputs.split()]
        spec = parse_blif(text + "".join(f".names {inputs.split()[0]} {name}\n1 1\n" for name in made))
        body = spec.body
        assert isinstance(body, Outputs)
        return [word.name for word in spec.inputs], [word.name for word in body.words]

    assert ports("a[0] a[1]", "a[0] a[1]") == (["a"], ["f"])
    assert ports("f[0] f[1]", "p q") == (["v"], ["f"])
    assert ports("p q", "v[0] v[1]") == (["v"], ["f"])
    assert ports("a[0]", "b[0] b[1]") == (["a"], ["b"])


def test_symbols_of_aiger_name_bits() -> None:
    spec = parse_aiger(b"aag 2 2 0 2 0\n2\n4\n5\n0\ni1 north lamp\no0 signal\nc\nno symbol\n")
    assert spec.labels == {"v[1]": "north lamp", "f[0]": "signal"}
    assert table(spec) == [(1, 0), (1, 0), (0, 0), (0, 0)]


def test_bristol_values_are_words() -> None:
    spec = parse_bristol("3 8\n2 2 3\n2 1 2\n1 1 0 5 EQW\n2 1 1 4 6 XOR\n1 1 1 7 EQ\n")
    assert spec.inputs == (Word("in_0", 2), Word("in_1", 3))
    assert understand(spec).outputs == (Word("out_0", 1), Word("out_1", 2))
    for x, bits in enumerate(table(spec)):
        assert bits == (x & 1, (x >> 1 ^ x >> 4) & 1, 1)


def test_blif_without_inputs_and_outputs_takes_those_that_nobody_makes_or_reads() -> None:
    spec = parse_blif(".model m\n.names a b x\n11 1\n.names x c y\n1- 1\n-1 1\n.end\n")
    assert spec.labels == {"v[0]": "a", "v[1]": "b", "v[2]": "c"}
    assert isinstance(spec.body, Predicate)
    assert [x for x, (value,) in enumerate(table(spec)) if value] == [3, 4, 5, 6, 7]


def test_lines_may_end_in_any_way(tmp_path: Path) -> None:
    text = ".inputs a b \\\n c\n.outputs f\n.names a b c f\n1-0 1\n01- 1\n"
    wanted = table(parse_blif(text))
    for ending in ("\r\n", "\r"):
        path = tmp_path / "a.blif"
        path.write_bytes(text.replace("\n", ending).encode())
        assert table(read_by_name(str(path))) == wanted


def test_a_published_netlist() -> None:
    # c17, the smallest of the ISCAS-85 netlists (Brglez, Fujiwara, ISCAS 1985; from memory): six NANDs of two
    text = (
        "# c17\nINPUT(1)\nINPUT(2)\nINPUT(3)\nINPUT(6)\nINPUT(7)\nOUTPUT(22)\nOUTPUT(23)\n"
        "10 = NAND(1, 3)\n11 = NAND(3, 6)\n16 = NAND(2, 11)\n19 = NAND(11, 7)\n"
        "22 = NAND(10, 16)\n23 = NAND(16, 19)\n"
    )
    spec = parse_bench(text)
    for x, values in enumerate(table(spec)):
        a, b, c, d, e = (bool(x >> i & 1) for i in range(5))
        assert values == ((a and c) or (b and not (c and d)), (not (c and d)) and (b or e))


@pytest.mark.parametrize("inputs", [14, 20])
def test_columns_in_blocks_are_columns_at_once(inputs: int, monkeypatch: pytest.MonkeyPatch) -> None:
    rng = Random(inputs)
    gates = []
    for place in range(40):
        most = 2 * (inputs + place) + 1
        kind = rng.choice(("and", "or", "xor", "cover"))
        operands = tuple(rng.randint(0, most) for _ in range(3))
        gates.append(NetlistGate(kind, operands, ("1-0", "01-") if kind == "cover" else ()))
    netlist = Netlist(inputs, tuple(gates), tuple(rng.randint(0, 2 * (inputs + 40)) for _ in range(4)))
    found = netlist_columns.netlist_columns(netlist)
    some = [rng.randrange(1 << inputs) for _ in range(2000)]
    bits = [unpack(row, inputs) for row in found]
    assert [tuple(int(row[x]) for row in bits) for x in some] == netlist_values(netlist, some)
    monkeypatch.setattr(netlist_columns, "MOST_LIVE", 1 << 9)
    assert np.array_equal(netlist_columns.netlist_columns(netlist), found)


def test_order_without_recursion() -> None:
    chain = {i: [i - 1] for i in range(50_000, 0, -1)}
    assert in_order(chain) == list(range(1, 50_001))
    with pytest.raises(LoopError) as caught:
        in_order({**chain, 1: [0, 3]})
    assert set(caught.value.names) == {1, 2, 3}


@pytest.mark.parametrize("name", FORMATS)
def test_from_the_file_to_a_verified_circuit(name: str, tmp_path: Path) -> None:
    make, _ = FORMATS[name]
    written = make(Random(5))
    path = tmp_path / f"lamps.{name}"
    path.write_bytes(written.text if isinstance(written.text, bytes) else written.text.encode())
    other = tmp_path / "lamps.txt"
    other.write_bytes(path.read_bytes())
    spec = read_spec(path)
    assert read_spec(other, from_format=name).body == spec.body
    built = build(spec)
    assert built.evidence.level == "exhaustive"
    assert verify(spec, text=built.text("openqasm3")).holds is True
