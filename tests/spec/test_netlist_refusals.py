"""Tables of (what the message must say, what is wrong), and anything at all: one line, never a traceback."""

from __future__ import annotations

from collections.abc import Callable
from random import Random

import pytest
from hypothesis import given
from hypothesis import strategies as st

from revsynth.errors import SpecError
from revsynth.spec.aiger import parse_aiger
from revsynth.spec.bench import parse_bench
from revsynth.spec.blif import parse_blif
from revsynth.spec.bristol import parse_bristol
from revsynth.spec.dimacs import parse_dimacs
from revsynth.spec.model import Spec
from revsynth.spec.understand import understand
from tests.spec import netlist_texts
from tests.spec.netlist_texts import Written

AB = "INPUT(a)\nINPUT(b)\nOUTPUT(f)\n"
BENCH = [
    ("test: line 4: INPUT(a), OUTPUT(a) or a = GATE(b, c) is wanted, not 'f := a'", AB + "f := a\n"),
    ("line 4: INPUT(a), OUTPUT(a) or a = GATE(b, c) is wanted", AB + "f = AND(a, (b))\n"),
    ("line 4: DFF is a flip-flop: only combinational netlists have a function; cut", AB + "f = DFF(a)\n"),
    ("line 4: 'MUX' is unknown: AND NAND OR NOR XOR XNOR NOT BUF BUFF are known", AB + "f = MUX(a, b)\n"),
    ("line 4: names with commas between are wanted in AND(...)", AB + "f = AND(a b)\n"),
    ("line 4: names with commas between are wanted in AND(...)", AB + "f = AND(a,)\n"),
    ("line 4: NOT takes one operand, not 2", AB + "f = NOT(a, b)\n"),
    ("line 5: 'f' is made already (line 4)", AB + "f = NOT(a)\nf = NOT(b)\n"),
    ("line 4: 'a' is an input (line 1): no gate may make it", AB + "a = NOT(b)\n"),
    ("line 4: 'a' is an input already (line 1)", AB + "INPUT(a)\n"),
    ("line 5: 'f' is made already (line 4)", AB + "f = NOT(a)\nINPUT(f)\n"),
    ("line 4: nothing makes 'c': an input or a gate of that name is wanted", AB + "f = AND(a, c)\n"),
    ("line 3: nothing makes 'f'", AB),
    ("line 4: a loop: 'f' <- 'g' <- 'f'; combinational netlists", AB + "f = AND(a, g)\ng = NOT(f)\n"),
    ("a loop: 'f' <- 'f'", AB + "f = AND(a, f)\n"),
    ("test: the netlist has no inputs: an oracle needs at least one", ""),
    ("test: the netlist has no outputs", "INPUT(a)\n"),
    ("'" + "n" * 30 + "...' is made already", AB + 2 * ("n" * 5000 + " = NOT(a)\n")),
]  # fmt: skip
HEAD = ".model m\n.inputs a b\n.outputs f\n"
BLIF = [
    ("line 4: .latch is a latch: only combinational netlists have a function", HEAD + ".latch a f 0\n"),
    ("line 4: .subckt is a part of another model: flatten the hierarchy", HEAD + ".subckt m a=a\n"),
    ("line 4: .gate is a gate of a cell library: write its table with .names", HEAD + ".gate and2 A=a\n"),
    ("line 4: .exdc is a network of don't-cares: write the free values as a PLA", HEAD + ".exdc\n"),
    ("line 4: a second .model: flatten the hierarchy", HEAD + ".model k\n"),
    ("line 5: a second model: flatten the hierarchy into one; a file holds one", HEAD + ".end\n.model k\n"),
    ("line 5: more behind .end; a file holds one model", HEAD + ".end\n.names f\n"),
    ("line 4: .names wants the name of its output, behind those of its inputs", HEAD + ".names\n"),
    ("line 4: '.foo' is unknown: .model .inputs .outputs .names .end are known", HEAD + ".foo\n"),
    ("line 4: '11' belongs to no .names", HEAD + "11 1\n"),
    ("line 5: a row of an input part and 0 or 1 is wanted, not '1 1 1'", HEAD + ".names a b f\n1 1 1\n"),
    ("line 5: a row of an input part and 0 or 1 is wanted, not '11 -'", HEAD + ".names a b f\n11 -\n"),
    ("line 5: a row of 0 or 1 is wanted, not '1 1'", HEAD + ".names f\n1 1\n"),
    ("line 6: the input part has 1 columns, and 2 are wanted", HEAD + ".names a b \\\nf\n1 1\n"),
    ("line 5: the input part '1x': 0, 1 and - are allowed", HEAD + ".names a b f\n1x 1\n"),
    ("line 6: the rows of one .names give all 1 or all 0, not both", HEAD + ".names a b f\n11 1\n00 0\n"),
    ("line 4: 'a' is an input (line 2): no gate may make it", HEAD + ".names b a\n1 1\n"),
    ("line 4: nothing makes 'c'", HEAD + ".names a c f\n11 1\n"),
    ("line 4: a loop: 'f' <- 'f'", HEAD + ".names f f\n1 1\n"),
    ("line 3: nothing makes 'f'", HEAD),
    ("test: this is no BLIF: .model .inputs .outputs .names .end are wanted", "# nothing\n"),
    ("test: the netlist has no inputs", ".names f\n1\n"),
]  # fmt: skip
AIGER: list[tuple[str, str | bytes]] = [
    ("line 1: 'aag M I L O A' or 'aig M I L O A'", "aag 1 1 0 1\n"),
    ("inputs, latches, outputs and ANDs, is wanted, not 'p cnf 3 1'", "p cnf 3 1\n"),
    ("line 1: the file ends here", ""),
    ("line 1: 1 latches (L): only combinational netlists have a function", "aag 2 1 1 1 0\n2\n4 2\n4\n"),
    ("line 1: 2 bad-state properties (B): they are of sequential models", "aag 1 1 0 1 0 2\n2\n2\n"),
    ("line 1: 1 constraints (C): list those literals as outputs", "aag 1 1 0 1 0 0 1\n2\n2\n2\n"),
    ("line 1: 1 justice properties (J)", "aag 1 1 0 1 0 0 0 1\n"),
    ("line 1: 1 fairness constraints (F)", "aag 1 1 0 1 0 0 0 0 1\n"),
    ("line 1: M is 1, but 1 inputs and 1 ANDs are more", "aag 1 1 0 1 1\n"),
    ("line 1: M is 3, but a binary file without latches has M = I + A", "aig 3 1 0 1 1\n"),
    ("the netlist has no inputs", "aag 0 0 0 1 0\n0\n"),
    ("the netlist has no outputs", "aag 1 1 0 0 0\n2\n"),
    ("9000000000 input bits, and at most 1000000 are taken", "aag 9000000000 9000000000 0 1 0\n"),
    ("line 2: input 0, one literal, is wanted, not '2 3'", "aag 1 1 0 1 0\n2 3\n2\n"),
    ("line 2: input 0, one literal, is wanted, not an empty line", "aag 1 1 0 1 0\n\n2\n"),
    ("line 2: literal 3 cannot be an input: an even one from 2 on", "aag 1 1 0 1 0\n3\n2\n"),
    ("line 2: literal 0 cannot be an input", "aag 1 1 0 1 0\n0\n2\n"),
    ("line 3: literal 2 is made already (line 2)", "aag 2 2 0 1 0\n2\n2\n2\n"),
    ("line 4: literal 2 is made already (line 2)", "aag 2 1 0 1 1\n2\n2\n2 2 3\n"),
    ("line 3: literal 4 is beyond the 1 variables of the header", "aag 1 1 0 1 0\n2\n4\n"),
    ("line 3: nothing makes literal 4: an input or an AND is wanted", "aag 2 1 0 1 0\n2\n5\n"),
    ("line 4: nothing makes literal 6", "aag 3 1 0 1 1\n2\n4\n4 2 7\n"),
    ("line 4: a loop: 4 <- 4; combinational netlists have none", "aag 2 1 0 1 1\n2\n4\n4 2 5\n"),
    ("line 5: the file ends here: it is cut off, or its header", "aag 3 1 0 1 2\n2\n4\n4 2 3\n"),
    ("line 4: a symbol 'i0 name' or the comments behind 'c' are wanted", "aag 1 1 0 1 0\n2\n2\nx\n"),
    ("line 4: there is no i1: the header says 1", "aag 1 1 0 1 0\n2\n2\ni1 x\n"),
    ("line 5: i0 has a name already", "aag 1 1 0 1 0\n2\n2\ni0 x\ni0 y\n"),
    ("the file ends within AND 0: it is cut off", b"aig 2 1 0 1 1\n4\n\x80"),
    ("AND 0 holds a number of more than 42 bits", b"aig 2 1 0 1 1\n4\n" + b"\xff" * 9),
    ("byte 18: AND 0 reads a literal that is not below its own, 4", b"aig 2 1 0 1 1\n4\n\x00\x00"),
    ("AND 0 reads a literal that is not below its own, 4", b"aig 2 1 0 1 1\n4\n\x03\x02"),
]  # fmt: skip
BRISTOL = [
    ("test: the numbers of gates and wires are missing: this is no Bristol Fashion circuit", ""),
    ("line 1: the numbers of gates and wires are wanted, not 'hello'", "hello\n"),
    ("test: the number of output values and the width of each are missing", "1 3\n1 2\n"),
    ("line 2: 64 input values, but 2 widths behind the number: 'COUNT WIDTH ...'", "1 9\n64 64 64\n"),
    ("line 2: input value 1 has no wires: a width from 1 on is wanted", "1 9\n2 1 0\n1 1\n"),
    ("line 3: the first line says 2 wires, but the values have more", "0 2\n1 3\n1 1\n"),
    ("the netlist has no outputs", "0 3\n1 3\n0\n"),
    ("line 4: the gate 'OR' is unknown: XOR AND INV EQ EQW and MAND", "1 3\n1 2\n1 1\n2 1 0 1 2 OR\n"),
    ("line 4: a gate such as '2 1 0 1 5 AND' is wanted", "1 3\n1 2\n1 1\n2 1 a 1 2 AND\n"),
    ("line 4: AND wants 2 1, not 3 1", "1 3\n1 2\n1 1\n3 1 0 1 1 2 AND\n"),
    ("line 4: MAND wants twice as many wires read as made, not 2 2", "1 4\n1 2\n1 1\n2 2 0 1 2 3 MAND\n"),
    ("line 4: 2 wires read and 1 made are 3, not 2", "1 3\n1 2\n1 1\n2 1 0 2 AND\n"),
    ("line 4: wire 3 is beyond the 3 of the first line", "1 3\n1 2\n1 1\n2 1 0 1 3 AND\n"),
    ("line 4: wire 1 is an input: each other wire has one gate", "1 3\n1 2\n1 1\n1 1 0 1 INV\n"),
    ("line 5: wire 2 is made by two gates", "2 3\n1 2\n1 1\n1 1 0 2 INV\n1 1 1 2 INV\n"),
    ("line 4: wire 3 is read before a gate makes it: gates come in order", "1 4\n1 2\n1 1\n1 1 3 2 INV\n"),
    ("line 4: EQ makes a wire 0 or 1, not 2: EQW copies a wire", "1 3\n1 2\n1 1\n1 1 2 2 EQ\n"),
    ("test: the first line says 2 gates, but the file has 1", "2 3\n1 2\n1 1\n1 1 0 2 INV\n"),
    ("test: nothing makes wire 3, but the last 1 of 4 wires are outputs", "1 4\n1 2\n1 1\n1 1 0 2 INV\n"),
    ("9999999999 input bits, and at most", "0 9999999999\n1 9999999999\n1 1\n"),
]  # fmt: skip


