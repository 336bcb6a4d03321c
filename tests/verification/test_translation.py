"""The second translation of a spec means what the spec means, at every input where it has a value."""

from __future__ import annotations

import pytest
from hypothesis import given
from hypothesis import strategies as st

from revsynth.errors import ExpressionError
from revsynth.spec.expectation import Expectation
from revsynth.spec.expression import Scope, parse
from revsynth.spec.layout import decode
from revsynth.spec.model import Clauses, Cover, Predicate, Spec, Word
from revsynth.spec.reference import evaluate
from revsynth.spec.toml_reader import parse_toml
from revsynth.spec.understand import understand
from revsynth.verification.translation import translate
from revsynth.verification.translation.gates import TooLargeToTranslateError
from revsynth.verification.translation.lists import Items
from revsynth.verification.translation.numbers import Arithmetic, Number, constant, known, limits, trimmed
from revsynth.verification.translation.walk import Walk
from tests.spec.agreement import parsed
from tests.spec.random_expressions import SCOPE, WORDS, Text, expressions
from tests.spec.test_expression_agreement import CHOSEN
from tests.verification.table_gates import TableGates


def values(number: Number, gates: TableGates, inputs: int) -> list[int]:
    """The integer at every input."""
    tables = [gates.table(bit) for bit in number]
    top = len(tables) - 1
    return [
        sum((table >> x & 1) << place for place, table in enumerate(tables))
        - ((tables[-1] >> x & 1) << top + 1)
        for x in range(1 << inputs)
    ]


def words_of(gates: TableGates) -> dict[str, Number | Items]:
    """The words of the random expressions' scope over the inputs of `gates`."""
    found: dict[str, Number | Items] = {}
    place = 0
    for word in WORDS:
        numbers = []
        for _ in word.elements():
            bits = tuple(gates.inputs[place : place + word.bits])
            numbers.append(bits if word.signed else (*bits, 0))
            place += word.bits
        found[word.name] = numbers[0] if word.count is None else Items.of(numbers)
    return found


def check(text: str) -> None:
    """The walk agrees with the reference wherever the reference has a value."""
    expression = parsed(text)
    for by_columns in (False, True):
        gates = TableGates(SCOPE.input_bits)
        try:
            number = Walk(expression, gates, words_of(gates), by_columns=by_columns).result()
        except TooLargeToTranslateError:
            continue
        compare(text, values(number, gates, SCOPE.input_bits))


def compare(text: str, found: list[int]) -> None:
    """The values are those of the reference."""
    expression = parsed(text)
    for x in range(1 << SCOPE.input_bits):
        try:
            wanted = evaluate(expression, decode(WORDS, x))
        except ExpressionError:
            continue
        assert found[x] == int(wanted), (text, x)


@given(expressions())
def test_random_expressions(text: Text) -> None:
    check(text[0])


@pytest.mark.parametrize("line", CHOSEN.strip().splitlines())
def test_chosen_expressions(line: str) -> None:
    check(line.partition("::")[0].strip())


NUMBERS = st.integers(-40, 40)


@given(NUMBERS, NUMBERS, st.integers(0, 6))
def test_constants_are_folded_as_python_counts(a: int, b: int, n: int) -> None:
    numbers = Arithmetic(TableGates(1))
    x, y, count = constant(a), constant(b), constant(n)
    assert known(x) == a
    assert limits(x) == (a, a)
    wanted = {
        "add": a + b, "subtract": a - b, "multiply": a * b,
    }  # fmt: skip
    for name, value in wanted.items():
        assert known(getattr(numbers, name)(x, y)) == value
    assert known(numbers.left_shift(x, count)) == a << n
    assert known(numbers.right_shift(x, count)) == a >> n
    assert known(numbers.power(x, count)) == a**n
    assert (numbers.less(x, y), numbers.equal(x, y)) == (a < b, a == b)
    if b:
        assert tuple(map(known, numbers.divide(x, y))) == divmod(a, b)
        assert known(numbers.power_modulo(x, count, y)) == pow(a, n, b)


def test_numbers_are_only_as_wide_as_they_must() -> None:
    assert trimmed([1, 0, 0, 0]) == (1, 0)
    assert trimmed([1, 1, 1]) == (1,)
    with pytest.raises(TooLargeToTranslateError, match="a number of"):
        Arithmetic(TableGates(1)).power(constant(2), constant(9000))


