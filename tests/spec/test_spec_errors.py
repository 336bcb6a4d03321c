"""Tables of (what the message must say, what is wrong): every refusal of the readers and `understand`."""

from __future__ import annotations

import pytest

from revsynth.errors import RevsynthError, SpecError
from revsynth.spec.dimacs import parse_dimacs
from revsynth.spec.inline import inline_spec
from revsynth.spec.model import Predicate, Spec, Word
from revsynth.spec.pla import parse_pla
from revsynth.spec.toml_reader import parse_toml
from revsynth.spec.understand import understand

IN = "[inputs]\na = 4\n"
PRED = '[predicate]\nwhere = "a > 1"\n'
OUT = IN + "[outputs]\n"
PERM = IN + "[permutation]\n"
CELL = "[inputs]\ncell = { bits = 2, count = 3 }\nb = 1\n"

TOML = [
    ("this is not TOML: Invalid value", "[inputs]\na = \n"),
    ("Cannot overwrite a value", IN + "a = 5\n" + PRED),
    ("nested too deeply", "a = " + "[" * 9000),
    ("a number has more than 4,300 digits", "a = " + "9" * 5000),
    ("unknown section or key 'predicates' (did you mean predicate?)", IN + "[predicates]\nwhere = '1'\n"),
    ("unknown section or key 'a b': title", IN + '["a b"]\n' + PRED),
    ("title: a text is wanted, not 3", "title = 3\n" + IN + PRED),
    ("exactly one of [predicate], [outputs] and [permutation] is wanted, there is none", IN),
    ("is wanted, not [predicate] and [outputs]", IN + PRED + '[outputs]\nt = { value = "a" }\n'),
    ("the section [inputs] is missing", PRED),
    ("the section [inputs] is missing", '[permutation]\nmap = { a = "a" }\n'),
    ("[inputs]: a table is wanted, not 3", "inputs = 3\n" + PRED),
    ("[inputs]: at least one word is wanted", "[inputs]\n" + PRED),
    ("[inputs] a: an integer from 1 on is wanted, not 0", "[inputs]\na = 0\n" + PRED),
    ("[inputs] a: a number or a table", "[inputs]\na = true\n" + PRED),
    ("[inputs] a: a number or a table such as { bits = 3, signed = true } is wanted, not the text '4'",
     "[inputs]\na = '4'\n" + PRED),
    ("[inputs] a: the key bits is missing", "[inputs]\na = { signed = true }\n" + PRED),
    ("[inputs] a: unknown key 'bit' (did you mean bits?)", "[inputs]\na = { bit = 3 }\n" + PRED),
    ("[inputs] a signed: true or false is wanted, not 1", "[inputs]\na = { bits = 3, signed = 1 }\n" + PRED),
    ("[inputs] a count: an integer from 1 on is wanted, not 0",
     "[inputs]\na = { bits = 3, count = 0 }\n" + PRED),
    ("[inputs] a bits: an integer from 1 on is wanted, not 1.5", "[inputs]\na = { bits = 1.5 }\n" + PRED),
    ("'2a' cannot be a name", "[inputs]\n2a = 3\n" + PRED),
    ("'while' cannot be a name: it is a Python keyword", "[inputs]\nwhile = 3\n" + PRED),
    ("'parity' cannot be a name: it is a function", "[inputs]\nparity = 3\n" + PRED),
    ("'aaaaaaaaaaaaaaaaaaaaaaaaaaaaaa...' cannot be a name: it has 65 characters, and 64 are allowed",
     "[inputs]\n" + "a" * 65 + " = 3\n" + PRED),
    ("an index of 20 digits is out of range", IN + "[predicate]\nformula = 'a[99999999999999999999]'\n"),
    ("'é' cannot be a name: names are ASCII", "[inputs]\n'é' = 3\n" + PRED),
    ("[constants] k[1][0]: integers, Booleans and lists of them are wanted, not 1.5",
     IN + "[constants]\nk = [1, [1.5]]\n" + PRED),
    ("[constants] k: integers, Booleans and lists of them are wanted, not the text 'x'",
     IN + "[constants]\nk = 'x'\n" + PRED),
    ("[constants] k: integers, Booleans and lists of them are wanted, not a table",
     IN + "[constants]\nk = { z = 1 }\n" + PRED),
    ("[constants]: a is already a name of [inputs]", IN + "[constants]\na = 1\n" + PRED),
    ("[outputs]: a is already a name of [inputs]", IN + '[outputs]\na = { value = "a" }\n'),
    ("[outputs]: k is already a name of [constants]",
     IN + '[constants]\nk = 1\n[outputs]\nk = { value = "a" }\n'),
    ("[domain]: the key where is missing", IN + "[domain]\n" + PRED),
    ("[domain]: unknown key 'when' (did you mean where?): only where is known",
     IN + "[domain]\nwhen = 'a'\n" + PRED),
    ("[domain] where: a text in quotes is wanted, not true", IN + "[domain]\nwhere = true\n" + PRED),
    ("[domain] where: no input satisfies it", IN + "[domain]\nwhere = 'a > 15'\n" + PRED),
    ("[domain] where: the value is 2 at a = 2", IN + "[domain]\nwhere = 'a'\n" + PRED),
    ("[predicate]: exactly one of where, formula and table is wanted, there is none", IN + "[predicate]\n"),
    ("[predicate]: exactly one of where, formula and table is wanted, not where and table at once",
     IN + PRED + "table = '01'\n"),
    ("[predicate]: unknown key 'value'", IN + "[predicate]\nvalue = 'a'\n"),
    ("[predicate] where: a text in quotes is wanted, not a list", IN + "[predicate]\nwhere = ['a']\n"),
    ("[predicate] where: the value is 2 at a = 2: a condition is true or false, or 0 or 1; write (a) != 0",
     IN + "[predicate]\nwhere = 'a'\n"),
    ("[predicate] where: column 1: division by zero at a = 0", IN + "[predicate]\nwhere = '12 // a == 3'\n"),
    ("[predicate] table: entry 2 is 'x': only 0, 1 and - are allowed", IN + "[predicate]\ntable = '01 x'\n"),
    ("[predicate] table: 3 entries, but 4 input bits need 16 (input 0 first)",
     IN + "[predicate]\ntable = '01_ -'\n"),
    ("65537 input bits: up to 65536 are allowed", "[inputs]\na = 65537\n" + PRED),
    ("2000000000 input bits", "[inputs]\na = { bits = 2, count = 1000000000 }\n[predicate]\nwhere = '1'\n"),
    ("[outputs]: at least one output word is wanted", IN + "[outputs]\n"),
    ("[outputs] t: a table such as", OUT + "t = 'a'\n"),
    ("[outputs] t: exactly one of value and table is wanted, there is none", OUT + "t = { bits = 2 }\n"),
    ("[outputs] t: exactly one of value and table is wanted, not value and table at once",
     OUT + "t = { value = 'a', table = [1] }\n"),
    ("[outputs] t: unknown key 'wide'", OUT + "t = { value = 'a', wide = 2 }\n"),
    ("[outputs] t bits: an integer from 1 on is wanted, not -1", OUT + "t = { value = 'a', bits = -1 }\n"),
    ("[outputs] t table: 2 entries, but 4 input bits need 16", OUT + "t = { table = [1, '-'] }\n"),
    ("[outputs] t table: entry 1 is the text '+': an integer or \"-\" is wanted",
     OUT + "t = { table = [1, '+'] }\n"),
    ("[outputs] t table: entry 0 is true", OUT + "t = { table = [true] }\n"),
    ("[outputs] t table: a list of integers and \"-\" is wanted, not the text '01'",
     OUT + "t = { table = '01' }\n"),
    ("[outputs] t: the value is -3 at a = 0: negative values need signed = true, or bits = N",
     OUT + "t = { value = 'a - 3' }\n"),
    ("5000 output bits over 4 input bits are too many: 4096 are allowed",
     OUT + "t = { value = 'a', bits = 5000 }\n"),
    ("3000 output bits over 20 input bits are too many: 1024 are allowed",
     "[inputs]\na = 20\n[outputs]\nt = { value = 'a', bits = 3000 }\n"),
    ("[outputs] t value: values of up to 161 bits at 16777216 inputs need too much memory: "
     "keep the low bits in the expression",
     "[inputs]\na = 23\nb = 1\n[outputs]\nt = { value = 'a ** 7 + b', bits = 3 }\n"),
    ("[permutation] steps: a list of texts with at least one is wanted, such as [\"x += y\"], "
     "not an empty list",
     PERM + "steps = []\n"),
    ("[permutation] steps: a list of texts with at least one is wanted, such as [\"x += y\"], "
     "not the text 'a'",
     PERM + "steps = 'a'\n"),
    ("[permutation] steps 2: a text in quotes is wanted, not 3", PERM + "steps = ['a += 1', 3]\n"),
    ("[permutation]: exactly one of values, map and steps is wanted, not values and map at once",
     PERM + "values = [0]\nmap = { a = 'a' }\n"),
    ("the number of images is a power of two from 2 on, not 3", "[permutation]\nvalues = [0, 1, 2]\n"),
    ("[permutation] values: 4 entries, but 4 input bits need 16", PERM + "values = [0, 1, 2, 3]\n"),
    ("[permutation] values: the image of 1 is 4: 0 to 3 are wanted",
     "[permutation]\nvalues = [0, 4, 2, 3]\n"),
    ("[permutation] values: not one-to-one: v = 1 and v = 3 both become v = 2",
     "[permutation]\nvalues = [0, 2, 1, 2]\n"),
    ("[permutation] map: at least one word is wanted", PERM + "map = {}\n"),
    ("[permutation] map: there is no word 'b\\nc'", PERM + "map = { \"b\\nc\" = 'a' }\n"),
    ("[permutation] map b c: a text in quotes is wanted, not 3", PERM + "map = { \"b\\nc\" = 3 }\n"),
    ("[permutation] map a: a text in quotes is wanted, not 3", PERM + "map = { a = 3 }\n"),
    ("[permutation] map: there is no word 'b': the inputs are a", PERM + "map = { b = 'a' }\n"),
    ('[permutation] map: cell is an array: give its words new values one by one, such as "cell[0]"',
     CELL + "[permutation]\nmap = { cell = '1' }\n"),
    ("[permutation] map a: the new value is 16 at a = 15, but a holds 0 to 15: write (a + 1) % 16",
     PERM + "map = { a = 'a + 1' }\n"),
    ("the new value is 4 at a = 3, but a holds -4 to 3: write ((a + 1) + 4) % 8 - 4",
     "[inputs]\na = { bits = 3, signed = true }\n[permutation]\nmap = { a = 'a + 1' }\n"),
    ("[permutation] map: not one-to-one: a = 0 and a = 11 both become a = 3",
     PERM + "map = { a = '(a + 3) % 11' }\n"),
]  # fmt: skip