def parse_aiger_text(text: str | bytes, source: str = "test") -> Spec:
    return parse_aiger(text.encode() if isinstance(text, str) else text, source)


CASES = [
    *((parse_bench, message, text) for message, text in BENCH),
    *((parse_blif, message, text) for message, text in BLIF),
    *((parse_aiger_text, message, text) for message, text in AIGER),
    *((parse_bristol, message, text) for message, text in BRISTOL),
]


@pytest.mark.parametrize(("parse", "message", "text"), CASES)
def test_refusals(parse: Callable[..., Spec], message: str, text: str | bytes) -> None:
    with pytest.raises(SpecError) as caught:
        parse(text, "test")
    assert message in str(caught.value)
    assert "\n" not in str(caught.value)
    assert len(str(caught.value)) < 250


PARSERS: dict[str, tuple[Callable[..., Spec], Callable[[Random], Written] | None, str]] = {
    "bench": (parse_bench, netlist_texts.bench, "INPUT( OUTPUT( ) = AND( NOT( XNOR( a b , # \n f g"),
    "blif": (parse_blif, netlist_texts.blif,
             ".model .inputs .outputs .names .end .latch \\\n a b f 1 0 11 -0 \n #"),
    "aag": (parse_aiger_text, netlist_texts.aag, "aag aig 0 1 2 3 4 5 6 7 \n \n \n i0 o0 c x"),
    "aig": (parse_aiger_text, netlist_texts.aig, "aig 0 1 2 3 4 \n \n \x01 \x02 i0 o0 c"),
    "bristol": (parse_bristol, netlist_texts.bristol, "0 1 2 3 4 5 \n \n XOR AND INV EQ EQW MAND"),
    "cnf": (parse_dimacs, None, "p cnf 1 2 3 -1 -2 0 0 x x1 c % \n \n"),
}  # fmt: skip