SPECS = {
    "outputs": """
        [inputs]
        a = 3
        k = { bits = 3, signed = true }
        [domain]
        where = "k != 0"
        [outputs]
        total = { value = "a * k", bits = 7, signed = true }
        rest = { value = "a % k", bits = 3, signed = true }
        """,
    "map": """
        [inputs]
        a = 4
        b = 2
        [domain]
        where = "a < 11"
        [permutation]
        map = { a = "(a + 3 * b) % 11" }
        """,
    "formula": """
        [inputs]
        a = 4
        cell = { bits = 1, count = 3 }
        [predicate]
        formula = '''Majority(a[0], a[1], cell[2]) ^ OneHot(a[2], cell[0], a[3])
                     => OneHot0(a[0], cell[1]) & a[3] ? a[1] : Xor(a[2], a[0], 1)'''
        """,
}


@pytest.mark.parametrize("name", SPECS)
def test_specs(name: str) -> None:
    check_spec(parse_toml(SPECS[name]))


ROWS = st.tuples(st.text("01-", min_size=4, max_size=4), st.text("01-~", min_size=2, max_size=2))


@given(st.sampled_from(["f", "fd", "fr", "fdr"]), st.lists(ROWS, max_size=6))
def test_covers(kind: str, rows: list[tuple[str, str]]) -> None:
    cover = Cover(4, 2, kind, tuple(rows))  # type: ignore[arg-type]
    spec = Spec((Word("v", 4),), _outputs_of(cover))
    try:
        understand(spec)
    except ExpressionError:
        return
    except ValueError:
        return
    check_spec(spec)


def _outputs_of(cover: Cover):  # type: ignore[no-untyped-def]
    from revsynth.spec.model import Outputs

    return Outputs(cover=cover)


LITERALS = st.integers(1, 5).flatmap(lambda v: st.sampled_from([v, -v]))
CLAUSES = st.lists(st.lists(LITERALS, max_size=4).map(tuple), max_size=6).map(tuple)


@given(CLAUSES, CLAUSES)
def test_clauses(clauses: tuple[tuple[int, ...], ...], xors: tuple[tuple[int, ...], ...]) -> None:
    check_spec(Spec((Word("v", 5),), Predicate(clauses=Clauses(5, clauses, xors))))


def check_spec(spec: Spec) -> None:
    """Bits, free values and domain at all inputs, against the plain evaluation of the spec."""
    for by_columns in (False, True):
        check_translation(spec, by_columns=by_columns)


def check_translation(spec: Spec, *, by_columns: bool) -> None:
    """The same for one way to add."""
    understanding = understand(spec)
    gates = TableGates(spec.input_bits)
    found = translate(spec, understanding.outputs, gates, gates.inputs, by_columns=by_columns)
    expectation = Expectation(understanding)
    bits, free = [[gates.table(bit) for bit in row] for row in (found.bits, found.free)]
    domain = gates.table(found.domain)
    for x in range(1 << spec.input_bits):
        assert domain >> x & 1 == expectation.in_domain(x)
        if not domain >> x & 1:
            continue
        wanted = tuple(
            None if open_ >> x & 1 else bit >> x & 1 for bit, open_ in zip(bits, free, strict=True)
        )
        assert wanted == expectation(x), x


def test_tables_are_not_translated() -> None:
    spec = parse_toml('[inputs]\na = 2\n[predicate]\ntable = "0110"')
    gates = TableGates(2)
    with pytest.raises(TooLargeToTranslateError, match="a table"):
        translate(spec, (), gates, gates.inputs)


def test_wide_words_are_translated() -> None:
    """Evaluated at one input by constants: 64-bit words against Python's own integers."""
    scope_text = "(a * b + a // (b + 1)) % 2**64 == 12345 or max(a, b) - popcount(a ^ b) > 1 << 63"
    spec = parse_toml(f'[inputs]\na = 64\nb = 64\n[predicate]\nwhere = "{scope_text}"')
    assert isinstance(spec.body, Predicate)
    for a, b in [(3, 5), ((1 << 64) - 1, 1), (1 << 63, (1 << 63) + 9), (12345, 0)]:
        bits = [(value >> place & 1) for value in (a, b) for place in range(64)]
        expression = parse(scope_text, Scope({word.name: word for word in spec.inputs}))
        for by_columns in (False, True):
            found = translate(spec, (), TableGates(1), bits, by_columns=by_columns)
            assert found.bits == (int(evaluate(expression, {"a": a, "b": b})),)