FORMULA = [
    ("column 1: the formula is empty", ""),
    ("column 3: an operator is wanted here, not 'b'", "b b"),
    ("column 4: a bit is wanted here, the formula ends", "b &"),
    ("column 1: a bit is wanted here, not '|'", "| b"),
    ("column 1: there is no word x: the inputs are cell, b", "x & b"),
    ("column 1: a single bit is wanted: write cell[0][0] to cell[2][1]", "cell & b"),
    ("column 1: a single bit is wanted: write cell[0][0] to cell[2][1]", "cell[1]"),
    ("cell: index 3 is out of range, the last is 2", "cell[3][0]"),
    ("cell: index 2 is out of range, the last is 1", "cell[0][2]"),
    ("b: index 1 is out of range, the last is 0", "b[1]"),
    ("[ ] holds one number from 0 on, not ':': a formula takes single bits", "cell[:2]"),
    ("[ ] holds one number from 0 on, not 'b'", "cell[b]"),
    ("[ ] holds one number from 0 on, not the end", "cell[1"),
    ("column 1: this ( misses its )", "(b"),
    ("column 2: this ) has no ( before it", "b)"),
    ("column 3: this ? misses its :", "b ? b"),
    ("column 4: this ? misses its :", "(b ? b)"),
    ("column 3: this : has no ? before it", "b : b"),
    ("a comma separates the arguments of a function only", "(b, b)"),
    ("ITE wants 3 arguments, not 2", "ITE(b, b)"),
    ("Not wants 1 argument, not 2", "Not(b, b)"),
    ("Xor wants at least 1 argument, not 0", "Xor()"),
    ("Majority is a function: ( is wanted behind it", "Majority & b"),
    ("of numbers only the bits 0 and 1 are allowed, not 2", "b & 2"),
    ("not binds less than &: write & (not ...)", "b & not b"),
    ("a chain of == and != has two readings", "b == b != b"),
    ("'+' is not part of formulas", "b + b"),
    ("line 2, column 3: a bit is wanted here, not '&'", "b &\n  & b"),
    ("a bit is wanted here, not 'and'", "b and && b"),
]