def gives_a_spec_or_one_line(parse: Callable[..., Spec], text: str | bytes) -> None:
    problem = ""
    try:
        spec = parse(text, "test")
        assert spec.input_bits >= 1
        if spec.input_bits <= 8:
            understand(spec)
    except SpecError as error:
        problem = str(error)
    assert "\n" not in problem


@pytest.mark.parametrize("name", PARSERS)
@given(st.data())
def test_anything_at_all(name: str, data: st.DataObject) -> None:
    parse, _, pieces = PARSERS[name]
    if data.draw(st.booleans()):
        gives_a_spec_or_one_line(parse, data.draw(st.text(max_size=60)))
        return
    piece = st.sampled_from([*pieces.split(" "), "\n"])
    gap = data.draw(st.sampled_from((" ", "")))
    gives_a_spec_or_one_line(parse, gap.join(data.draw(st.lists(piece, max_size=40))))


@pytest.mark.parametrize("name", [name for name in PARSERS if PARSERS[name][1]])
@given(st.integers(0, 2**32))
def test_good_files_with_a_fault(name: str, seed: int) -> None:
    parse, make, pieces = PARSERS[name]
    assert make is not None
    rng = Random(seed)
    text = make(rng).text
    raw = text if isinstance(text, bytes) else text.encode()
    for _ in range(rng.randint(1, 3)):
        begin = rng.randrange(len(raw) + 1)
        end = begin + rng.randint(0, 4)
        raw = raw[:begin] + rng.choice(pieces.split(" ")).encode() * rng.randint(0, 2) + raw[end:]
    gives_a_spec_or_one_line(parse, raw if isinstance(text, bytes) else raw.decode())