CNF = [
    ("bad.cnf: the header 'p cnf VARIABLES CLAUSES' is missing", "c nothing\n"),
    ("line 1: the header 'p cnf VARIABLES CLAUSES' is missing before '1'", "1 2 0\n"),
    ("line 2: a second header", "p cnf 2 1\np cnf 2 1\n1 0\n"),
    ("line 1: 'p cnf VARIABLES CLAUSES' is wanted, not 'p wcnf 2 1'", "p wcnf 2 1\n"),
    ("line 1: 'p cnf VARIABLES CLAUSES' is wanted", "p cnf 2\n"),
    ("line 1: 'p cnf VARIABLES CLAUSES' is wanted", "p cnf -2 1\n"),
    ("line 1: the formula has no variables: an oracle needs at least one", "p cnf 0 0\n"),
    ("line 2: 'a' is no literal", "p cnf 2 1\n1 a 0\n"),
    ("line 2: '1.5' is no literal", "p cnf 2 1\n1.5 0\n"),
    ("line 3: variable 3 is beyond the 2 of the header", "p cnf 2 1\n1\n-3 0\n"),
    ("the header says 2 clauses, the file has 1", "p cnf 2 2\n1 2 0\n"),
    ("the header says 1 clauses, the file has 2", "p cnf 2 1\n1 0 2\n"),
    ("line 2: 'c p show': a projection keeps an input", "p cnf 2 1\nc p show 1 0\n1 2 0\n"),
    ("line 1: 'c ind': a projection keeps an input", "c ind 1 2 0\np cnf 2 1\n1 2 0\n"),
    ("line 2: 'x1' is no literal", "p cnf 2 1\n2 x1 0\n"),
]

PLA = [
    ("bad.pla: .i is missing: this is not a PLA", "# nothing\n"),
    ("bad.pla: .o is missing: this is not a PLA", ".i 2\n"),
    ("line 1: .i is missing before the first row", "00 1\n"),
    ("line 2: .o is missing before the first row", ".i 2\n00 1\n"),
    ("line 1: .i wants one number, not 'two'", ".i two\n"),
    ("line 1: .i wants a number from 1 on, not 0", ".i 0\n"),
    ("line 2: a second .i", ".i 2\n.i 2\n"),
    ("line 3: 4 columns, but .i 2 and .o 1 make 3", ".i 2\n.o 1\n00 11\n"),
    ("line 3: 5 columns, but .i 2 and .o 1 make 3", ".i 2\n.o 1\n00\n11 1\n.e\n"),
    ("line 3: the row has 2 columns, 3 are wanted", ".i 2\n.o 1\n00\n.e\n"),
    ("line 3: the row has 2 columns, 3 are wanted", ".i 2\n.o 1\n00\n"),
    ("line 3: column 1 of an input part is 'x': 0, 1 and - are allowed", ".i 2\n.o 1\n0x 1\n"),
    ("line 3: column 0 of an input part is '~'", ".i 2\n.o 1\n~0 1\n"),
    ("line 3: column 0 of an output part is '3': 0, 1, - and ~ are allowed", ".i 2\n.o 1\n00 3\n"),
    ("line 3: .type f, fd, fr or fdr is wanted, not 'dr'", ".i 2\n.o 1\n.type dr\n"),
    ("line 4: .type belongs before the first row", ".i 2\n.o 1\n00 1\n.type f\n"),
    ("line 2: .ilb wants 2 names, not 1", ".i 2\n.ilb a\n.o 1\n"),
    ("line 1: .ob belongs behind .o", ".ob a\n"),
    ("line 1: .mv (variables of many values) is not supported", ".mv 4 2 3\n"),
    ("line 1: '.foo' is unknown: .i .o .p .type .ilb .ob .e and .end are known", ".foo\n"),
    ("line 5: there is more behind .e", ".i 1\n.o 1\n1 1\n.e\n0 1\n"),
    (".p promises 3 rows, but the file ends after 1, without .e: it seems to be cut off",
     ".i 1\n.o 1\n.p 3\n1 1\n"),
    ("output 1 is both 1 (row 1) and 0 (row 3) at the input v = 2, columns 01: on and off",
     ".i 2\n.o 2\n.type fr\n-1 11\n1- ~~\n0- 10\n.e\n"),
]  # fmt: skip

INLINE = [
    ("--where needs the words it reads", ((), (), None)),
    ("--input 'a': write it as a=4", (("a",), (), None)),
    ("--input 'a=x': a width is wanted, such as a=4, k=3s (signed) or cell=2x5", (("a=x",), (), None)),
    ("--input a is given twice", (("a=1", "a=2"), (), None)),
    ("[inputs] a bits: an integer from 1 on is wanted, not 0", (("a=0",), (), None)),
    ("--constant 'k': write it as NAME=JSON", (("a=1",), ("k",), None)),
    ("--constant 'k=[1': JSON is wanted, such as edges=[[0, 1], [1, 2]]", (("a=1",), ("k=[1",), None)),
    ("--constant 'k=NaN': JSON is wanted", (("a=1",), ("k=NaN",), None)),
    ("[constants] k: integers, Booleans and lists of them are wanted, not 0.5", (("a=1",), ("k=0.5",), None)),
    ("[constants] k[0]: integers, Booleans and lists of them are wanted, not None",
     (("a=1",), ("k=[null]",), None)),
    ("[constants]: a is already a name of [inputs]", (("a=1",), ("a=1",), None)),
]  # fmt: skip


def assert_says(wanted: str, error: RevsynthError, source: str) -> None:
    message = str(error)
    assert wanted in message
    assert message.startswith(source)
    assert "\n" not in message
    assert len(message) < 400
    assert error.exit_status == 2


@pytest.mark.parametrize(("wanted", "text"), TOML)
def test_toml(wanted: str, text: str) -> None:
    with pytest.raises(SpecError) as caught:
        understand(parse_toml(text, "bad.toml"))
    assert_says(wanted, caught.value, "bad.toml: ")


@pytest.mark.parametrize(("wanted", "formula"), FORMULA)
def test_formula(wanted: str, formula: str) -> None:
    words = (Word("cell", 2, count=3), Word("b", 1))
    with pytest.raises(SpecError) as caught:
        understand(Spec(words, Predicate(formula=formula), source="bad.toml"))
    assert_says(wanted, caught.value, "bad.toml: [predicate] formula: ")


def test_a_word_named_as_a_constant_of_formulas() -> None:
    with pytest.raises(SpecError, match="the word true cannot be told from the constant true: rename it"):
        understand(Spec((Word("true", 1),), Predicate(formula="1")))


def test_a_formula_without_end() -> None:
    with pytest.raises(SpecError, match="characters are too many: 2000000 are allowed"):
        understand(Spec((Word("b", 1),), Predicate(formula="b " * 1_000_001)))


@pytest.mark.parametrize(("wanted", "text"), CNF)
def test_cnf(wanted: str, text: str) -> None:
    with pytest.raises(SpecError) as caught:
        parse_dimacs(text, "bad.cnf")
    assert_says(wanted, caught.value, "bad.cnf: ")


@pytest.mark.parametrize(("wanted", "text"), PLA)
def test_pla(wanted: str, text: str) -> None:
    with pytest.raises(SpecError) as caught:
        understand(parse_pla(text, "bad.pla"))
    assert_says(wanted, caught.value, "bad.pla: ")


@pytest.mark.parametrize(("wanted", "options"), INLINE)
def test_command_line(wanted: str, options: tuple[tuple[str, ...], tuple[str, ...], str | None]) -> None:
    with pytest.raises(SpecError) as caught:
        inline_spec("a == 1", *options)
    assert_says(wanted, caught.value, "command line: ")


def test_too_many_variables_of_a_cnf_are_refused_before_memory_is_used() -> None:
    with pytest.raises(SpecError, match=r"big\.cnf: 100000 input bits: up to 65536 are allowed"):
        understand(parse_dimacs("p cnf 100000 1\n1 0\n", "big.cnf"))
